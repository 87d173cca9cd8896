"""Passages of the one-mass rotor through its critical speed."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from reportgen.assess.model import Finding, SecondComputation
from reportgen.assess.transient_stepped import stepped, top
from reportgen.rotor import onemass, passage
from reportgen.rotor.passage_integrated import passage_integrated
from reportgen.rotor.passage_integrated_peak import integrated_peak

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
    method: str
    second: SecondComputation | None

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
                method=self.method,
                where=f"{self.id}-peak",
                second=self.second,
            ),
            Finding(
                id=f"{self.id}-peak-speed",
                title=f"{self.name}: speed at the largest amplitude",
                symbol=r"\Omega_{\max}",
                value=float(self.peak.speed),
                quantity="speed",
                method=self.method,
                where=f"{self.id}-peak",
                headline=False,
            ),
        )


def find_passage(
    case: OneMassCase, rotor: OneMassRotor, given: PassageGiven, index: int
) -> PassageFindings:
    """Calculate one passage of the case: in closed form, with internal damping by integration."""
    integrated = rotor.internal_damping > 0.0
    motion = passage_integrated if integrated else passage.passage
    programme = passage.ConstantAcceleration(
        start_speed=float(given.from_),
        end_speed=float(given.to),
        acceleration=float(given.acceleration),
    )
    duration = (programme.end_speed - programme.start_speed) / programme.acceleration
    peak = (integrated_peak if integrated else passage.passage_peak)(rotor, programme)
    twice = stepped(rotor, programme, peak.time)
    even = np.linspace(0.0, duration, 1501)
    slow = 12.0 * 2 * math.pi / rotor.natural_frequency
    near = np.linspace(peak.time - slow, peak.time + 3 * slow, 900)
    time = np.unique(np.concatenate([even, near[(near >= 0) & (near <= duration)]]))
    turns = 3 * 2 * math.pi / max(peak.speed, 0.05 * rotor.natural_frequency)
    orbit_time = np.linspace(max(peak.time - turns, 0.0), min(peak.time + turns, duration), 600)
    instants, back = np.unique(np.concatenate([time, orbit_time]), return_inverse=True)
    run = motion(rotor, programme, instants)
    drawn, orbiting = back[: time.size], back[time.size :]
    return PassageFindings(
        id=f"passage-{index + 1}",
        name=given.name,
        programme=programme,
        time=time,
        speed=run.speed[drawn],
        displacement=run.displacement[drawn],
        steady=onemass.response(rotor, run.speed[drawn]),
        peak=peak,
        orbit_time=orbit_time,
        orbit=run.displacement[orbiting],
        sag=float(onemass.static_sag(rotor)) if case.machine.orientation == "horizontal" else 0.0,
        runout=float(given.runout or 0.0),
        clearance=None if given.clearance is None else float(given.clearance),
        method="equations of motion integrated" if integrated else "exact, Faddeeva function",
        second=None
        if twice is None
        else SecondComputation(twice.method, top(twice.size), twice.tolerance, twice.because),
    )
