"""Runs of the one-mass rotor under torque: run-up, coast-down, trip from overspeed."""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np

from reportgen.errors import ModelError
from reportgen.rotor import onemass_checks as check
from reportgen.rotor.onemass_model import OneMassRotor
from reportgen.rotor.onemass_peak import resonance_peak
from reportgen.rotor.transient.coupled import CoupledRotor
from reportgen.rotor.transient.phases import Phase, leg_of
from reportgen.rotor.transient.stepper import REACHED, Track, run_leg
from reportgen.rotor.transient.torque import TorqueCurve
from reportgen.rotor.transient.torque_result import TorqueRun, result_of


def torque_run(
    rotor: OneMassRotor,
    inertia: float,
    phases: Sequence[Phase],
    start_speed: float = 0.0,
    *,
    longest: float | None = None,
    rtol: float = 1e-9,
    progress: Callable[[float], None] | None = None,
) -> TorqueRun:
    """Run the rotor through phases of given torque, whirl and speed acting on each other.

    The equations stand in `reportgen.rotor.transient.coupled`. Each phase is checked before
    anything is integrated: its torque tables must cover its speeds, and drive less load must lead
    from its first speed to its last.

    Parameters
    ----------
    rotor
        The rotor; it must have unbalance or bow.
    inertia
        Moment of inertia of all that turns with it [kg·m²].
    phases
        One or more; the state is carried from one to the next.
    start_speed
        Speed at the start [rad/s], where the rotor is in steady whirl.
    longest
        Time after which a phase is given up [s]; chosen from the torques if not given.
    rtol
        Error allowed in a step, relative, within [1e-12, 1e-4].
    progress
        Called now and then with the turns done in the phase.

    Returns
    -------
    TorqueRun
        Peak to about 1e3 times `rtol`, relative.

    Raises
    ------
    ModelError
        If drive and load balance on the way (a torque curve that crosses the load below the speed
        asked for; the message names where), a table does not cover the speeds, the run would need
        more than 100,000 turns, or a value is outside its range.
    """
    check.not_negative("start speed", start_speed, "rad/s")
    if not 1e-12 <= rtol <= 1e-4:
        raise ModelError(f"rtol is {rtol:g}; it must be within 1e-12 and 1e-4")
    if not phases:
        raise ModelError("a run needs at least one phase")
    coupled = CoupledRotor(rotor, inertia)
    critical = resonance_peak(rotor).speed
    first = coupled.start(start_speed)
    track = Track()
    track.add(0.0, first, np.zeros_like(first))
    outcome, speed = REACHED, start_speed
    legs = []
    for phase in phases:
        legs.append(leg_of(coupled, phase, speed, critical, longest))
        speed = phase.until
    done = 0
    while outcome == REACHED and done < len(legs):
        outcome = run_leg(coupled, legs[done], track, rtol, progress)
        done += 1
    return result_of(coupled, track, outcome, critical, legs[done - 1], phases[done - 1].net)


def run_up(
    rotor: OneMassRotor,
    inertia: float,
    drive: TorqueCurve,
    load: TorqueCurve | None,
    target: float,
    start_speed: float = 0.0,
    *,
    factor: float = 1.0,
    longest: float | None = None,
    rtol: float = 1e-9,
    progress: Callable[[float], None] | None = None,
) -> TorqueRun:
    """Run up by a drive torque, to a speed [rad/s] or to a stall on the way; see `torque_run`."""
    if target <= start_speed:
        raise ModelError(
            f"a run-up from {start_speed:g} rad/s cannot end at {target:g} rad/s; raise the target"
        )
    phase = Phase(target, drive, load, factor)
    return torque_run(
        rotor, inertia, [phase], start_speed, longest=longest, rtol=rtol, progress=progress
    )


def coast_down(
    rotor: OneMassRotor,
    inertia: float,
    drag: TorqueCurve,
    start_speed: float,
    end_speed: float = 0.0,
    *,
    longest: float | None = None,
    rtol: float = 1e-9,
    progress: Callable[[float], None] | None = None,
) -> TorqueRun:
    """Coast down under drag, the drive off, to a speed [rad/s]; see `torque_run`."""
    if end_speed >= start_speed:
        raise ModelError(
            f"a coast-down from {start_speed:g} rad/s cannot end at {end_speed:g} rad/s; "
            "lower the end speed"
        )
    phase = Phase(end_speed, None, drag)
    return torque_run(
        rotor, inertia, [phase], start_speed, longest=longest, rtol=rtol, progress=progress
    )


def overspeed_trip(
    rotor: OneMassRotor,
    inertia: float,
    drive: TorqueCurve,
    drag: TorqueCurve,
    start_speed: float,
    trip_speed: float,
    end_speed: float = 0.0,
    *,
    load: TorqueCurve | None = None,
    rtol: float = 1e-9,
    progress: Callable[[float], None] | None = None,
) -> TorqueRun:
    """Overspeed by the drive up to the trip speed [rad/s], then coast down; see `torque_run`.

    Parameters
    ----------
    rotor, inertia, start_speed, rtol, progress
        As in `torque_run`.
    drive
        Drive torque until the trip, at full.
    drag
        Torque against the rotation after the trip.
    trip_speed, end_speed
        Speed at which the drive is cut, and speed at the end [rad/s].
    load
        Torque against the rotation before the trip; none if not given (the load was lost).
    """
    if not end_speed < trip_speed or start_speed >= trip_speed:
        raise ModelError(
            f"a trip at {trip_speed:g} rad/s must lie above the start at {start_speed:g} and the "
            f"end at {end_speed:g} rad/s"
        )
    phases = [Phase(trip_speed, drive, load), Phase(end_speed, None, drag)]
    return torque_run(rotor, inertia, phases, start_speed, rtol=rtol, progress=progress)
