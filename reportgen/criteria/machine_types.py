"""Which balance quality grade machines of a type are commonly balanced to."""

from __future__ import annotations

from typing import NamedTuple

from reportgen.criteria.sources import SOURCES, Source


class MachineType(NamedTuple):
    """A type of machine and the grade [m/s] that guides the choice for it."""

    grade: float
    machines: str


MACHINE_TYPES_SOURCE: Source = SOURCES["balance-grade"]
"""From memory. The table guides; the grade of a machine is agreed, not read off."""

MACHINE_TYPES: tuple[MachineType, ...] = (
    MachineType(
        4.0, "crank drives of large slow ship's diesel engines, not balanced in themselves"
    ),
    MachineType(1.6, "crank drives of large slow ship's diesel engines, balanced in themselves"),
    MachineType(0.63, "crank drives not balanced in themselves, on soft mounts"),
    MachineType(0.25, "crank drives not balanced in themselves, on stiff mounts"),
    MachineType(0.1, "complete piston engines of cars, lorries and locomotives"),
    MachineType(0.04, "car wheels, drive shafts of cars; balanced crank drives on soft mounts"),
    MachineType(
        0.016, "farm machines; crushers; cardan and propeller shafts; balanced crank drives"
    ),
    MachineType(
        6.3e-3,
        "fans; pumps; gears; machines in general; machine tools; process plant; paper machines; "
        "centrifuges; turbochargers; water turbines; aircraft gas turbines; small electric "
        "motors, and larger ones up to 950 r/min",
    ),
    MachineType(
        2.5e-3,
        "compressors; gas and steam turbines; machine-tool drives; textile machines; electric "
        "motors and generators above 950 r/min",
    ),
    MachineType(1e-3, "grinding-machine drives; audio and video drives"),
    MachineType(0.4e-3, "gyroscopes; spindles and drives of high-precision machines"),
)
