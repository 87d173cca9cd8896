"""Passages of the one-mass rotor through its critical speed."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from reportgen.assess.model import Finding, SecondComputation
from reportgen.assess.passage_second import stepped_peak
from reportgen.rotor import onemass, passage

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from reportgen.case.onemass import OneMassCase, PassageGiven
    from reportgen.rotor.onemass import OneMassRotor


@dataclass(frozen=True)
class PassageFindings:
    """One stated passage, calculated; arrays over its instants, in SI.

    ``steady`` is the steady response at each instant's speed. ``orbit`` is the shaft
    centre's path at ``orbit_time``, a few turns either side of the largest amplitude.
    ``closest`` is the amplitude with sag and runout added, to be held against ``clearance``.
    """

    id: str
    name: str
    programme: passage.ConstantAcceleration
    time: NDArray[np.float64]
    speed: NDArray[np.float64]
    displacement: NDArray[np.complex128]
    steady: NDArray[np.complex128]
    peak: passage.PassagePeak
    orbit_time: NDArray[np.float64]
    orbit: NDArray[np.complex128]
    sag: float
    runout: float
    clearance: float | None
    stepped_peak: float | None

    @property
    def closest(self) -> float:
        """Amplitude, sag and runout together, in m."""
        return float(self.peak.amplitude) + self.sag + self.runout

    def findings(self) -> tuple[Finding, ...]:
        """Return what the passage adds to the results."""
        return (
            Finding(
                id=f"{self.id}-peak",
                title=f"{self.name}: largest amplitude",
                symbol=r"|z|_{\max}",
                value=float(self.peak.amplitude),
                quantity="displacement",
                measure="0-peak",
                method="exact, Faddeeva function",
                where=f"{self.id}-peak",
                second=None
                if self.stepped_peak is None
                else SecondComputation(
                    "equation of motion stepped through time",
                    self.stepped_peak,
                    1e-5,
                    "fourth order in a step of 1/64 turn",
                ),
            ),
            Finding(
                id=f"{self.id}-peak-speed",
                title=f"{self.name}: speed at the largest amplitude",
                symbol=r"\Omega_{\max}",
                value=float(self.peak.speed),
                quantity="speed",
                method="exact, Faddeeva function",
                where=f"{self.id}-peak",
                headline=False,
            ),
        )


def find_passage(
    case: OneMassCase, rotor: OneMassRotor, given: PassageGiven, index: int
) -> PassageFindings | None:
    """Calculate one passage of the case; its closed form holds for rigid supports only."""
    if rotor.support is not None:
        return None
    programme = passage.ConstantAcceleration(
        start_speed=float(given.from_),
        end_speed=float(given.to),
        acceleration=float(given.acceleration),
    )
    duration = (programme.end_speed - programme.start_speed) / programme.acceleration
    peak = passage.passage_peak(rotor, programme)
    even = np.linspace(0.0, duration, 1501)
    slow = 12.0 * 2 * math.pi / rotor.natural_frequency
    near = np.linspace(peak.time - slow, peak.time + 3 * slow, 900)
    time = np.unique(np.concatenate([even, near[(near >= 0) & (near <= duration)]]))
    run = passage.passage(rotor, programme, time)
    turns = 3 * 2 * math.pi / max(peak.speed, 0.05 * rotor.natural_frequency)
    orbit_time = np.linspace(max(peak.time - turns, 0.0), min(peak.time + turns, duration), 600)
    return PassageFindings(
        id=f"passage-{index + 1}",
        name=given.name,
        programme=programme,
        time=time,
        speed=run.speed,
        displacement=run.displacement,
        steady=onemass.response(rotor, run.speed),
        peak=peak,
        orbit_time=orbit_time,
        orbit=passage.passage(rotor, programme, orbit_time).displacement,
        sag=float(onemass.static_sag(rotor)) if case.machine.orientation == "horizontal" else 0.0,
        runout=float(given.runout or 0.0),
        clearance=None if given.clearance is None else float(given.clearance),
        stepped_peak=stepped_peak(rotor, programme, peak.time),
    )
