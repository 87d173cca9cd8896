"""Figures of the one-mass rotor: response, passage, orbit."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.sheet.figures import BLUE, GREY, INK, LINES, ORANGE, RED, new

if TYPE_CHECKING:
    from reportgen.assess.one_mass import OneMassAssessment
    from reportgen.assess.one_mass_passage import PassageFindings
    from reportgen.sheet.sheet import Sheet


def response_figure(sheet: Sheet, calc: OneMassAssessment) -> tuple[Any, str]:
    """Return the figure of amplitude and phase against speed, and its finding in words."""
    figure, (top, low) = new(2, 1, height=4.4, sharex=True, height_ratios=(2, 1))
    x = sheet.to_reader(calc.curve_speed, "speed")
    y = sheet.to_reader(np.abs(calc.curve), "displacement")
    top.plot(x, y, label="Amplitude, 0-peak", **LINES[0])
    low.plot(x, calc.curve_lag * 180 / np.pi, label="Phase lag", **LINES[0])
    top.set_ylim(0, 1.22 * float(y.max()))
    low.set_ylim(-8, 188)
    low.set_yticks([0, 45, 90, 135, 180])
    top.set_ylabel(f"Amplitude, 0-peak ({sheet.unit('displacement')})")
    low.set_ylabel("Phase lag (°)")
    low.set_xlabel(f"Speed ({sheet.unit('speed')})")
    low.set_xlim(0, float(x[-1]))
    _operating_range(sheet, calc, top, low)
    words = []
    if calc.peak.exists:
        at = float(sheet.to_reader(calc.peak.speed, "speed"))
        high = float(sheet.to_reader(calc.peak.amplitude, "displacement"))
        for ax in (top, low):
            ax.axvline(at, color=RED, linewidth=0.9, linestyle=(0, (4, 2)))
        label(top, at, high, f"critical {sheet.show(calc.peak.speed, 'speed')}", RED, float(x[-1]))
        words.append(
            f"the amplitude peaks at {sheet.show(calc.peak.speed, 'speed')} with "
            f"{sheet.show(calc.peak.amplitude, 'displacement')} 0-peak"
        )
    else:
        words.append("the amplitude has no peak at any speed")
    words.append(
        f"at rated speed {sheet.show(calc.speeds['rated'], 'speed')} it is "
        f"{sheet.show(calc['amplitude-rated'].value, 'displacement')} 0-peak"
    )
    return figure, "Unbalance response against speed: " + "; ".join(words) + "."


def _operating_range(sheet: Sheet, calc: OneMassAssessment, *axes: Any) -> None:
    low, high = (float(sheet.to_reader(v, "speed")) for v in calc.operating_range)
    required = [float(sheet.to_reader(v, "speed")) for v in calc.required_range]
    rated = float(sheet.to_reader(calc.speeds["rated"], "speed"))
    for ax in axes:
        if high > low:
            ax.axvspan(low, high, color="#dbe6f1", zorder=0)
        ax.axvline(rated, color=INK, linewidth=0.9)
        if required != [low, high]:
            for a, b in ((required[0], low), (high, required[1])):
                ax.axvspan(
                    a, b, facecolor="none", edgecolor="#b9c2cc", hatch="////", linewidth=0, zorder=0
                )
    top = axes[0]
    limit = float(sheet.to_reader(calc.curve_speed[-1], "speed"))
    height = top.get_ylim()[1]
    label(top, rated, height * 0.985, "rated", INK, limit)
    if required != [low, high]:
        top.text(
            0.5,
            -0.045,
            "shaded: operating range   hatched: margin required of it",
            transform=top.transAxes,
            ha="center",
            va="top",
            fontsize=7.2,
            color=GREY,
        )


def label(ax: Any, x: float, y: float, words: str, color: str, x_limit: float) -> None:
    """Write words beside a point, on the side that has room."""
    right = x < 0.7 * x_limit
    ax.annotate(
        words,
        (x, y),
        xytext=(4 if right else -4, -1),
        textcoords="offset points",
        ha="left" if right else "right",
        va="top",
        fontsize=7.6,
        color=color,
        bbox={"facecolor": "white", "alpha": 0.8, "edgecolor": "none", "pad": 0.8},
    )


def passage_figure(sheet: Sheet, calc: OneMassAssessment, one: PassageFindings) -> tuple[Any, str]:
    """Return the figure of a passage's envelope against time and against speed."""
    figure, (left, right) = new(1, 2, height=2.9, sharey=True)
    size = sheet.to_reader(np.abs(one.displacement), "displacement")
    speed = sheet.to_reader(one.speed, "speed")
    steady = sheet.to_reader(np.abs(one.steady), "displacement")
    left.plot(one.time, size, label="Passage", **LINES[0])
    left.set_xlabel("Time (s)")
    left.set_ylabel(f"Amplitude, 0-peak ({sheet.unit('displacement')})")
    right.plot(speed, steady, label="Steady state", **LINES[1])
    right.plot(speed, size, label="Passage", **LINES[0])
    right.set_xlabel(f"Speed ({sheet.unit('speed')})")
    if one.speed[-1] < one.speed[0]:
        right.invert_xaxis()  # reads in the order of time
    ceiling = max(float(size.max()), float(steady.max()))
    for ax in (left, right):
        ax.set_ylim(0, 1.3 * ceiling)
    if calc.peak.exists:
        critical = float(sheet.to_reader(calc.peak.speed, "speed"))
        if min(speed) <= critical <= max(speed):
            right.axvline(critical, color=RED, linewidth=0.9, linestyle=(0, (4, 2)))
            right.text(
                critical, 1.29 * ceiling, " critical", color=RED, fontsize=7.4, va="top", ha="left"
            )
    right.legend(loc="upper left" if one.speed[-1] > one.speed[0] else "upper right", fontsize=7.4)
    peak = sheet.show(one.peak.amplitude, "displacement")
    if one.peak.crossed:
        words = (
            f"{one.name}: the largest amplitude is {peak} 0-peak at "
            f"{sheet.show(one.peak.speed, 'speed')}; steady running at the critical would reach "
            f"{sheet.show(one.peak.steady_peak, 'displacement')}."
        )
    else:
        words = f"{one.name}: the critical is not passed; the largest amplitude is {peak} 0-peak."
    return figure, words


def orbit_figure(sheet: Sheet, one: PassageFindings) -> tuple[Any, str]:
    """Return the figure of the shaft centre's path around the largest amplitude."""
    figure, ax = new(1, 1, height=2.7)
    z = one.orbit
    x, y = sheet.to_reader(z.real, "displacement"), sheet.to_reader(z.imag, "displacement")
    ax.plot(x, y, label="Shaft centre", color=BLUE, linewidth=1.1)
    ax.plot(x[:1], y[:1], "o", color=ORANGE, markersize=5)
    ax.annotate("start", (x[0], y[0]), xytext=(5, 4), textcoords="offset points", fontsize=7.4)
    ax.set_aspect("equal", adjustable="datalim")
    unit = sheet.unit("displacement")
    ax.set_xlabel(f"x, horizontal ({unit})")
    ax.set_ylabel(f"y, vertical up ({unit})")
    area = float(np.sum(x[:-1] * y[1:] - x[1:] * y[:-1]))
    sense = "with" if area > 0 else "against"
    words = (
        f"{one.name}: path of the shaft centre around the largest amplitude, "
        f"{sheet.show(one.peak.amplitude, 'displacement')} 0-peak; "
        f"it whirls {sense} the sense of rotation."
    )
    return figure, words
