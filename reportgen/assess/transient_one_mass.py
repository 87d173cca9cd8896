"""Passages of one mass at a prescribed speed, in closed form."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from reportgen.assess.model import SecondComputation
from reportgen.assess.transient_force import largest_force, with_newton
from reportgen.assess.transient_model import TransientRun, Watched, in_rpm
from reportgen.assess.transient_picture import (
    envelope,
    orbit_span,
    time_above,
    waterfall,
)
from reportgen.assess.transient_stepped import Stepped, stepped, top
from reportgen.assess.transient_torque import torque_passage
from reportgen.case.to_programme import to_programme
from reportgen.rotor import passage
from reportgen.rotor.passage_integrated import passage_integrated
from reportgen.rotor.passage_integrated_peak import integrated_peak
from reportgen.rotor.passage_programme import speed_range

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    from reportgen.assess.transient_model import ForcePeak
    from reportgen.assess.transient_side import OneMassSide
    from reportgen.case.passage import PassageProgramme

    Floats = NDArray[np.float64]
    Complexes = NDArray[np.complex128]
    _Record = Callable[[Floats], passage.Passage]

_PER_TURN = 24
_MOST_SAMPLES = 300_000


def find_run(side: OneMassSide, given: PassageProgramme, index: int) -> TransientRun:
    """Calculate one passage of the case.

    Raises
    ------
    ModelError
        If the methods do not cover it.
    """
    run_id = f"passage-{index + 1}"
    if given.drive is not None or given.coast_down is not None:
        return torque_passage(side, given, run_id)
    return _prescribed(side, given, run_id)


def _prescribed(side: OneMassSide, given: PassageProgramme, run_id: str) -> TransientRun:
    rotor, programme = side.rotor, to_programme(given)
    integrated = rotor.internal_damping > 0.0
    if integrated:
        found = integrated_peak(rotor, programme)
        method = "equations of motion integrated"
    else:
        found = passage.passage_peak(rotor, programme)
        method = "exact, Faddeeva function"

    time = _dense(programme, found.time, 64 if integrated else _PER_TURN)
    whole = passage_integrated(rotor, programme, time) if integrated else None

    def record(times: Floats) -> passage.Passage:
        if whole is not None:
            return _between(whole, times)
        return passage.passage(rotor, programme, times)

    def motion(times: Floats) -> Complexes:
        different, places = np.unique(times, return_inverse=True)
        return record(different).displacement[places]

    low, high = speed_range(programme)
    ran = record(time)
    size = ran.amplitude
    drawn = envelope(time, size)
    steady = side.steady(low, high)
    twice = stepped(rotor, programme)
    acceleration = _acceleration(programme, side.critical) if found.crossed else None
    ends = programme.segments[0].start_speed, programme.segments[-1].end_speed
    coarse = np.array(sorted({s.start_time for s in programme.segments} | {programme.end_time}))
    instants = orbit_span(
        found.time,
        found.speed,
        rotor.natural_frequency,
        (programme.start_time, programme.end_time),
    )
    return TransientRun(
        id=run_id,
        name=given.name,
        kind="ramp" if given.ramp is not None else "table",
        time=coarse,
        speed=_speed_at(programme, coarse),
        outcome="reached",
        critical=side.critical,
        crossed=found.crossed,
        reason=in_rpm(found.reason),
        acceleration=acceleration,
        turns=float(ran.angle[-1] - ran.angle[0]) / (2.0 * math.pi),
        watched=(
            Watched(
                id="",
                name="",
                time=drawn[0],
                amplitude=drawn[1],
                steady_speed=steady[0],
                steady=steady[1],
                peak=float(found.amplitude),
                peak_time=float(found.time),
                peak_speed=float(found.speed),
                above=None if side.limit is None else time_above(time, size, side.limit),
                method=method,
                second=_second(twice or stepped(rotor, programme, found.time)),
                above_second=_second_above(twice, side.limit),
            ),
        ),
        contacts=side.contacts(float(found.amplitude)),
        forces=_forces(side, ran, record),
        orbit_of="",
        orbit_time=instants,
        orbit=motion(instants),
        waterfall=waterfall(
            motion,
            lambda times: _speed_at(programme, times),
            (programme.start_time, programme.end_time),
            rotor.natural_frequency,
            high,
        ),
        map=side.map(ends, acceleration, float(found.amplitude)),
    )


def _between(whole: passage.Passage, times: Floats) -> passage.Passage:
    """Return a record at other instants, straight between its own: good to 0.1 % for pictures."""
    return passage.Passage(
        times,
        np.interp(times, whole.time, whole.speed),
        np.interp(times, whole.time, whole.angle),
        np.interp(times, whole.time, whole.displacement),
        np.interp(times, whole.time, whole.velocity),
    )


def _dense(programme: passage.Programme, peak_time: float, per_turn: int) -> Floats:
    """Return instants a fraction of a turn apart, the peak's among them."""
    high = speed_range(programme)[1]
    span = programme.end_time - programme.start_time
    count = min(max(math.ceil(span * high / (2.0 * math.pi) * per_turn), 2000), _MOST_SAMPLES)
    even = np.linspace(programme.start_time, programme.end_time, count)
    return np.unique(np.append(even, peak_time))


def _speed_at(programme: passage.Programme, times: Floats) -> Floats:
    pieces = programme.segments
    knots = [pieces[0].start_time, *(piece.end_time for piece in pieces)]
    values = [pieces[0].start_speed, *(piece.end_speed for piece in pieces)]
    return np.interp(times, knots, values)


def _acceleration(programme: passage.Programme, critical: float | None) -> float | None:
    """Return the acceleration with which a programme first meets the critical speed."""
    for piece in programme.segments:
        ends = sorted((piece.start_speed, piece.end_speed))
        if critical is not None and piece.acceleration and ends[0] <= critical <= ends[1]:
            return piece.acceleration
    return None


def _second(twice: Stepped | None) -> SecondComputation | None:
    if twice is None:
        return None
    return SecondComputation(twice.method, top(twice.size), twice.tolerance, twice.because)


def _second_above(twice: Stepped | None, limit: float | None) -> SecondComputation | None:
    if twice is None or limit is None:
        return None
    return SecondComputation(
        twice.method,
        time_above(twice.time, twice.size, limit),
        2e-3,
        "the limit is met at a flat angle, where a small amplitude error moves the instant",
    )


def _forces(side: OneMassSide, ran: passage.Passage, record: _Record) -> tuple[ForcePeak, ...]:
    """Return the largest force into the ground, and the same from the mass centre's motion."""
    at = largest_force(side, ran.time, ran.speed, ran.angle, ran.displacement, ran.velocity)
    high = max(float(ran.speed.max()), side.rotor.natural_frequency)
    first, last = float(ran.time[0]), float(ran.time[-1])
    step = 2.0 * math.pi / high / 200.0
    middle = min(max(at.time, first + 2.0 * step), last - 2.0 * step)
    five = record(middle + step * np.arange(-2.0, 3.0))
    return (with_newton(side, at, five.time, five.speed, five.angle, five.velocity),)
