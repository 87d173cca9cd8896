"""Many one-mass rotors at once: the closed forms of `reportgen.rotor.onemass` on arrays.

Rigid supports, no bow; each formula is that of the scalar functions, element by element. Values
are not checked one by one: a tolerance study draws them from ranges that were.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from reportgen.rotor.onemass_response import STANDARD_GRAVITY
from reportgen.rotor.passage_map import ramp_peaks

Floats = NDArray[np.float64]
Values = Floats | float


@dataclass(frozen=True)
class ManyRotors:
    """Rotors of one mass on rigid supports without bow; arrays of one shape, or numbers.

    Parameters
    ----------
    mass, stiffness, damping_ratio, eccentricity, internal_damping
        As of :class:`reportgen.rotor.onemass.OneMassRotor` [kg, N/m, -, m, N·s/m].
    """

    mass: Values
    stiffness: Values
    damping_ratio: Values
    eccentricity: Values
    internal_damping: Values = 0.0

    @property
    def natural_frequency(self) -> Values:
        """√(k/m) [rad/s]."""
        return np.sqrt(self.stiffness / self.mass)

    @property
    def damping(self) -> Values:
        """External viscous damping 2ζ√(km) [N·s/m]."""
        return 2.0 * self.damping_ratio * np.sqrt(self.stiffness * self.mass)

    def peak_speed(self) -> Floats:
        """Speed of the response peak, ωₙ/√(1 − 2ζ²) [rad/s]; NaN where there is no peak."""
        room = 1.0 - 2.0 * np.asarray(self.damping_ratio) ** 2
        return np.asarray(self.natural_frequency / np.sqrt(np.where(room > 0.0, room, np.nan)))

    def peak_amplitude(self) -> Floats:
        """Amplitude of the peak, e/(2ζ√(1 − ζ²)) [m] (0-peak); NaN where there is no peak."""
        zeta = np.asarray(self.damping_ratio)
        size = self.eccentricity / (2.0 * zeta * np.sqrt(1.0 - zeta**2))
        return np.asarray(np.where(2.0 * zeta**2 < 1.0, size, np.nan))

    def amplification(self) -> Floats:
        """Amplification factor by half-power points [-]; NaN where a point is missing.

        With x = r² the points are the roots of (1 − g)x² − 2(1 − 2ζ²)x + 1 = 0,
        g = 8ζ²(1 − ζ²), whose discriminant is 4ζ²(1 − ζ²).
        """
        zeta = np.asarray(self.damping_ratio)
        square = zeta**2
        half, middle = 2.0 * zeta * np.sqrt(1.0 - square), 1.0 - 2.0 * square
        lead = 1.0 - 8.0 * square * (1.0 - square)
        both = (lead > 0.0) & (middle > 0.0)
        ends = np.where(both, middle + half, np.nan)
        # the lower root by the product of both, so that it keeps its digits
        upper, lower = ends / np.where(both, lead, np.nan), 1.0 / ends
        peak = 1.0 / np.sqrt(np.where(both, middle, np.nan))
        return np.asarray(peak / (np.sqrt(upper) - np.sqrt(lower)))

    def amplitude(self, speed: Values) -> Floats:
        """|Z| = e r²/√((1 − r²)² + (2ζr)²) at constant speed [m] (0-peak)."""
        r = np.asarray(speed / self.natural_frequency)
        return np.asarray(
            self.eccentricity
            * r**2
            / np.sqrt((1.0 - r**2) ** 2 + (2.0 * self.damping_ratio * r) ** 2)
        )

    def largest_amplitude(self, low: Values, high: Values) -> Floats:
        """Largest amplitude between two speeds [m] (0-peak): at an end, or at the peak."""
        ends = np.maximum(self.amplitude(low), self.amplitude(high))
        speed = self.peak_speed()
        within = (low < speed) & (speed < high)
        return np.asarray(np.where(within, self.peak_amplitude(), ends))

    def ground_force(self, speed: Values) -> Floats:
        """Rotating force into the ground, |Z|√(k² + (cΩ)²) [N] (0-peak)."""
        return np.asarray(
            self.amplitude(speed) * np.sqrt(self.stiffness**2 + (self.damping * speed) ** 2)
        )

    def sag(self) -> Values:
        """Give the static deflection under the weight, mg/k [m]."""
        return self.mass * STANDARD_GRAVITY / self.stiffness

    def onset(self) -> Values:
        """Onset of whirl by viscous internal damping, ωₙ(1 + c/c_i) [rad/s]."""
        return self.natural_frequency * (1.0 + self.damping / self.internal_damping)

    def passage(self, start: Values, end: Values, acceleration: Values) -> tuple[Floats, Floats]:
        """Largest amplitude of passages at constant acceleration, from steady whirl.

        Parameters
        ----------
        start, end
            Speeds [rad/s].
        acceleration
            Of the sign of end − start [rad/s²]; all of one sign.

        Returns
        -------
        amplitude
            [m] (0-peak), to 1e-6 of it.
        crossed
            1.0 where a critical speed lies between the speeds and the largest amplitude is not
            that of the end, else 0.0.
        """
        shape = np.broadcast_shapes(
            *(np.shape(v) for v in (self.mass, self.stiffness, self.damping_ratio, start, end,
                                    acceleration, self.eccentricity))
        )  # fmt: skip
        wn = np.broadcast_to(self.natural_frequency, shape).ravel()
        zeta = np.broadcast_to(self.damping_ratio, shape).ravel()
        first, last, rate = (
            np.broadcast_to(np.asarray(v, float), shape).ravel() for v in (start, end, acceleration)
        )
        top, at_end = ramp_peaks(zeta, rate / wn**2, first / wn, last / wn)
        critical = wn / np.sqrt(np.where(2.0 * zeta**2 < 1.0, 1.0 - 2.0 * zeta**2, np.nan))
        between = (np.minimum(first, last) < critical) & (critical < np.maximum(first, last))
        crossed = between & (top > at_end * (1.0 + 1e-9))
        size = top.reshape(shape) * self.eccentricity
        return np.asarray(size), crossed.reshape(shape).astype(np.float64)


def ratio_from_decrement(decrement: Values) -> Values:
    """Damping ratio δ/√(4π² + δ²) of logarithmic decrements."""
    return decrement / np.hypot(2.0 * math.pi, decrement)
