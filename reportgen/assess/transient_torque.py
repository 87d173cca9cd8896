"""Passages of one mass under torque: drive against load, or coasting down by drag."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.assess import transient_second as second
from reportgen.assess.model import SecondComputation
from reportgen.assess.transient_force import largest_force, with_newton
from reportgen.assess.transient_model import (
    DriveFindings,
    ForcePeak,
    TransientRun,
    Watched,
    in_rpm,
)
from reportgen.assess.transient_picture import envelope, orbit_span, time_above, waterfall
from reportgen.errors import ModelError
from reportgen.rotor.transient import (
    CoupledRotor,
    DriveMargin,
    NetTorque,
    TorqueCurve,
    TorqueRun,
    coast_down,
    least_drive_torque,
    run_up,
    whirl_torque,
)

if TYPE_CHECKING:
    from reportgen.assess.transient_side import OneMassSide
    from reportgen.case.passage import PassageProgramme

_MOST_TURNS = 20_000
_SLACK = 1e-2  # width of the least torque's second bracket, relative


def torque_passage(side: OneMassSide, given: PassageProgramme, run_id: str) -> TransientRun:
    """Calculate a run-up by a drive, or a coast-down by drag.

    Raises
    ------
    ModelError
        If the torques do not lead to the speed asked for, or the run takes too long to calculate.
    """
    rotor = side.rotor
    drive, load, inertia, start, end = torques_of(given)
    _require_work(inertia, drive, load, start, end)
    if drive is None:
        assert load is not None
        run = coast_down(rotor, inertia, load, start, end)
    else:
        longest = None if given.drive is None else given.drive.longest
        run = run_up(
            rotor, inertia, drive, load, end, start,
            longest=None if longest is None else float(longest),
        )  # fmt: skip
    record = second.rest_record(
        rotor, inertia, _held(drive, load), start, float(run.time[-1]), float(run.speed.max())
    )
    low, high = float(run.speed.min()), float(run.speed.max())
    drawn = envelope(run.fine_time, run.fine_amplitude)
    steady = side.steady(low, high)
    acceleration = _acceleration(run)
    instants = orbit_span(
        run.peak.time, run.peak.speed, rotor.natural_frequency, (0.0, float(run.time[-1]))
    )
    taken = np.unique(np.linspace(0, run.time.size - 1, 500).astype(int))
    speeds = np.linspace(min(start, end), max(start, end), 301)
    margin = _margin(side, drive, load, inertia, start, end)
    return TransientRun(
        id=run_id,
        name=given.name,
        kind="drive" if drive is not None else "coast down",
        time=run.time[taken],
        speed=run.speed[taken],
        outcome=run.outcome,
        critical=run.critical_speed,
        crossed=run.crossed,
        reason=in_rpm(run.reason),
        acceleration=acceleration,
        turns=run.turns,
        watched=(
            Watched(
                id="",
                name="",
                time=drawn[0],
                amplitude=drawn[1],
                steady_speed=steady[0],
                steady=steady[1],
                peak=run.peak.amplitude,
                peak_time=run.peak.time,
                peak_speed=run.peak.speed,
                above=None if side.limit is None else run.time_above(side.limit),
                method="coupled equations of whirl and speed, Runge-Kutta of order 8",
                second=_second_peak(record),
                above_second=_second_above(record, side.limit),
            ),
        ),
        contacts=side.contacts(run.peak.amplitude),
        forces=_forces(side, record),
        orbit_of="",
        orbit_time=instants,
        orbit=np.empty(0, complex)
        if record is None
        else np.interp(instants, record.time, record.displacement),
        waterfall=None
        if record is None
        else waterfall(
            lambda times: np.interp(times, record.time, record.displacement),
            lambda times: np.interp(times, record.time, record.speed),
            (0.0, float(record.time[-1])),
            rotor.natural_frequency,
            high,
        ),
        hang_speed=run.hang_speed,
        hang_state=run.hang_state,
        audit=run.audit,
        dissipated_second=None if record is None else second.dissipated(rotor, record),
        drive=DriveFindings(
            inertia=inertia,
            speed=speeds,
            drive=None if drive is None else drive.at(speeds),
            load=None if load is None else load.at(speeds),
            whirl=None
            if rotor.damping_ratio == 0.0
            else whirl_torque(CoupledRotor(rotor, inertia), speeds),
            margin=margin,
            least_second=_second_least(side, margin, drive, load, inertia),
        ),
        map=side.map((start, end), acceleration, run.peak.amplitude),
    )


def torques_of(
    given: PassageProgramme,
) -> tuple[TorqueCurve | None, TorqueCurve | None, float, float, float]:
    """Return drive, load or drag, inertia, first and last speed of a passage under torque."""
    if given.drive is not None:
        run: Any = given.drive
        load = None if run.load is None else _curve(run.load, "the load torque")
        drive = _curve(run.torque, "the drive torque")
    else:
        run, drive = given.coast_down, None
        assert run is not None
        load = _curve(run.torque, "the drag torque")
    return drive, load, float(run.inertia), float(run.from_), float(run.to)


def _curve(table: Any, name: str) -> TorqueCurve:
    return TorqueCurve(table.column("speed"), table.column("torque"), f"{name} ({table.file})")


def _require_work(
    inertia: float,
    drive: TorqueCurve | None,
    load: TorqueCurve | None,
    start: float,
    end: float,
) -> None:
    duration, turns = NetTorque(drive, load).run_time(inertia, start, end)
    if math.isfinite(turns) and turns > _MOST_TURNS:
        minutes = turns / 600.0 / 60.0 * (6.0 if drive is not None else 1.0)
        raise ModelError(
            f"the run takes about {turns:.3g} turns in {duration:.3g} s and would be calculated "
            f"for about {minutes:.0f} minutes; at most {_MOST_TURNS:,} turns are calculated under "
            "torque. End it nearer to the critical speed, or give the passage as a ramp at the "
            "acceleration that its torques give there"
        )


def _held(
    drive: TorqueCurve | None, load: TorqueCurve | None, factor: float = 1.0
) -> second.Torque:
    gives = (lambda _: 0.0) if drive is None else drive.held(factor)
    takes = (lambda _: 0.0) if load is None else load.held()
    return lambda speed: gives(speed) - takes(speed)


def _acceleration(run: TorqueRun) -> float | None:
    """Return the acceleration of the run as a whole around the critical speed.

    Over a band of 3 % around it: at one instant the whirl may push the speed back and forth.
    """
    if not run.crossed or run.critical_speed is None:
        return None
    near = np.flatnonzero(np.abs(run.speed / run.critical_speed - 1.0) < 0.03)
    first, last = max(int(near.min()) - 1, 0), min(int(near.max()) + 1, run.time.size - 1)
    return float((run.speed[last] - run.speed[first]) / (run.time[last] - run.time[first]))


def _second_peak(record: second.RestRecord | None) -> SecondComputation | None:
    if record is None:
        return None
    return SecondComputation(
        "Newton's law in the frame at rest, multistep integration",
        second.highest(record)[0],
        1e-5,
        "integrated at 1e-8 a step over many turns",
    )


def _second_above(
    record: second.RestRecord | None, limit: float | None
) -> SecondComputation | None:
    if record is None or limit is None:
        return None
    return SecondComputation(
        "Newton's law in the frame at rest, multistep integration",
        time_above(record.time, np.abs(record.displacement), limit),
        2e-3,
        "the limit is met at a flat angle, where a small amplitude error moves the instant",
    )


def _forces(side: OneMassSide, record: second.RestRecord | None) -> tuple[ForcePeak, ...]:
    if record is None:
        return ()
    r = record
    found = largest_force(side, r.time, r.speed, r.angle, r.displacement, r.velocity)
    middle = int(np.clip(np.searchsorted(r.time, found.time), 2, r.time.size - 3))
    five = slice(middle - 2, middle + 3)
    near = with_newton(side, found, r.time[five], r.speed[five], r.angle[five], r.velocity[five])
    return (near,)


def _margin(
    side: OneMassSide,
    drive: TorqueCurve | None,
    load: TorqueCurve | None,
    inertia: float,
    start: float,
    end: float,
) -> DriveMargin | None:
    if drive is None or side.critical is None or not start < side.critical < end:
        return None
    if side.rotor.damping_ratio == 0.0:
        return None  # the steady whirl has no end: no torque is enough for a slow passage
    return least_drive_torque(side.rotor, inertia, drive, load, end, start, tolerance=2.5e-3)


def _second_least(
    side: OneMassSide,
    margin: DriveMargin | None,
    drive: TorqueCurve | None,
    load: TorqueCurve | None,
    inertia: float,
) -> SecondComputation | None:
    """Return the least share of the drive torque, bracketed again on the other equations."""
    if margin is None or margin.stall is None or side.critical is None:
        return None
    rotor, critical = side.rotor, side.critical

    def passes(factor: float) -> bool:
        return second.passes(rotor, inertia, _held(drive, load, factor), critical)

    low = margin.least_factor * (1.0 - _SLACK)
    high = margin.least_factor * (1.0 + _SLACK)
    if passes(low):
        high = low  # it disagrees, and the table says so
    elif not passes(high):
        low = high
    while high - low > _SLACK * high:
        middle = 0.5 * (low + high)
        low, high = (low, middle) if passes(middle) else (middle, high)
    return SecondComputation(
        "Newton's law in the frame at rest, from 0.85 of the critical speed, bracketed",
        0.5 * (low + high),
        _SLACK,
        "bracketed to 1 %",
    )
