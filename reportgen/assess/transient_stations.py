"""Passages of a rotor by stations: reduced on its modes and stepped through the programme."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from reportgen.assess.model import SecondComputation
from reportgen.assess.transient_map import PeakMap
from reportgen.assess.transient_model import ForcePeak, TransientRun, Watched
from reportgen.assess.transient_newmark import whole_motion
from reportgen.assess.transient_picture import envelope, orbit_span, time_above, waterfall
from reportgen.assess.transient_station_drive import Driven, driven
from reportgen.case.to_programme import to_programme
from reportgen.rotor.passage_programme import ConstantAcceleration
from reportgen.rotor.transient.programme import Prescribed
from reportgen.rotor.transient.station_run import StationRun, station_run

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from reportgen.assess.transient_station_side import Place, StationSide
    from reportgen.case.passage import PassageProgramme
    from reportgen.rotor.transient.programme import SpeedProgramme

    Floats = NDArray[np.float64]

_METHOD = "reduced on modes, stepped exactly"
UNCOUPLED = (
    "the torque that the whirl draws is not in the speed: load and whirl together leave the drive "
    "nothing, or nearly so; whether the rotor passes is not known"
)
_MAP = (0.5, 1.0, 2.0, 4.0, 8.0)
_MAP_TURNS = 1_200  # of the slowest passage of a map: a few seconds


@dataclass(frozen=True)
class Reduction:
    """How many modes a run keeps in each plane, and what one more changes.

    ``missed`` is the largest difference from the whole rotor's steady whirl, and ``changed``
    that of the largest amplitude with one mode more in each plane, both as shares.
    """

    pairs: int
    missed: float
    changed: float


def find_station_run(
    side: StationSide, given: PassageProgramme, index: int
) -> tuple[TransientRun, Reduction]:
    """Calculate one passage of the case.

    Raises
    ------
    ModelError
        If the methods do not cover it.
    """
    run_id = f"passage-{index + 1}"
    low, high = given.speeds()
    pairs, missed = side.pairs(low, high)
    reference = side.reference(low, high)

    def carry(along: SpeedProgramme) -> StationRun:
        return station_run(side.model, along, side.unbalance, side.bow, pairs, reference)

    torque: Driven | None = None
    programme: SpeedProgramme
    if given.drive is not None or given.coast_down is not None:
        torque = driven(side, given, carry)
        programme, run = torque.programme, torque.run
        kind = "drive" if given.drive is not None else "coast down"
    else:
        programme = Prescribed(to_programme(given))
        run = carry(programme)
        kind = "ramp" if given.ramp is not None else "table"
    critical = side.critical_within(low, high)
    watched = tuple(_watched(side, place, run, low, high) for place in side.places)
    highest = max(watched, key=lambda place: place.peak)
    place = next(p for p in side.places if p.id == highest.id)
    crossed, reason = _crossed(side, critical, low, high, highest, run)
    if torque is not None and not torque.coupled:
        crossed, reason = False, UNCOUPLED
    acceleration = _acceleration(programme, critical) if crossed else None
    watched, changed = _checked(side, programme, watched, place, pairs, reference)
    span = (float(run.time[0]), float(run.time[-1]))
    instants = orbit_span(highest.peak_time, highest.peak_speed, critical or high, span)
    z = run.displacement(place.station)
    taken = np.unique(np.linspace(0, run.time.size - 1, 500).astype(int))
    return TransientRun(
        id=run_id,
        name=given.name,
        kind=kind,
        time=run.time[taken],
        speed=run.speed[taken],
        outcome="reached",
        critical=critical,
        crossed=crossed,
        reason=reason,
        acceleration=acceleration,
        turns=float(run.angle[-1] - run.angle[0]) / (2.0 * math.pi),
        watched=watched,
        contacts=side.contacts({place.id: place.peak for place in watched}),
        forces=_forces(side, run),
        orbit_of=place.name,
        orbit_time=instants,
        orbit=np.interp(instants, run.time, z),
        waterfall=waterfall(
            lambda times: np.interp(times, run.time, z),
            lambda times: np.interp(times, run.time, run.speed),
            span,
            critical or high,
            high,
        ),
        drive=None if torque is None else torque.findings,
        audit=None if torque is None else torque.audit,
        map=None
        if acceleration is None or critical is None
        else _map(side, place, acceleration, highest.peak, critical, pairs),
    ), Reduction(pairs, missed, changed)


def turn_peaks(angle: Floats, time: Floats, seen: Floats) -> tuple[Floats, Floats]:
    """Return the largest size in each half turn, with its instant, by the parabola through three.

    Parameters
    ----------
    angle, time
        Of even instants, shape (n,).
    seen
        What is seen at them, of either sign, shape (n,).
    """
    size = np.abs(seen)
    half = np.floor((angle - angle[0]) / math.pi)
    starts = np.flatnonzero(np.diff(half, prepend=-1.0) != 0)
    top = np.maximum.reduceat(size, starts)
    owner = np.searchsorted(starts, np.arange(size.size), side="right") - 1
    at = np.flatnonzero(size == top[owner])
    at = at[np.unique(owner[at], return_index=True)[1]]
    inner = (at > 0) & (at < size.size - 1)
    left, middle = size[np.maximum(at - 1, 0)], size[at]
    right = size[np.minimum(at + 1, size.size - 1)]
    bend = left - 2.0 * middle + right
    use = inner & (bend < 0.0) & (middle >= left) & (middle >= right)
    off = np.where(use, 0.5 * (left - right) / np.where(use, bend, -1.0), 0.0)
    step = float(time[1] - time[0])
    return time[at] + off * step, middle - 0.25 * np.where(use, left - right, 0.0) * off


def _watched(side: StationSide, place: Place, run: StationRun, low: float, high: float) -> Watched:
    time, size = turn_peaks(run.angle, run.time, place.seen(run.displacement(place.station)))
    at = int(np.argmax(size))
    drawn = envelope(time, size)
    steady = side.steady_curve(place, low, high)
    return Watched(
        id=place.id,
        name=place.name,
        time=drawn[0],
        amplitude=drawn[1],
        steady_speed=steady[0],
        steady=steady[1],
        peak=float(size[at]),
        peak_time=float(time[at]),
        peak_speed=float(np.interp(time[at], run.time, run.speed)),
        above=None if side.limit is None else time_above(time, size, side.limit),
        method=_METHOD,
    )


def _crossed(
    side: StationSide,
    critical: float | None,
    low: float,
    high: float,
    highest: Watched,
    run: StationRun,
) -> tuple[bool, str]:
    """Tell whether a run is a passage, and why not."""
    rpm = 30.0 / math.pi
    if critical is None:
        top = float(side.row[-1]) * rpm
        return False, (
            f"the steady response has no peak up to {top:.5g} r/min: there is no critical speed to "
            "pass"
        )
    if not low < critical < high:
        return False, (
            f"the critical speed {critical * rpm:.5g} r/min is not within the run's "
            f"{low * rpm:.5g} to {high * rpm:.5g} r/min: this is no passage"
        )
    turn = 2.0 * math.pi / high
    if highest.peak_time >= float(run.time[-1]) - turn:
        return False, (
            "the largest amplitude is that at the end of the run, where it may still rise; extend "
            "the run or hold its end speed longer"
        )
    if highest.peak_time <= float(run.time[0]) + turn:
        return True, "the largest amplitude is that at the start; the passage stays below it"
    return True, ""


def _acceleration(programme: SpeedProgramme, critical: float | None) -> float | None:
    """Return the acceleration with which a programme first meets a speed."""
    if critical is None:
        return None
    times = np.linspace(programme.start_time, programme.end_time, 20_001)
    side = np.sign(programme.speed(times) - critical)
    met = np.flatnonzero(side[:-1] * side[1:] <= 0.0)
    if not met.size:
        return None
    found = float(programme.acceleration(times[met[:1]])[0])
    return found or None


def _checked(
    side: StationSide,
    programme: SpeedProgramme,
    watched: tuple[Watched, ...],
    place: Place,
    pairs: int,
    reference: float,
) -> tuple[tuple[Watched, ...], float]:
    """Return the watched places, the highest with its second computation, and one mode's effect."""
    highest = next(one for one in watched if one.id == place.id)
    span = _around(side, programme, highest)
    more = min(pairs + 1, 2 * side.model.stations - 2)
    again = station_run(
        side.model, Part(programme, *span), side.unbalance, side.bow, more, reference
    )
    seen = place.seen(again.displacement(place.station))
    changed = abs(float(turn_peaks(again.angle, again.time, seen)[1].max()) / highest.peak - 1.0)
    whole = whole_motion(side.model, programme, side.unbalance, side.bow, span)
    if whole is None:
        return watched, changed
    angle = programme.angle(whole.time)
    seen = place.seen(whole.displacement(place.station))
    second = SecondComputation(
        "whole rotor by full matrices, stepped by Newmark's rule, around the peak",
        float(turn_peaks(angle, whole.time, seen)[1].max()),
        5e-3,
        "120 steps a turn shift a resonance by 2×10⁻⁴; modes left out by 10⁻³",
    )
    return (
        tuple(replace(one, second=second) if one.id == place.id else one for one in watched),
        changed,
    )


