"""The one mass of a case, and what of the case its passages need."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, cast

import numpy as np

from reportgen.assess.one_mass_rotor import reference_speed_of, rotor_of
from reportgen.assess.transient_map import PeakMap, map_of
from reportgen.assess.transient_model import Contact
from reportgen.assess.transient_picture import steady_grid
from reportgen.rotor import onemass

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from reportgen.case.onemass import OneMassCase
    from reportgen.case.passage import PassageCase

    Floats = NDArray[np.float64]


@dataclass(frozen=True)
class OneMassSide:
    """The rotor of a case, and what of the case its passages need. SI.

    ``room_share`` is the share of a clearance that may be used: that of the case's criterion,
    1 where it states none; ``grade_speed`` the speed that a balance quality grade applies at.
    """

    rotor: onemass.OneMassRotor
    critical: float | None
    sag: float
    limit: float | None
    clearances: tuple[tuple[str, float, float], ...]
    room_share: float
    grade_speed: float

    @classmethod
    def of(cls, case: PassageCase) -> OneMassSide:
        """Return the rotor of a case."""
        rotor = rotor_of(cast("OneMassCase", case))
        horizontal = case.machine.orientation == "horizontal"
        shares = [float(c.share) for c in case.criteria if c.kind == "passage clearance"]
        return cls(
            rotor=rotor,
            critical=onemass.resonance_peak(rotor).speed,
            sag=float(onemass.static_sag(rotor)) if horizontal else 0.0,
            limit=None if case.limit is None else float(case.limit.amplitude),
            clearances=tuple(
                (c.name, float(c.clearance), float(c.runout or 0.0)) for c in case.clearances
            ),
            room_share=min(shares, default=1.0),
            grade_speed=reference_speed_of(cast("OneMassCase", case)),
        )

    def contacts(self, peak: float) -> tuple[Contact, ...]:
        """Return what a largest amplitude leaves of each clearance; it holds the bow already."""
        return tuple(
            Contact(f"{number}", name, clearance, peak, self.sag, runout)
            for number, (name, clearance, runout) in enumerate(self.clearances, 1)
        )

    @property
    def room(self) -> float | None:
        """Amplitude that the closest clearance leaves, within the share that may be used."""
        left = [self.room_share * c - self.sag - runout for _, c, runout in self.clearances]
        return min(left, default=None)

    def steady(self, low: float, high: float) -> tuple[Floats, Floats]:
        """Return speeds in a range and the steady amplitude at them."""
        speeds = steady_grid(low, high, self.critical, self.rotor.damping_ratio * high)
        if self.rotor.damping_ratio == 0.0 and self.critical is not None:
            speeds = speeds[np.abs(speeds - self.critical) > 1e-9 * self.critical]
        return speeds, np.abs(onemass.response(self.rotor, speeds))

    def map(
        self, speeds: tuple[float, float], acceleration: float | None, peak: float
    ) -> PeakMap | None:
        """Return the map of the peak around a passage."""
        if acceleration is None:
            return None
        return map_of(self.rotor, speeds, acceleration, peak, self.room)
