"""Figures of the lateral review: response, shapes, critical speed map, damped modes."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.sheet.figures import BLUE, GREY, INK, LINES, RED, new

if TYPE_CHECKING:
    from reportgen.assess.lateral_model import LateralAssessment
    from reportgen.sheet.sheet import Sheet

_SENSE = {"forward": ("-", "o"), "backward": ((0, (5, 1.6)), "s")}


def ranges(sheet: Sheet, calc: LateralAssessment, *axes: Any) -> None:
    """Shade the operating range and hatch the margin required of it."""
    low, high = (float(sheet.to_reader(v, "speed")) for v in calc.operating_range)
    below, above = (float(sheet.to_reader(v, "speed")) for v in calc.required_range)
    for ax in axes:
        ax.axvspan(low, high, color="#dbe6f1", zorder=0)
        for a, b in ((below, low), (high, above)):
            if b > a:
                ax.axvspan(a, b, facecolor="none", edgecolor="#b9c2cc", hatch="////",
                           linewidth=0, zorder=0)  # fmt: skip


def response_figure(sheet: Sheet, calc: LateralAssessment, number: int) -> tuple[Any, str]:
    """Return amplitude and phase at every probe for one unbalance case, and its finding."""
    figure, (top, low) = new(2, 1, height=4.3, sharex=True, height_ratios=(2, 1))
    whirl = calc.whirl
    response = whirl.responses[number]
    x = sheet.to_reader(whirl.row, "speed")
    highest = (0.0, 0, "")
    for index, place in enumerate(whirl.places):
        curve = response.probe(place.station, place.angle)
        size = sheet.to_reader(np.abs(curve), "displacement")
        style = LINES[index % len(LINES)]
        top.plot(x, size, label=place.name, **style)
        lag = np.degrees(np.unwrap(-np.angle(curve)))
        low.plot(x, lag - 360.0 * math.floor(float(lag[0]) / 360.0), label=f"{place.name}, lag",
                 **style)  # fmt: skip
        at = int(np.argmax(np.abs(curve)))
        if float(np.abs(curve[at])) > highest[0]:
            highest = (float(np.abs(curve[at])), at, place.name)
    ceiling = 1.25 * float(sheet.to_reader(highest[0], "displacement")) or 1.0
    top.set_ylim(0.0, ceiling)
    for one in calc.criticals:
        if one.found.case != number:
            continue
        peak = one.found.peak
        half = [v for v in (peak.lower, peak.upper) if v is not None]
        level = float(sheet.to_reader(peak.amplitude / math.sqrt(2.0), "displacement"))
        top.plot(sheet.to_reader(np.array(half), "speed"), [level] * len(half), "D", color=RED,
                 markersize=3.5, markerfacecolor="white", zorder=6)  # fmt: skip
        at_speed = float(sheet.to_reader(peak.speed, "speed"))
        for ax in (top, low):
            ax.axvline(at_speed, color=RED, linewidth=0.8, linestyle=(0, (4, 2)))
        top.text(at_speed, ceiling * 0.99, f" {one.id.removeprefix('critical-')}", color=RED,
                 fontsize=7.4, va="top")  # fmt: skip
    ranges(sheet, calc, top, low)
    top.set_ylabel(f"Amplitude, 0-peak ({sheet.unit('displacement')})")
    low.set_ylabel("Phase lag (°)")
    low.set_xlabel(
        f"Speed ({sheet.unit('speed')}); shaded: operating range, hatched: margin required, "
        "diamonds: half-power points"
    )
    low.set_xlim(0.0, float(x[-1]))
    top.legend(loc="upper left", fontsize=7.4, ncols=2)
    name = whirl.case.unbalance_cases[number].name
    words = (
        f"Response to the unbalance case {name}: the largest amplitude at a probe is "
        f"{sheet.show(highest[0], 'displacement')} 0-peak, at {highest[2]} and "
        f"{sheet.show(float(whirl.row[highest[1]]), 'speed')}."
    )
    return figure, words


def shapes_figure(sheet: Sheet, calc: LateralAssessment) -> tuple[Any, str]:
    """Return the whirl along the shaft at criticals and rated speed, against clearances."""
    figure, ax = new(1, 1, height=3.2)
    model = calc.whirl.model
    x = sheet.to_reader(model.positions, "length")
    ordered = sorted(calc.criticals, key=lambda one: -one.found.peak.amplitude)[:3]
    for index, one in enumerate(sorted(ordered, key=lambda one: one.found.peak.speed)):
        name = f"at critical {one.id.removeprefix('critical-')}"
        ax.plot(x, sheet.to_reader(one.shape, "displacement"), label=name, **LINES[index + 1])
    ax.plot(x, sheet.to_reader(calc.rated_shape, "displacement"), label="at rated speed",
            **LINES[0])  # fmt: skip
    closest = math.inf
    for number, place in enumerate(calc.whirl.case.clearances):
        node = model.node(calc.whirl.built.station(place))
        size = float(sheet.to_reader(float(place.clearance), "displacement"))
        ax.plot([x[node]], [size], "v", color=INK, markersize=6)
        ax.annotate(place.name, (x[node], size), xytext=(0, 5 + 10 * (number % 3)),
                    textcoords="offset points", ha="center", fontsize=7.0)  # fmt: skip
        closest = min(closest, float(place.clearance) / max(float(calc.rated_shape[node]), 1e-12))
    ax.set_yscale("log")
    low, high = ax.get_ylim()
    ax.set_ylim(low, 2.5 * high)
    ax.set_xlabel(f"Position from the left end ({sheet.unit('length')})")
    ax.set_ylabel(f"Whirl, 0-peak ({sheet.unit('displacement')})")
    ax.legend(loc="lower center", fontsize=7.4, ncols=4)
    words = "Whirl along the shaft at the critical speeds and at rated speed"
    if math.isfinite(closest):
        words += (
            f"; at rated speed the closest clearance (triangles) is {closest:.3g} times the whirl"
        )
    return figure, words + "."


def modes_figure(sheet: Sheet, calc: LateralAssessment) -> tuple[Any, str]:
    """Return the undamped mode shapes on the supports' stiffness at rated speed."""
    figure, ax = new(1, 1, height=2.7)
    model = calc.whirl.model
    x = sheet.to_reader(model.positions, "length")
    shown = []
    for index, speed in enumerate(calc.undamped.speeds):
        words = f"mode {index + 1}, {sheet.show(float(speed), 'speed')}"
        ax.plot(x, calc.undamped.shapes[index, :, 0], label=words, **LINES[index])
        shown.append(words)
    for support in model.supports:
        ax.plot([x[support.node]], [0.0], "^", color=BLUE, markersize=7)
    ax.axhline(0.0, color=INK, linewidth=0.6)
    ax.set_ylim(-1.25, 1.55)
    ax.set_xlabel(f"Position from the left end ({sheet.unit('length')})")
    ax.set_ylabel("Deflection, largest 1")
    ax.legend(loc="upper center", fontsize=7.4, ncols=3)
    return (
        figure,
        f"Undamped forward synchronous modes on the supports (triangles): {'; '.join(shown)}.",
    )


