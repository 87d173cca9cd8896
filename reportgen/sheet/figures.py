"""Figures in one style, and the numbers behind their curves.

The style is meant for paper first: curves differ by dash and weight before they differ
by colour, labels stand at the curves, and the axes carry quantity and unit.
"""

from __future__ import annotations

import io
import math
from typing import TYPE_CHECKING, Any, Literal, cast

import numpy as np

from reportgen.sheet.blocks import Axes, Curve

if TYPE_CHECKING:
    from matplotlib.axes import Axes as PlotAxes
    from matplotlib.figure import Figure as PlotFigure

INK = "#1d2733"
BLUE, ORANGE, GREEN, RED, GREY = "#0b5394", "#b45309", "#2f6f4f", "#9b1c31", "#6b7480"
LINES: tuple[dict[str, Any], ...] = (
    {"color": BLUE, "linestyle": "-", "linewidth": 1.6},
    {"color": ORANGE, "linestyle": (0, (5, 1.6)), "linewidth": 1.6},
    {"color": GREEN, "linestyle": (0, (1.2, 1.2)), "linewidth": 1.9},
    {"color": RED, "linestyle": (0, (6, 1.5, 1.2, 1.5)), "linewidth": 1.6},
    {"color": GREY, "linestyle": (0, (3, 1, 1, 1, 1, 1)), "linewidth": 1.6},
)
"""Curve styles in order of use; each is told apart by its dashes alone."""

WIDTH = 6.3  # inches: the text width of both A4 and Letter at the report's margins
_STYLE: dict[str, Any] = {
    "svg.hashsalt": "reportgen",
    "svg.fonttype": "path",
    "font.family": "DejaVu Sans",
    "font.size": 8.5,
    "axes.titlesize": 9,
    "axes.labelsize": 8.5,
    "axes.edgecolor": INK,
    "axes.labelcolor": INK,
    "axes.linewidth": 0.7,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.grid": True,
    "grid.color": "#d5dae0",
    "grid.linewidth": 0.5,
    "text.color": INK,
    "xtick.color": INK,
    "ytick.color": INK,
    "xtick.direction": "out",
    "legend.frameon": False,
    "figure.facecolor": "white",
    "path.simplify": True,
    "mathtext.fontset": "dejavusans",
}
_MOST_POINTS = 600


def new(rows: int = 1, columns: int = 1, height: float = 3.1, **kw: Any) -> tuple[Any, Any]:
    """Return a figure of the report's width and its axes, drawn in the report's style."""
    import matplotlib as mpl
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    with mpl.rc_context(cast("Any", _STYLE)):
        figure = Figure(figsize=(WIDTH, height), layout="constrained")
        FigureCanvasAgg(figure)
        axes = figure.subplots(rows, columns, **kw)
    return figure, axes


def drawing(figure: PlotFigure) -> tuple[str, list[Axes]]:
    """Return a figure as SVG text, and its axes with the curves drawn in them.

    Only curves with a name (a label that does not begin with an underscore) are read out.
    The same figure gives the same text at any time and place.
    """
    import matplotlib as mpl

    with mpl.rc_context(cast("Any", _STYLE)):
        buffer = io.StringIO()
        figure.savefig(buffer, format="svg", metadata={"Date": None, "Creator": None})
    svg = buffer.getvalue()
    return svg[svg.index("<svg") :], [_read(ax) for ax in figure.axes if _curves(ax)]


def _read(ax: PlotAxes) -> Axes:
    box = ax.get_position()
    return {
        "box": (
            round(box.x0, 5),
            round(1 - box.y1, 5),
            round(box.width, 5),
            round(box.height, 5),
        ),
        "x_title": _title(ax, "x"),
        "y_title": _title(ax, "y"),
        "x_range": cast("tuple[float, float]", tuple(_round(v) for v in ax.get_xlim())),
        "y_range": cast("tuple[float, float]", tuple(_round(v) for v in ax.get_ylim())),
        "x_scale": cast("Literal['linear', 'log']", ax.get_xscale()),
        "y_scale": cast("Literal['linear', 'log']", ax.get_yscale()),
        "curves": _curves(ax),
    }


def _title(ax: PlotAxes, which: Literal["x", "y"]) -> str:
    """Return an axis' title, of the one that shares it or stands in line with it if it has none."""
    shared = ax.get_shared_x_axes() if which == "x" else ax.get_shared_y_axes()
    in_line = [one for one in ax.figure.axes if _span(one, which) == _span(ax, which)]
    around = (ax, *shared.get_siblings(ax), *in_line)
    titles = [getattr(one, f"get_{which}label")() for one in around]
    # what a label says beyond quantity and unit is for the drawing only
    return next((str(title).partition(";")[0] for title in titles if title), "")


def _span(ax: PlotAxes, which: Literal["x", "y"]) -> range | None:
    """Return the columns (of an x axis) or rows of the grid that axes stand in."""
    place = ax.get_subplotspec()
    if place is None:
        return None
    return place.colspan if which == "x" else place.rowspan


def _curves(ax: PlotAxes) -> list[Curve]:
    from matplotlib.container import BarContainer

    found: list[Curve] = []
    for line in ax.get_lines():
        name = str(line.get_label())
        x, y = np.asarray(line.get_xdata(), float), np.asarray(line.get_ydata(), float)
        if not name.startswith("_") and x.size > 2:
            found.append(_curve(name, x, y))
    for bars in ax.containers:
        name = str(bars.get_label())
        if isinstance(bars, BarContainer) and not name.startswith("_"):
            x = np.array([bar.get_x() + bar.get_width() / 2 for bar in bars])
            y = np.array([bar.get_height() for bar in bars])
            found.append(_curve(name, x[y != 0], y[y != 0]))
    return found


def _curve(name: str, x: Any, y: Any) -> Curve:
    """Return a curve's numbers; of many points some, the extreme ones among them."""
    finite = np.isfinite(x) & np.isfinite(y)
    x, y = x[finite], y[finite]
    keep = np.linspace(0, x.size - 1, min(x.size, _MOST_POINTS)).astype(int)
    if x.size:
        keep = np.unique(np.append(keep, [y.argmax(), y.argmin(), x.argmax(), x.argmin()]))
    return {"name": name, "x": [_round(v) for v in x[keep]], "y": [_round(v) for v in y[keep]]}


def _round(value: float) -> float:
    """Keep six significant digits: more than can be read off, less than clutters a file."""
    if not math.isfinite(value) or value == 0:
        return 0.0
    return float(f"{value:.6g}")
