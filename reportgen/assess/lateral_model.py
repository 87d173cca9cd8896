"""What the lateral review of a rotor by stations finds, in SI."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from reportgen.assess.model import Assessment

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    from reportgen.assess.lateral_whirl import FoundPeak, Whirl
    from reportgen.rotor import stations as mechanics

    Floats = NDArray[np.float64]


@dataclass(frozen=True)
class CriticalFindings:
    """A critical speed: the peak of the response, and the damped mode nearest to it.

    ``crossing`` is where a damped mode's frequency equals the speed; None where none is near.
    ``shape`` is the largest whirl at every mesh station at the peak (m, 0-peak, shape (n,)).
    """

    id: str
    found: FoundPeak
    crossing: mechanics.Crossing | None
    shape: Floats


@dataclass(frozen=True)
class SupportFindings:
    """A bearing or seal: static load (N, None where it carries none) and rotating forces (N)."""

    name: str
    static: float | None
    rated: float
    largest: float
    ground: float


@dataclass(frozen=True)
class Validity:
    """How far the numbers can be trusted.

    ``halving`` is the largest relative change of the undamped criticals when every element is
    halved; ``residual`` and ``energy`` the largest of any response's solve and energy balance;
    ``condition`` an estimate at rated speed.
    """

    halving: float
    criticals: Floats
    residual: float
    energy: float
    condition: float


@dataclass(frozen=True, kw_only=True, eq=False)
class LateralAssessment(Assessment):
    """Everything that the lateral review shows, in SI.

    ``rated_shape`` is the largest whirl at every mesh station at rated speed; ``stress`` the
    largest nominal stress along the shaft in the operating range (Pa, shape (e,)), by elements.
    ``support_stiffness`` holds speeds and, for each direction, the mean stiffness of the
    bearings at them.
    """

    whirl: Whirl
    mass: mechanics.MassProperties
    static: mechanics.StaticState | None
    criticals: tuple[CriticalFindings, ...]
    undamped: mechanics.Criticals
    map: mechanics.CriticalSpeedMap
    actual: tuple[mechanics.ActualCritical, ...]
    support_stiffness: tuple[Floats, Floats, Floats]
    chart: mechanics.Campbell
    onset: mechanics.Crossing | None
    supports: tuple[SupportFindings, ...]
    rated_shape: Floats
    stress: Floats
    validity: Validity
    required_range: tuple[float, float]
    asked: str

    @property
    def speeds(self) -> dict[str, float]:
        """The stated speeds by their names."""
        return self.whirl.speeds

    @property
    def operating_range(self) -> tuple[float, float]:
        """Lowest and highest running speed."""
        return self.whirl.low, self.whirl.high