def map_figure(sheet: Sheet, calc: LateralAssessment) -> tuple[Any, str]:
    """Return the critical speed map with the supports' own stiffness laid over it."""
    figure, ax = new(1, 1, height=3.2)
    found = calc.map
    k = sheet.to_reader(found.stiffness, "stiffness")
    for mode in range(found.speeds.shape[1]):
        good = found.found[:, mode]
        if good.sum() < 2:
            continue
        speed = sheet.to_reader(found.speeds[good, mode], "speed")
        ax.plot(k[good], speed, label=f"mode {mode + 1}", **LINES[0])
        ax.annotate(f"{mode + 1}", (k[good][-1], speed[-1]), xytext=(4, 0),
                    textcoords="offset points", va="center", fontsize=7.6, color=BLUE)  # fmt: skip
    row, horizontal, vertical = calc.support_stiffness
    for values, name, style in (
        (horizontal, "supports, horizontal", LINES[1]),
        (vertical, "supports, vertical", LINES[2]),
    ):
        ax.plot(sheet.to_reader(values, "stiffness"), sheet.to_reader(row, "speed"), label=name,
                **style)  # fmt: skip
    low, high = (float(sheet.to_reader(v, "speed")) for v in calc.operating_range)
    ax.axhspan(low, high, color="#dbe6f1", zorder=0)
    ax.set_xscale("log")
    ax.set_yscale("log")
    ax.set_xlabel(f"Stiffness of each support ({sheet.unit('stiffness')})")
    ax.set_ylabel(f"Undamped critical speed ({sheet.unit('speed')})")
    handles, names = ax.get_legend_handles_labels()
    keep = [(h, n) for h, n in zip(handles, names, strict=True) if not n.startswith("mode")]
    ax.legend([h for h, _ in keep], [n for _, n in keep], loc="lower right", fontsize=7.4)
    meets = ", ".join(sheet.show(one.speed, "speed") for one in calc.actual)
    rigid = found.speeds[-1][found.found[-1]]
    words = [
        "Undamped critical speeds against support stiffness (numbers: modes; shaded: operating "
        "range).",
        f"On the bearings' own stiffness they are {meets}."
        if meets
        else "On the bearings' own stiffness there is none among them.",
    ]
    if rigid.size:
        words.append(
            f"On the stiffest supports drawn the lowest is {sheet.show(float(rigid[0]), 'speed')}."
        )
    return figure, " ".join(words)


