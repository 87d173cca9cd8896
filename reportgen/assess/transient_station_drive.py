"""A rotor by stations under torque: how its speed goes, and whether the drive is enough.

The speed follows from drive, load and inertia; what the whirl draws is left out of it and held
against it afterwards. A drive that exceeds load and steady whirl at every speed passes however
slowly, so that the share of it that just does so is never less than the least that passes.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from reportgen.assess.transient_model import DriveFindings
from reportgen.assess.transient_torque import torques_of
from reportgen.rotor import stations as mechanics
from reportgen.rotor.transient import NetTorque
from reportgen.rotor.transient.phases import require_way
from reportgen.rotor.transient.programme import Recorded

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from reportgen.assess.transient_station_side import StationSide
    from reportgen.case.passage import PassageProgramme

    Floats = NDArray[np.float64]

_POINTS = 4_001


@dataclass(frozen=True, eq=False)
class Driven:
    """The speed programme of a run under torque, and its torques."""

    programme: Recorded
    findings: DriveFindings


def driven(side: StationSide, given: PassageProgramme) -> Driven:
    """Return how the speed of a run under torque goes, the whirl's torque left out.

    Raises
    ------
    ModelError
        If drive and load balance on the way, or a run to standstill has no end.
    """
    drive, load, inertia, start, end = torques_of(given)
    low, high = min(start, end), max(start, end)
    net = NetTorque(drive, load)
    critical = side.critical_within(low, high)
    require_way(net, inertia, start, end, critical)
    speeds = np.linspace(start, end, _POINTS)
    gain = net.at(speeds) / inertia
    # dt = dω/ω̇, summed by the trapezoid rule on a fine and even grid of speeds
    pace = 1.0 / gain
    steps = 0.5 * (pace[1:] + pace[:-1]) * np.diff(speeds)
    time = np.concatenate([[0.0], np.cumsum(steps)])
    programme = Recorded(time, speeds, gain)
    row = np.union1d(
        np.linspace(max(low, side.row[0]), min(high, side.row[-1]), 301),
        [c.speed for c in side.criticals if low < c.speed < high],
    )
    row = row[row > 0.0]
    whirl = whirl_torque(side, row)
    taken = np.zeros(row.size) if load is None else load.at(row)
    quasi = None
    if drive is not None:
        quasi = float(((taken + whirl) / drive.at(row)).max())
    return Driven(
        programme,
        DriveFindings(
            inertia=inertia,
            speed=row,
            drive=None if drive is None else drive.at(row),
            load=None if load is None else taken,
            whirl=whirl,
            quasi_static=quasi,
        ),
    )


def whirl_torque(side: StationSide, speeds: Floats) -> Floats:
    """Return the torque in N·m that the steady whirl draws: its work in a turn over 2π."""
    response = mechanics.unbalance_response(side.model, speeds, side.unbalance, side.bow)
    work = mechanics.energy_balance(response).unbalance
    return np.maximum(np.asarray(work) / (2.0 * math.pi), 0.0)
