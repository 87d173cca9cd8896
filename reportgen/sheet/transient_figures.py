"""Figures of passages: programmes, envelopes, spectra, orbits, sudden unbalance."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.sheet.figures import BLUE, GREY, INK, LINES, ORANGE, RED, new

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from reportgen.assess.transient_model import SuddenRun, TransientAssessment, TransientRun
    from reportgen.sheet.sheet import Sheet

_DASHED = (0, (4, 2))
_SMALL = 7.4


def _panels(count: int, height: float, **kw: Any) -> tuple[Any, list[Any]]:
    """Return a figure with panels side by side, three to a row, the spare ones left out."""
    columns = min(count, 3)
    rows = math.ceil(count / columns)
    figure, axes = new(rows, columns, height=height * rows, **kw)
    panels = list(np.atleast_1d(axes).ravel())
    for spare in panels[count:]:
        spare.remove()
    return figure, panels[:count]


def programmes_figure(sheet: Sheet, calc: TransientAssessment) -> tuple[Any, str]:
    """Return the figure of speed against time of every passage."""
    figure, panels = _panels(len(calc.runs), 2.2, sharey=True)
    words = []
    for ax, run in zip(panels, calc.runs, strict=True):
        ax.plot(run.time, sheet.to_reader(run.speed, "speed"), label=run.name, **LINES[0])
        ax.set_title(_folded(run.name), fontsize=8, loc="left")
        ax.set_xlabel("Time (s)")
        ax.set_ylim(bottom=0)
        critical(sheet, ax, run, vertical=False)
        top = sheet.show(float(run.speed[-1]), "speed")
        if run.stalled:
            words.append(f"{run.name} hangs at {top}")
        else:
            verb = "passes the critical speed and ends" if run.crossed else "ends"
            words.append(f"{run.name} {verb} at {top} after {sheet.show(_length(run), 'time')}")
    for ax in panels[:: min(len(panels), 3)]:
        ax.set_ylabel(f"Speed ({sheet.unit('speed')})")
    return figure, "Speed against time: " + "; ".join(words) + "."


def _length(run: TransientRun) -> float:
    return float(run.time[-1] - run.time[0])


def _folded(name: str, width: int = 30) -> str:
    return name if len(name) <= width else name[: width - 1].rstrip() + "…"


def critical(sheet: Sheet, ax: Any, run: TransientRun, *, vertical: bool) -> None:
    """Mark the critical speed in a figure whose one axis is the speed."""
    if run.critical is None:
        return
    at = float(sheet.to_reader(run.critical, "speed"))
    low, high = ax.get_xlim() if vertical else ax.get_ylim()
    if not min(low, high) <= at <= max(low, high):
        return
    line = ax.axvline if vertical else ax.axhline
    line(at, color=RED, linewidth=0.9, linestyle=_DASHED)
    if vertical:
        place: dict[str, Any] = {"xy": (at, 1.0), "xycoords": ("data", "axes fraction")}
        ax.annotate(
            "critical", xytext=(3, -2), textcoords="offset points", color=RED, fontsize=_SMALL,
            va="top", **place,
        )  # fmt: skip
    else:
        ax.annotate(
            "critical", xy=(1.0, at), xycoords=("axes fraction", "data"), xytext=(-2, 2),
            textcoords="offset points", color=RED, fontsize=_SMALL, ha="right",
        )  # fmt: skip


def envelope_figure(sheet: Sheet, calc: TransientAssessment, run: TransientRun) -> tuple[Any, str]:
    """Return the figure of the amplitude against time and against speed."""
    figure, (left, right) = new(1, 2, height=2.9, sharey=True)
    place = run.highest
    size = sheet.to_reader(place.amplitude, "displacement")
    speed = sheet.to_reader(np.interp(place.time, run.time, run.speed), "speed")
    steady = sheet.to_reader(place.steady, "displacement")
    name = "Run" if not run.crossed else "Passage"
    ceiling = 1.32 * float(size.max())
    if run.crossed:
        shown = float(np.nanmax(np.where(np.isfinite(steady), steady, np.nan)))
        ceiling = max(ceiling, min(1.32 * shown, 4.0 * ceiling))
    left.plot(place.time, size, label=name, **LINES[0])
    right.plot(
        sheet.to_reader(place.steady_speed, "speed"), np.minimum(steady, 3 * ceiling),
        label="Steady", **LINES[1],
    )  # fmt: skip
    right.plot(speed, size, label=name, **{**LINES[0], "linewidth": 1.1})
    left.set_xlabel("Time (s)")
    at = f" at {_folded(place.name, 18)}" if place.name else ""
    left.set_ylabel(f"Amplitude{at}, 0-peak ({sheet.unit('displacement')})")
    right.set_xlabel(f"Speed ({sheet.unit('speed')})")
    if run.speed[-1] < run.speed[0]:
        right.invert_xaxis()  # reads in the order of time
    left.set_ylim(0, ceiling)
    _levels(sheet, calc, run, left, ceiling)
    critical(sheet, right, run, vertical=True)
    corner = "upper right" if run.speed[-1] < run.speed[0] else "upper left"
    right.legend(loc=corner, fontsize=_SMALL)
    peak = sheet.show(place.peak, "displacement")
    when = f"{sheet.show(place.peak_speed, 'speed')}, {sheet.show(place.peak_time, 'time', 3)} in"
    if not run.crossed:
        what = "it stalls" if run.stalled else "the critical speed is not passed"
        return figure, f"{run.name}: {what}; the largest amplitude is {peak} 0-peak at {when}."
    finite = place.steady[np.isfinite(place.steady)]
    words = f"{run.name}: the largest amplitude is {peak} 0-peak at {when}"
    if finite.size:
        most = sheet.show(float(finite.max()), "displacement")
        words += f"; steady running at the critical speed would reach {most}"
    if calc.limit is not None and place.above is not None:
        words += f"; it is above the limit for {sheet.show(place.above, 'time', 3)}"
    return figure, words + "."


def _levels(
    sheet: Sheet, calc: TransientAssessment, run: TransientRun, ax: Any, ceiling: float
) -> None:
    """Mark the limit of amplitude, and what the closest clearance leaves."""
    marks = [] if calc.limit is None else [("limit of amplitude", calc.limit, GREY)]
    # only what belongs to the curve that is drawn: other places have amplitudes of their own
    own = [c for c in run.contacts if c.id == run.highest.id or not run.highest.id]
    spare = [(c.clearance - c.used + c.peak, c.name) for c in own]
    if spare:
        room, where = min(spare)
        marks.append((f"contact at {_folded(where, 20)}", room, RED))
    for words, level, colour in marks:
        at = float(sheet.to_reader(level, "displacement"))
        if at <= ceiling:
            ax.axhline(at, color=colour, linewidth=0.9, linestyle=_DASHED)
            ax.annotate(
                words, xy=(1.0, at), xycoords=("axes fraction", "data"), xytext=(-2, 2),
                textcoords="offset points", fontsize=_SMALL, color=colour, ha="right",
            )  # fmt: skip


def waterfall_figure(sheet: Sheet, run: TransientRun) -> tuple[Any, str]:
    """Return spectra one above the other, in order of time upward."""
    fall = run.waterfall
    assert fall is not None
    figure, ax = new(1, 1, height=3.7)
    frequency = sheet.to_reader(fall.frequency, "frequency")
    level = sheet.to_reader(fall.level, "displacement")
    thin = max(1, frequency.size // 170)
    frequency, level = frequency[::thin], _thinned(level, thin)
    step = float(fall.time[1] - fall.time[0])
    scale = 5.0 * step / float(level.max())
    for number, (time, line) in enumerate(zip(fall.time, level, strict=True)):
        height = time + scale * line
        ax.fill_between(frequency, time, height, color="white", zorder=2 * (99 - number))
        # every fourth can be read off and goes into the figure's data
        label = f"{time:.3g} s" if number % 4 == 1 else "_"
        ax.plot(
            frequency, height, color=BLUE, linewidth=0.8, zorder=2 * (99 - number) + 1, label=label
        )
    turning = sheet.to_reader(fall.speed, "frequency")
    ax.plot(turning, fall.time, color=ORANGE, linewidth=1.0, linestyle=_DASHED, zorder=300,
            label="Speed of rotation")  # fmt: skip
    if run.critical is not None:
        at = float(sheet.to_reader(run.critical, "frequency"))
        ax.axvline(at, color=RED, linewidth=0.9, linestyle=_DASHED, zorder=299)
        ax.annotate(
            "critical", xy=(at, 1.0), xycoords=("data", "axes fraction"), xytext=(3, -2),
            textcoords="offset points", color=RED, fontsize=_SMALL, va="top", zorder=301,
        )  # fmt: skip
    middle = int(0.8 * fall.time.size)
    ax.annotate(
        "once a turn", xy=(turning[middle], fall.time[middle]), xytext=(5, -8),
        textcoords="offset points", color=ORANGE, fontsize=_SMALL, zorder=301,
    )  # fmt: skip
    most = float(level.max())
    ax.set_xlim(0, float(frequency[-1]))
    ax.set_ylim(float(fall.time[0]) - step, float(fall.time[-1]) + 5.6 * step)
    ax.set_xlabel(f"Frequency ({sheet.unit('frequency')})")
    ax.set_ylabel("Time (s)")
    ax.grid(visible=False)
    bar = float(f"{most:.1g}")
    right = 0.985 * float(frequency[-1])
    low = float(fall.time[-1]) + 0.4 * step
    ax.plot([right, right], [low, low + scale * bar], color=INK, linewidth=1.6, zorder=301)
    ax.text(0.975 * float(frequency[-1]), low, f"{bar:g} {sheet.unit('displacement')} 0-peak",
            ha="right", va="bottom", fontsize=_SMALL, zorder=301)  # fmt: skip
    row, column = np.unravel_index(int(np.argmax(fall.level)), fall.level.shape)
    words = (
        f"{run.name}: the strongest line lies at "
        f"{sheet.show(float(fall.frequency[column]), 'frequency', 3)} while the shaft turns at "
        f"{sheet.show(float(fall.speed[row]), 'frequency', 3)}, "
        f"{sheet.show(float(fall.time[row]), 'time', 3)} in. {_ringing(run)}"
    )
    return figure, words


def _thinned(level: NDArray[np.float64], thin: int) -> NDArray[np.float64]:
    """Keep the largest of each few lines, so that no peak falls out of the drawing."""
    pad = -level.shape[1] % thin
    padded = np.pad(level, ((0, 0), (0, pad)))
    return np.asarray(padded.reshape(level.shape[0], -1, thin).max(axis=2))


def _ringing(run: TransientRun) -> str:
    """Say whether the rotor rings at its own frequency after the passage, from the spectra."""
    fall = run.waterfall
    assert fall is not None
    if run.critical is None or not run.crossed:
        return "All lines follow the speed of rotation."
    resolution = 2.0 * math.pi * 2.0 / fall.window
    own = np.abs(fall.frequency - run.critical) < resolution
    apart = np.abs(fall.speed - run.critical) > 3.0 * resolution
    after = apart & (fall.time > run.highest.peak_time)
    if not np.any(after) or not np.any(own):
        return "All lines follow the speed of rotation."
    rings = float(fall.level[np.ix_(after, own)].max()) / float(fall.level.max())
    if rings < 0.02:
        return "After the passage nothing is left at the rotor's own frequency."
    return (
        f"After the passage the rotor still rings at its own frequency, with up to "
        f"{100 * rings:.0f} % of the strongest line, and dies out."
    )


def orbits_figure(sheet: Sheet, calc: TransientAssessment) -> tuple[Any, str]:
    """Return the paths of the shaft's centre around the largest amplitude of every run."""
    runs = [run for run in calc.runs if run.orbit.size]
    if not runs:
        return None, ""
    figure, panels = _panels(len(runs), 2.5)
    unit = sheet.unit("displacement")
    words = []
    for ax, run in zip(panels, runs, strict=True):
        x = sheet.to_reader(run.orbit.real, "displacement")
        y = sheet.to_reader(run.orbit.imag, "displacement")
        before = run.orbit_time <= run.highest.peak_time
        ax.plot(x[before], y[before], label=f"{run.name}, before", color=BLUE, linewidth=0.9)
        ax.plot(x[~before], y[~before], label=f"{run.name}, after", color=ORANGE, linewidth=0.9,
                linestyle=_DASHED)  # fmt: skip
        ax.plot(x[:1], y[:1], "o", color=BLUE, markersize=4)
        ax.plot(x[-1:], y[-1:], "s", color=ORANGE, markersize=4)
        ax.set_title(_folded(run.name), fontsize=8, loc="left")
        ax.set_aspect("equal", adjustable="datalim")
        ax.locator_params(nbins=4)
        ax.set_xlabel(f"x, horizontal ({unit})")
        words.append(
            f"{run.name}: {_sense(run)}, up to "
            f"{sheet.show(float(np.abs(run.orbit).max()), 'displacement')}"
        )
    for ax in panels[:: min(len(panels), 3)]:
        ax.set_ylabel(f"y, upward ({unit})")
    figure.supxlabel(
        "solid, from the dot: the turns before the largest amplitude; dashed, to the square: after",
        fontsize=_SMALL,
    )
    at = f" at {runs[0].orbit_of}" if runs[0].orbit_of else ""
    return figure, f"Path of the shaft's centre{at}: " + "; ".join(words) + "."