def campbell_figure(sheet: Sheet, calc: LateralAssessment) -> tuple[Any, str]:
    """Return damped frequencies and decrements of the followed modes against speed."""
    figure, (top, low) = new(2, 1, height=4.8, sharex=True, height_ratios=(2, 1))
    chart = calc.chart
    x = sheet.to_reader(chart.speeds, "speed")
    ceiling = 1.75 * float(x[-1])
    decrements, swings = chart.decrements
    for mode in range(chart.present.shape[0]):
        for sense, (dash, mark) in _SENSE.items():
            here = chart.present[mode] & swings[mode] & (chart.sense[mode] == sense)
            if here.sum() < 2:
                continue
            f = np.where(here, sheet.to_reader(chart.frequencies[mode], "speed"), np.nan)
            if not np.nanmin(f) < ceiling:
                continue
            name = f"mode {mode + 1}, {sense}"
            color = BLUE if sense == "forward" else GREY
            look: dict[str, Any] = {"color": color, "linestyle": dash, "linewidth": 1.4}
            top.plot(x, f, label=name, marker=mark, markersize=2.2, **look)
            low.plot(x, np.where(here, decrements[mode], np.nan), label=name, **look)
    top.plot(x, x, label="once per turn", color=INK, linewidth=0.9)
    top.annotate("once per turn", (x[-1], x[-1]), xytext=(-2, -10), textcoords="offset points",
                 ha="right", fontsize=7.2)  # fmt: skip
    top.set_ylim(0.0, 1.12 * ceiling)
    low.axhline(0.0, color=RED, linewidth=0.9)
    low.set_ylim(-0.2, 2.0)
    low.text(float(x[0]), -0.04, "below: unstable", fontsize=7.2, color=RED, va="top")
    ranges(sheet, calc, top, low)
    top.set_ylabel(f"Damped frequency ({sheet.unit('speed')})")
    low.set_ylabel("Log. decrement")
    low.set_xlabel(
        f"Speed ({sheet.unit('speed')}); solid, circles: forward whirl; dashed, squares: backward"
    )
    onset = (
        "no mode becomes unstable over the speeds looked at"
        if calc.onset is None
        else f"a mode becomes unstable at {sheet.show(calc.onset.speed, 'speed')}"
    )
    least = calc["least-decrement"].value
    words = f"Damped modes against speed: {onset}"
    if least is not None:
        words += (
            f"; the least decrement of a forward mode at the highest running speed is {least:.3g}"
        )
    return figure, words + "."
