"""A rotor by stations under torque: how its speed goes, and whether the drive is enough.

The speed follows from drive, load, inertia and the torque that the whirl draws. That torque is
taken from the motion of the round before, as a function of speed, until the run no longer
changes. A drive that exceeds load and steady whirl at every speed passes however slowly, so that
the share of it that just does so is never less than the least that passes.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from reportgen.assess.transient_model import DriveFindings
from reportgen.assess.transient_torque import torques_of
from reportgen.rotor import stations as mechanics
from reportgen.rotor.transient import EnergyAudit, NetTorque
from reportgen.rotor.transient.phases import require_way
from reportgen.rotor.transient.programme import Recorded
from reportgen.rotor.transient.reduced import exciting_loads

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from reportgen.assess.transient_station_side import StationSide
    from reportgen.case.passage import PassageProgramme
    from reportgen.rotor.transient.programme import SpeedProgramme
    from reportgen.rotor.transient.station_run import StationRun

    Floats = NDArray[np.float64]

_POINTS = 4_001
_ROUNDS = 8
_SAME = 1e-5
"""Share by which the duration may still change from round to round."""
_CHUNK = 4_096


@dataclass(frozen=True, eq=False)
class Driven:
    """A run under torque: its speed programme, motion, torques and energies.

    ``coupled`` tells whether the whirl's torque is in the speed: it is not where load and whirl
    together leave nothing to accelerate with, or the rounds do not settle.
    """

    programme: Recorded
    run: StationRun
    findings: DriveFindings
    audit: EnergyAudit | None
    coupled: bool


def driven(
    side: StationSide, given: PassageProgramme, carry: Callable[[SpeedProgramme], StationRun]
) -> Driven:
    """Return a run under torque, the whirl's torque in its speed.

    Parameters
    ----------
    side, given
        The rotor, and a passage by drive or drag.
    carry
        Carries the rotor through a speed programme.

    Raises
    ------
    ModelError
        If drive and load balance on the way, or a run to standstill has no end.
    """
    drive, load, inertia, start, end = torques_of(given)
    low, high = min(start, end), max(start, end)
    net = NetTorque(drive, load)
    require_way(net, inertia, start, end, side.critical_within(low, high))
    # close together about the criticals, where the whirl's torque has its peak
    speeds = np.linspace(start, end, _POINTS)
    free = net.at(speeds)

    def law(whirl: Floats) -> Recorded | None:
        gain = (free - whirl) / inertia
        if np.any(gain * (end - start) <= 0.0):
            return None
        pace = 1.0 / gain
        steps = 0.5 * (pace[1:] + pace[:-1]) * np.diff(speeds)
        return Recorded(np.concatenate([[0.0], np.cumsum(steps)]), speeds, gain)

    programme = law(np.zeros(speeds.size))
    assert programme is not None  # require_way has seen to it
    run = carry(programme)
    coupled = False
    for _ in range(_ROUNDS):
        ahead = law(drawn_torque(side, programme, run, speeds))
        if ahead is None:
            break
        moved = abs(ahead.end_time / programme.end_time - 1.0)
        programme = ahead
        run = carry(programme)
        if moved < _SAME:
            coupled = True
            break
    row = np.union1d(
        np.linspace(max(low, side.row[0]), min(high, side.row[-1]), 301),
        [c.speed for c in side.criticals if low < c.speed < high],
    )
    row = row[row > 0.0]
    whirl = steady_whirl_torque(side, row)
    taken = np.zeros(row.size) if load is None else load.at(row)
    findings = DriveFindings(
        inertia=inertia,
        speed=row,
        drive=None if drive is None else drive.at(row),
        load=None if load is None else taken,
        whirl=whirl,
        quasi_static=None if drive is None else float(((taken + whirl) / drive.at(row)).max()),
    )
    audit = None
    if coupled:
        at = run.speed
        gives = 0.0 if drive is None else _work(run, drive.at(at))
        takes = 0.0 if load is None else _work(run, load.at(at))
        audit = _audit(side, run, inertia, gives, takes)
    return Driven(programme, run, findings, audit, coupled)


def drawn_torque(
    side: StationSide, programme: SpeedProgramme, run: StationRun, speeds: Floats
) -> Floats:
    """Return the torque in N·m that the whirl draws at speeds: its work in each turn over 2π."""
    power = _power(side, programme, run)
    work = np.concatenate([[0.0], np.cumsum(0.5 * (power[1:] + power[:-1]) * np.diff(run.time))])
    turns = np.arange(run.angle[0], run.angle[-1], 2.0 * math.pi)
    if turns.size < 3:
        return np.zeros(speeds.size)
    at_turns = np.interp(turns, run.angle, work)
    torque = np.diff(at_turns) / (2.0 * math.pi)
    middles = np.interp(0.5 * (turns[1:] + turns[:-1]), run.angle, run.speed)
    order = np.argsort(middles)
    return np.asarray(np.interp(speeds, middles[order], torque[order]), np.float64)


def _power(side: StationSide, programme: SpeedProgramme, run: StationRun) -> Floats:
    """Return the power in W that unbalance and bow put into the whirl."""
    u, bent = exciting_loads(run.reduced, side.unbalance, side.bow)
    turning = np.exp(1j * run.angle)
    inertia = (run.speed**2 - 1j * programme.acceleration(run.time)) * turning
    power = np.empty(run.time.size)
    for at in range(0, run.time.size, _CHUNK):
        part = slice(at, at + _CHUNK)
        force = (inertia[part, None] * u + turning[part, None] * bent).real
        power[part] = np.einsum("tn,tn->t", force, run.rates[part])
    return power


def _work(run: StationRun, torque: Floats) -> float:
    return float(np.trapezoid(torque, run.angle))


def _audit(
    side: StationSide, run: StationRun, inertia: float, gives: float, takes: float
) -> EnergyAudit:
    """Return where the energy went; what damping takes is summed from the motion itself."""
    power = np.empty(run.time.size)
    stored = []
    for at in range(0, run.time.size, _CHUNK):
        part = slice(at, at + _CHUNK)
        M, C, K = run.reduced.matrices(np.clip(run.speed[part], side.row[0], side.row[-1]))
        rate, place = run.rates[part], run.coordinates[part]
        lost = np.einsum("ti,tij,tj->t", rate, C, rate)
        # what of the stiffness is not symmetric does work as well, on either sign
        skew = 0.5 * (K - np.swapaxes(K, 1, 2))
        power[part] = lost + np.einsum("ti,tij,tj->t", rate, skew, place)
        for j in {0, rate.shape[0] - 1}:
            moving = rate[j] @ M[j] @ rate[j] + place[j] @ K[j] @ place[j]
            turning = inertia * float(run.speed[at + j]) ** 2
            stored.append((at + j, 0.5 * float(moving + turning)))
    stored.sort()
    return EnergyAudit(
        drive=gives,
        load=takes,
        dissipated=float(np.trapezoid(power, run.time)),
        stored_start=stored[0][1],
        stored_end=stored[-1][1],
    )


def steady_whirl_torque(side: StationSide, speeds: Floats) -> Floats:
    """Return the torque in N·m that the steady whirl draws: its work in a turn over 2π."""
    response = mechanics.unbalance_response(side.model, speeds, side.unbalance, side.bow)
    work = mechanics.energy_balance(response).unbalance
    return np.maximum(np.asarray(work) / (2.0 * math.pi), 0.0)
