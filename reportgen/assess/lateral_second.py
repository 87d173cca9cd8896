"""Second computations of the lateral review: full matrices, eigenvalues by the QR method.

The response is found by block elimination along the shaft and the damped modes by refinement
from a reduced model; here the same rotor is assembled as full matrices, and solved as such.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np
from scipy.optimize import minimize_scalar

from reportgen.assess.model import SecondComputation
from reportgen.rotor import stations as mechanics

if TYPE_CHECKING:
    from reportgen.assess.lateral_whirl import FoundPeak, Whirl

_ROUNDING = 1e-6
_SWING = 1e-6


class Dense:
    """One rotor solved by full matrices."""

    def __init__(self, whirl: Whirl) -> None:
        self.whirl = whirl

    def probe(self, case: int, place: int, speed: float) -> float:
        """Return the amplitude in m at a probe, for one of the unbalance cases."""
        model, response = self.whirl.model, self.whirl.responses[case]
        at = int(np.argmin(np.abs(response.speeds - speed)))
        load = response.load[:, :, at]
        fixed = self._fixed(case, at)
        load = (load - fixed) * (speed / response.speeds[at]) ** 2 + fixed
        q = mechanics.dense_response(model, speed, load)
        where = self.whirl.places[place]
        node = 4 * model.node(where.station)
        return float(abs(math.cos(where.angle) * q[node] + math.sin(where.angle) * q[node + 2]))

    def _fixed(self, case: int, at: int) -> np.ndarray:
        """Return the part of the load that does not grow with speed: that of a bow."""
        response = self.whirl.responses[case]
        other = 0 if at else 1
        a, b = response.speeds[at] ** 2, response.speeds[other] ** 2
        f, g = response.load[:, :, at], response.load[:, :, other]
        return np.asarray((g * a - f * b) / (a - b))

    def peak(self, found: FoundPeak) -> tuple[float, float]:
        """Return speed and amplitude of a peak, searched for between its neighbours."""
        speed = found.peak.speed
        width = speed / (found.peak.amplification or 10.0)
        best = minimize_scalar(
            lambda v: -self.probe(found.case, found.place, v),
            bounds=(speed - 0.3 * width, speed + 0.3 * width),
            method="bounded",
            options={"xatol": 1e-7 * speed},
        )
        return float(best.x), float(-best.fun)

    def half_power(self, found: FoundPeak, speed: float, amplitude: float) -> float | None:
        """Return the amplification factor from half-power points bracketed on full solutions."""
        from scipy.optimize import brentq

        peak = found.peak
        if peak.lower is None or peak.upper is None:
            return None

        def above(v: float) -> float:
            return self.probe(found.case, found.place, v) - amplitude / math.sqrt(2.0)

        ends = []
        for point in (peak.lower, peak.upper):
            reach = 0.2 * abs(speed - point)
            low, high = point - reach, point + reach
            if above(low) * above(high) > 0:
                return None
            ends.append(brentq(above, low, high, xtol=1e-8 * speed))
        return float(speed / (ends[1] - ends[0]))


def least_decrement(model: mechanics.Model, speed: float, near: float) -> float:
    """Return the decrement of the eigenvalue nearest to one with the decrement ``near``.

    All eigenvalues come from the full matrices by the QR method, without any reduction.
    """
    found = mechanics.dense_eigenvalues(mechanics.dense_matrices(model, speed))
    swinging = found[(found.imag > 1e-3) & (np.abs(found) < 1e5)]
    values = -2.0 * math.pi * swinging.real / swinging.imag
    return float(values[np.argmin(np.abs(values - near))])


def of_peak(value: float, what: str) -> SecondComputation:
    """Return the second computation of a peak by full matrices."""
    tolerance, why = {
        "speed": (2e-4, "a peak is flat: its place is known to √ of the curve's error"),
        "amplitude": (1e-4, "interpolation of 1/A² between close speeds"),
        "factor": (1e-2, "a difference of two near speeds, interpolated in 1/A²"),
    }[what]
    return SecondComputation("full matrices, search and bracketing", value, tolerance, why)


def rounding(method: str, value: float, tolerance: float = _ROUNDING) -> SecondComputation:
    """Return a second computation that differs from the first by rounding alone."""
    return SecondComputation(method, value, tolerance, "rounding of equations this stiff")
