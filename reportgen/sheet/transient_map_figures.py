"""Figures of what a passage takes: peak against acceleration and damping, torques over speed."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.sheet.figures import GREY, INK, LINES, ORANGE, RED, new
from reportgen.sheet.transient_figures import critical

if TYPE_CHECKING:
    from reportgen.assess.transient_map import PeakMap
    from reportgen.assess.transient_model import TransientRun
    from reportgen.sheet.sheet import Sheet

_SMALL = 7.4
_DASHED = (0, (4, 2))


def map_figure(sheet: Sheet, run: TransientRun) -> tuple[Any, str]:
    """Return peak against acceleration, and where it can be had the map over damping as well."""
    found = run.map
    assert found is not None
    if found.grid is None:
        figure, ax = new(1, 1, height=3.0)
        _curves(sheet, ax, found)
    else:
        figure, (ax, right) = new(1, 2, height=3.1)
        _curves(sheet, ax, found)
        _contours(sheet, right, found)
    at = sheet.show(found.at, "acceleration_speed")
    words = (
        f"{run.name}: at {at} the peak is {sheet.show(found.peak, 'displacement')} 0-peak; "
        f"{_trend(sheet, found)}"
    )
    return figure, words


def _trend(sheet: Sheet, found: PeakMap) -> str:
    slow, fast = (float(found.curves[found.own, i]) for i in (0, -1))
    return (
        f"at {sheet.show(float(found.acceleration[0]), 'acceleration_speed', 3)} it would be "
        f"{sheet.show(slow, 'displacement')}, at "
        f"{sheet.show(float(found.acceleration[-1]), 'acceleration_speed', 3)} "
        f"{sheet.show(fast, 'displacement')}."
    )


def _curves(sheet: Sheet, ax: Any, found: PeakMap) -> None:
    x = sheet.to_reader(found.acceleration, "acceleration_speed")
    order = [found.own, *(i for i in range(len(found.curves)) if i != found.own)]
    for style, number in zip(LINES, order, strict=False):
        y = sheet.to_reader(found.curves[number], "displacement")
        if found.places:
            name = label = found.places[number]
        else:
            name = f"damping ratio {found.damping[number]:.3g}"
            label = f"ζ = {found.damping[number]:.3g}"
        ax.plot(x, y, label=name, **style)
        ax.annotate(
            label, xy=(x[0], y[0]), xytext=(3, 4), textcoords="offset points", fontsize=_SMALL,
            color=style["color"],
        )  # fmt: skip
    point = [float(sheet.to_reader(found.at, "acceleration_speed"))]
    ax.plot(point, [float(sheet.to_reader(found.peak, "displacement"))], "o", color=INK, ms=5)
    ax.annotate(
        "this run", xy=(point[0], float(sheet.to_reader(found.peak, "displacement"))),
        xytext=(5, 5), textcoords="offset points", fontsize=_SMALL, color=INK,
    )  # fmt: skip
    ax.set_xscale("log")
    top = float(sheet.to_reader(found.curves.max(), "displacement"))
    ax.set_ylim(0, 1.12 * top)
    if found.room is not None and found.room > 0:
        room = float(sheet.to_reader(found.room, "displacement"))
        if room < 1.12 * top:
            ax.axhline(room, color=RED, linewidth=0.9, linestyle=_DASHED)
            ax.annotate(
                "room in the closest clearance", xy=(1.0, room),
                xycoords=("axes fraction", "data"), xytext=(-2, 2), textcoords="offset points",
                fontsize=_SMALL, color=RED, ha="right",
                bbox={"facecolor": "white", "edgecolor": "none", "pad": 0.6, "alpha": 0.85},
            )  # fmt: skip
    ax.set_xlabel(f"Acceleration, size ({sheet.unit('acceleration_speed')})")
    ax.set_ylabel(f"Peak of the passage, 0-peak ({sheet.unit('displacement')})")


def _contours(sheet: Sheet, ax: Any, found: PeakMap) -> None:
    assert found.grid is not None
    assert found.grid_damping is not None
    x = sheet.to_reader(found.acceleration, "acceleration_speed")
    z = sheet.to_reader(found.grid, "displacement")
    low, high = float(z.min()), float(z.max())
    levels = np.unique([float(f"{v:.2g}") for v in np.geomspace(1.05 * low, 0.95 * high, 8)])
    lines = ax.contour(x, found.grid_damping, z, levels=levels, colors=GREY, linewidths=0.8)
    ax.clabel(lines, fmt="%g", fontsize=6.6)
    if found.room is not None and found.room > 0:
        room = float(sheet.to_reader(found.room, "displacement"))
        if low < room < high:
            ax.contour(x, found.grid_damping, z, levels=[room], colors=RED, linewidths=1.3)
    ax.plot(
        [float(sheet.to_reader(found.at, "acceleration_speed"))], [found.damping[found.own]],
        "o", color=INK, ms=5,
    )  # fmt: skip
    ax.annotate(
        "this run",
        xy=(float(sheet.to_reader(found.at, "acceleration_speed")), found.damping[found.own]),
        xytext=(5, 5), textcoords="offset points", fontsize=_SMALL, color=INK,
    )  # fmt: skip
    ax.set_xscale("log")
    red = "; red: clearance" if found.room is not None else ""
    title = f"equal peak ({sheet.unit('displacement')}){red}"
    ax.set_title(title, fontsize=_SMALL, loc="left")
    ax.set_xlabel(f"Acceleration, size ({sheet.unit('acceleration_speed')})")
    ax.set_ylabel("Damping ratio (–)")


def torque_figure(sheet: Sheet, run: TransientRun) -> tuple[Any, str]:
    """Return drive, load and what the steady whirl adds to it, against speed."""
    torques = run.drive
    assert torques is not None
    figure, ax = new(1, 1, height=3.0)
    x = sheet.to_reader(torques.speed, "speed")
    named = []
    if torques.drive is not None:
        named.append(("Drive", torques.drive))
    if torques.load is not None:
        named.append(("Load" if torques.drive is not None else "Drag", torques.load))
    if torques.whirl is not None and torques.drive is not None:
        load = 0.0 if torques.load is None else torques.load
        named.append(("Load and steady whirl", load + torques.whirl))
    if torques.drive is not None and torques.margin is not None:
        named.append(("Least drive that passes", torques.margin.least_factor * torques.drive))
    for style, (name, values) in zip(LINES, named, strict=False):
        ax.plot(x, sheet.to_reader(values, "torque"), label=name, **style)
    top = max(float(np.max(sheet.to_reader(v, "torque"))) for _, v in named)
    ax.set_ylim(0, 1.12 * top)
    ax.set_xlabel(f"Speed ({sheet.unit('speed')})")
    ax.set_ylabel(f"Torque ({sheet.unit('torque')})")
    critical(sheet, ax, run, vertical=True)
    words = f"{run.name}: "
    if run.stalled:
        state = run.hang_state
        speed = run.hang_speed if state is None else state.speed
        at = float(sheet.to_reader(speed, "speed"))
        torque = float(np.interp(speed or 0.0, torques.speed, named[0][1]))
        ax.plot([at], [float(sheet.to_reader(torque, "torque"))], "o", color=ORANGE, ms=6)
        ax.annotate(
            f"hangs at {sheet.show(speed, 'speed')}",
            xy=(at, float(sheet.to_reader(torque, "torque"))), xytext=(-8, 8),
            textcoords="offset points", fontsize=_SMALL, color=ORANGE, ha="right",
        )  # fmt: skip
        words += (
            "what load and steady whirl draw exceeds the drive at the critical speed; the rotor "
            f"hangs at {sheet.show(speed, 'speed')}."
        )
    elif torques.drive is None:
        words += f"the drag is up to {sheet.show(float(named[0][1].max()), 'torque')}."
    elif torques.margin is not None:
        words += (
            f"the drive passes with {sheet.show(torques.margin.margin, 'percent', 3)} more torque "
            "than the least that does."
        )
    elif torques.quasi_static is not None:
        words += (
            f"{sheet.show(torques.quasi_static, 'percent', 3)} of the drive carries load and "
            "steady whirl at every speed."
        )
    else:
        words += "drive and load torque."
    ax.legend(loc="lower center", bbox_to_anchor=(0.5, 1.0), fontsize=_SMALL, ncols=4)
    return figure, words
