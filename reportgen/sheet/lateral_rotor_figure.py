"""The rotor drawn to scale: shaft, discs, supports, probes, stations."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.sheet.figures import BLUE, GREY, INK, ORANGE, RED, new

if TYPE_CHECKING:
    from reportgen.assess.lateral_model import LateralAssessment
    from reportgen.sheet.sheet import Sheet

_STEEL = "#c9d2dc"
_ADDED = "#eef1f5"


def rotor_figure(sheet: Sheet, calc: LateralAssessment) -> tuple[Any, str]:
    """Return the drawing and what it shows in words."""
    figure, ax = new(1, 1, height=2.9)
    model, rotor = calc.whirl.model, calc.whirl.built.rotor
    scale = float(sheet.to_reader(1.0, "length"))
    ends = np.array(calc.whirl.built.ends) * scale
    biggest = _shaft(ax, model, scale)
    for disc in rotor.discs:
        radius = scale * math.sqrt(2.0 * disc.polar_inertia / disc.mass)
        width = 0.012 * float(ends[-1])
        x = float(ends[disc.station])
        ax.fill(
            [x - width, x + width, x + width, x - width],
            [-radius, -radius, radius, radius],
            facecolor="white", edgecolor=INK, hatch="//////", linewidth=0.8, zorder=3,
        )  # fmt: skip
        biggest = max(biggest, radius)
    for part in rotor.couplings:
        ax.plot([ends[part.station]], [0.0], "s", color=GREY, markersize=6, zorder=4)
    for support in model.supports:
        x = scale * float(model.positions[support.node])
        mark = "^" if support.bearing.carries_weight else "v"
        y = -_radius(model, support.node, scale)
        ax.plot([x], [y - 0.06 * biggest], mark, color=BLUE, markersize=9, zorder=5)
        name = support.bearing.name
        ax.annotate(name, (x, y), xytext=(0, -16), textcoords="offset points", ha="center",
                    va="top", fontsize=7.2, color=BLUE, zorder=6)  # fmt: skip
    _probes(ax, calc, scale, biggest)
    for index in sorted({0, len(ends) - 1, *range(0, len(ends), max(1, len(ends) // 12))}):
        ax.annotate(str(index + 1), (ends[index], -1.55 * biggest), fontsize=6.4, color=GREY,
                    ha="center", va="top")  # fmt: skip
    ax.axhline(0.0, color=GREY, linewidth=0.6, linestyle=(0, (8, 2, 2, 2)))
    ax.set_aspect("equal", adjustable="datalim")
    ax.set_ylim(-1.9 * biggest, 1.75 * biggest)
    ax.set_xlabel(f"Position from the left end ({sheet.unit('length')}); numbers: stations")
    ax.set_yticks([])
    ax.grid(visible=False)
    words = (
        f"The rotor to scale: {len(ends)} stations over "
        f"{sheet.show(float(ends[-1]) / scale, 'length')}, {len(rotor.discs)} discs (hatched, at "
        f"their radius of gyration), {len(model.supports)} supports (triangles), "
        f"{len(calc.whirl.case.probes)} probes (arrows)."
    )
    return figure, words


def _shaft(ax: Any, model: Any, scale: float) -> float:
    """Draw every element of the mesh; return the largest radius drawn."""
    biggest = 0.0
    for index, section in enumerate(model.sections):
        x = scale * model.positions[index : index + 2]
        left, right = section.outer, section.outer_right or section.outer
        added = section.mass_outer
        if added is not None:
            r = 0.5 * scale * added
            ax.fill([*x, x[1], x[0]], [-r, -r, r, r], facecolor=_ADDED, edgecolor=GREY,
                    linewidth=0.4, zorder=1)  # fmt: skip
            biggest = max(biggest, r)
        a, b = 0.5 * scale * left, 0.5 * scale * right
        ax.fill([x[0], x[1], x[1], x[0]], [-a, -b, b, a], facecolor=_STEEL, edgecolor=INK,
                linewidth=0.5, zorder=2)  # fmt: skip
        if section.inner > 0.0:
            c = 0.5 * scale * section.inner
            ax.fill([*x, x[1], x[0]], [-c, -c, c, c], facecolor="white", edgecolor=GREY,
                    linewidth=0.4, linestyle="--", zorder=2)  # fmt: skip
        biggest = max(biggest, a, b)
    return biggest


def _radius(model: Any, node: int, scale: float) -> float:
    return 0.5 * scale * float(model.sections[min(node, len(model.sections) - 1)].outer)


def _probes(ax: Any, calc: LateralAssessment, scale: float, biggest: float) -> None:
    """Draw an arrow for each station with probes, their names together."""
    model = calc.whirl.model
    by_node: dict[int, list[str]] = {}
    for probe in calc.whirl.case.probes:
        node = model.node(calc.whirl.built.station(probe))
        by_node.setdefault(node, []).append(probe.name)
    for node, names in by_node.items():
        x, top = scale * float(model.positions[node]), _radius(model, node, scale)
        look = {"arrowstyle": "-|>", "color": ORANGE, "linewidth": 1.2}
        ax.annotate("", (x, top), xytext=(x, top + 0.45 * biggest), arrowprops=look, zorder=6)
        ax.annotate(", ".join(names), (x, top + 0.5 * biggest), fontsize=7.2, color=ORANGE,
                    ha="center", va="bottom", zorder=6)  # fmt: skip
    for place in calc.whirl.case.clearances:
        x = scale * float(model.positions[model.node(calc.whirl.built.station(place))])
        ax.plot([x, x], [1.28 * biggest, 1.38 * biggest], color=RED, linewidth=1.2)