class Part:
    """A piece of a speed programme, with the whole one's speed and angle.

    Parameters
    ----------
    programme
        The whole.
    start_time, end_time
        Of the piece in s.
    """

    def __init__(self, programme: SpeedProgramme, start_time: float, end_time: float) -> None:
        self.start_time, self.end_time = start_time, end_time
        self.speed, self.angle = programme.speed, programme.angle
        self.acceleration = programme.acceleration
        inside = programme.speed(np.linspace(start_time, end_time, 2_001))
        slack = 1e-9 * programme.speeds[1]
        self.speeds = (
            max(float(inside.min()) - slack, 0.0),
            min(float(inside.max()) + slack, programme.speeds[1]),
        )


def _around(side: StationSide, programme: SpeedProgramme, highest: Watched) -> tuple[float, float]:
    """Return the piece of a run around its peak whose own beginning is forgotten at the peak.

    It begins in steady whirl, so early that e⁻⁸ is left at the peak of what that is wrong by.
    """
    sharp = max((c.amplification or 50.0 for c in side.criticals), default=50.0)
    turn = 2.0 * math.pi / highest.peak_speed
    memory = max(8.0 * 2.0 * sharp / highest.peak_speed, 20.0 * turn)
    first = max(highest.peak_time - memory, programme.start_time)
    return first, min(highest.peak_time + 8.0 * turn, programme.end_time)


