"""What a passage gives, whichever rotor makes it: one mass, or one by stations. In SI."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from typing import TYPE_CHECKING

from reportgen.assess.model import Assessment, SecondComputation

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    from reportgen.assess.transient_map import PeakMap
    from reportgen.assess.transient_picture import Waterfall
    from reportgen.rotor.transient import DriveMargin, EnergyAudit, SteadyState

    Floats = NDArray[np.float64]
    Complexes = NDArray[np.complex128]


@dataclass(frozen=True, eq=False)
class Watched:
    """Amplitude at one place along the shaft during a run.

    Parameters
    ----------
    id, name
        Name in ids, and in print; both empty for the one mass.
    time, amplitude
        The largest and the smallest amplitude of each short interval at their instants, shape
        (n,): what an eye makes of the whole record.
    steady_speed, steady
        The steady amplitude over the run's range of speeds, shape (m,).
    peak, peak_time, peak_speed
        The largest amplitude (0-peak), when, and at what speed.
    above
        Time above the case's limit of amplitude; None where it states none.
    method
        How the peak was computed.
    second, above_second
        Peak and time by another method, where there is one.
    """

    id: str
    name: str
    time: Floats
    amplitude: Floats
    steady_speed: Floats
    steady: Floats
    peak: float
    peak_time: float
    peak_speed: float
    above: float | None
    method: str
    second: SecondComputation | None = None
    above_second: SecondComputation | None = None


@dataclass(frozen=True)
class Contact:
    """A close clearance against all that uses it up; lengths as radii.

    ``bow`` is what the peak does not hold already.
    """

    id: str
    name: str
    clearance: float
    peak: float
    sag: float
    runout: float
    bow: float = 0.0

    @property
    def used(self) -> float:
        """Peak, sag, runout and bow together."""
        return self.peak + self.sag + self.runout + self.bow

    @property
    def touches(self) -> bool:
        """Whether the linear result reaches the clearance."""
        return self.used >= self.clearance


@dataclass(frozen=True)
class ForcePeak:
    """The largest force of a run at one support, the weight left out."""

    id: str
    name: str
    value: float
    time: float
    speed: float
    static: float | None = None
    second: SecondComputation | None = None


@dataclass(frozen=True, eq=False)
class DriveFindings:
    """Torques of a run over speed, shape (n,), and how much torque passing takes.

    ``whirl`` is the torque that the steady whirl draws, None where the model has none. ``least``
    is the least share of the drive's torque that passes, by another method; ``quasi_static`` the
    share that passes however slowly, where only that is known.
    """

    inertia: float
    speed: Floats
    drive: Floats | None
    load: Floats | None
    whirl: Floats | None
    margin: DriveMargin | None = None
    quasi_static: float | None = None
    least_second: SecondComputation | None = None


@dataclass(frozen=True, kw_only=True, eq=False)
class TransientRun:
    """One passage of the case, calculated.

    Parameters
    ----------
    id, name
        ``passage-1`` and so on, and the name that the case gives.
    kind
        How the speed goes: ``ramp``, ``table``, ``drive`` or ``coast down``.
    time, speed
        The speed programme, shape (n,).
    outcome
        ``reached``, ``captured`` (a stall) or ``out of time``.
    critical
        Speed of the steady peak that is passed or to be passed; None where there is none.
    crossed
        Whether the run is a passage.
    reason
        Why it is none, or what else is to be said.
    acceleration
        At the critical speed, of a run that crosses it.
    turns
        Turns made.
    watched, contacts, forces
        By place along the shaft.
    orbit_of, orbit_time, orbit
        Path of the shaft's centre around the largest amplitude, and where.
    waterfall
        Spectra of the record; None where there is no record.
    hang_speed, hang_state
        Where a captured run hangs, by integration, and by the balance of torques.
    audit, dissipated_second
        Energies of a run under torque, and the dissipated one by quadrature.
    drive
        Torques, of a run under torque.
    map
        Peak over acceleration and damping, and the run's place on it.
    """

    id: str
    name: str
    kind: str
    time: Floats
    speed: Floats
    outcome: str
    critical: float | None
    crossed: bool
    reason: str
    acceleration: float | None
    turns: float
    watched: tuple[Watched, ...]
    contacts: tuple[Contact, ...]
    forces: tuple[ForcePeak, ...]
    orbit_of: str
    orbit_time: Floats
    orbit: Complexes
    waterfall: Waterfall | None = None
    hang_speed: float | None = None
    hang_state: SteadyState | None = None
    audit: EnergyAudit | None = None
    dissipated_second: float | None = None
    drive: DriveFindings | None = None
    map: PeakMap | None = None

    @property
    def stalled(self) -> bool:
        """Whether the speed hangs."""
        return self.outcome == "captured"

    @property
    def highest(self) -> Watched:
        """The place with the largest amplitude."""
        return max(self.watched, key=lambda place: place.peak)


@dataclass(frozen=True, kw_only=True, eq=False)
class SuddenRun:
    """What an unbalance that appears at speed does.

    ``before`` and ``after`` are the steady amplitudes; ``peak`` the largest one between them.
    """

    name: str
    speed: float
    amount: float
    place: str
    time: Floats
    amplitude: Floats
    before: float
    after: float
    peak: float
    peak_time: float
    method: str
    contacts: tuple[Contact, ...]
    force: ForcePeak | None
    second: SecondComputation | None


@dataclass(frozen=True, kw_only=True, eq=False)
class TransientAssessment(Assessment):
    """Everything that the report of the passages shows, in SI.

    ``speeds`` are the stated ones by name; ``model`` is ``one mass`` or ``stations``; ``facts``
    holds what is particular to the model.
    """

    model: str
    speeds: dict[str, float]
    critical: float | None
    runs: tuple[TransientRun, ...]
    sudden: SuddenRun | None
    limit: float | None
    asked: str
    horizontal: bool
    facts: object


_NUMBER = r"-?\d[\d.]*(?:e[+-]?\d+)?"
_SPEEDS = re.compile(rf"({_NUMBER}(?:(?:,| and| to) {_NUMBER})*) rad/s(²|(?!\w))")


def in_rpm(text: str) -> str:
    """Return a message of the mechanics with its speeds in r/min, as a reader of speeds wants."""

    def turned(number: re.Match[str]) -> str:
        return f"{float(number[0]) * 30.0 / math.pi:.5g}"

    def spoken(found: re.Match[str]) -> str:
        unit = "(r/min)/s" if found[2] else "r/min"
        return f"{re.sub(_NUMBER, turned, found[1])} {unit}"

    return _SPEEDS.sub(spoken, text)