def _sense(run: TransientRun) -> str:
    x, y = run.orbit.real, run.orbit.imag
    area = float(np.sum(x[:-1] * y[1:] - x[1:] * y[:-1]))
    return f"whirl {'with' if area > 0 else 'against'} the sense of rotation"


def sudden_figure(sheet: Sheet, found: SuddenRun) -> tuple[Any, str]:
    """Return the amplitude after an unbalance appears, between the two steady ones."""
    figure, ax = new(1, 1, height=2.6)
    size = sheet.to_reader(found.amplitude, "displacement")
    before, after = (float(sheet.to_reader(v, "displacement")) for v in (found.before, found.after))
    lead = 0.06 * float(found.time[-1])
    ax.plot([-lead, -0.5 * lead, 0.0], [before] * 3, label="Before", **LINES[0])
    ax.plot(found.time, size, label="After", **LINES[0])
    ax.axhline(after, color=GREY, linewidth=0.9, linestyle=_DASHED)
    ax.annotate(
        "steady after", xy=(1.0, after), xycoords=("axes fraction", "data"), xytext=(-2, 2),
        textcoords="offset points", color=GREY, fontsize=_SMALL, ha="right",
    )  # fmt: skip
    ax.set_ylim(0, 1.18 * float(size.max()))
    ax.set_xlabel("Time after the unbalance appears (s)")
    at = f" at {_folded(found.place, 18)}" if found.place else ""
    ax.set_ylabel(f"Amplitude{at}, 0-peak ({sheet.unit('displacement')})")
    words = (
        f"{found.name}: the amplitude goes from {sheet.show(found.before, 'displacement')} to "
        f"{sheet.show(found.after, 'displacement')} and overshoots to "
        f"{sheet.show(found.peak, 'displacement')} 0-peak on the way."
    )
    return figure, words