def _forces(side: StationSide, run: StationRun) -> tuple[ForcePeak, ...]:
    found = []
    for number, force in enumerate(run.forces()):
        size = np.abs(force)
        at = int(np.argmax(size))
        name = side.built.rotor.bearings[number].name or f"support {number + 1}"
        found.append(
            ForcePeak(
                f"support-{number + 1}",
                name,
                float(size[at]),
                float(run.time[at]),
                float(run.speed[at]),
                side.static_loads[number],
            )
        )
    return tuple(found)


def _map(
    side: StationSide,
    place: Place,
    acceleration: float,
    peak: float,
    critical: float,
    pairs: int,
) -> PeakMap | None:
    """Return the peak at one place against acceleration, run by run around the critical speed."""
    sign = 1.0 if acceleration > 0.0 else -1.0
    low, high = 0.85 * critical, 1.2 * critical
    ends = (low, high) if sign > 0.0 else (high, low)
    turns = critical * (high - low) / (2.0 * math.pi)
    # runs in one direction share a map where it covers their accelerations
    known = side.maps.get((sign, place.id))
    if known is None or not known[0][0] <= abs(acceleration) <= known[0][-1]:
        sizes = [
            abs(acceleration) * factor
            for factor in _MAP
            if 3.0 < turns / (abs(acceleration) * factor) < _MAP_TURNS
        ]
        if len(sizes) < 3 or high > side.row[-1] or low < side.row[0]:
            return None
        peaks = []
        for size in sizes:
            ramp = Prescribed(ConstantAcceleration(*ends, sign * size))
            run = station_run(side.model, ramp, side.unbalance, side.bow, pairs, critical)
            seen = place.seen(run.displacement(place.station))
            peaks.append(float(turn_peaks(run.angle, run.time, seen)[1].max()))
        known = side.maps[sign, place.id] = (np.array(sizes), np.array([peaks]))
    return PeakMap(
        acceleration=known[0],
        damping=(),
        curves=known[1],
        grid_damping=None,
        grid=None,
        at=abs(acceleration),
        peak=peak,
        sign=sign,
        room=side.room(place),
        least=None,
        places=(place.name,),
        own=0,
    )
