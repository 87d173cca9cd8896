"""Damping ratio from test records, and back.

Free decay: logarithmic decrement δ = ln(x₀/xₙ)/n of amplitudes a whole number of cycles apart,
δ = 2πζ/√(1 − ζ²). Forced response: amplification factor Q = N_c/(N₂ − N₁) between half-power
points, Q ≈ 1/(2ζ).
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike

from reportgen.errors import ModelError
from reportgen.rotor import onemass_checks as check

LEAST_AMPLIFICATION = 1.0 / math.sqrt(2.0)


def decrement_from_ratio(damping_ratio: float) -> float:
    """Logarithmic decrement δ = 2πζ/√(1 − ζ²).

    Parameters
    ----------
    damping_ratio
        ζ [-], within [0, 1): above, the free motion does not swing.

    Returns
    -------
    float
        δ [-].

    Raises
    ------
    ModelError
        If ζ is not within [0, 1).
    """
    ratio = check.not_negative("damping ratio", damping_ratio)
    if ratio >= 1.0:
        raise ModelError(
            f"damping ratio {ratio:g} is 1 or more: the free motion does not swing and has no "
            "decrement"
        )
    return 2.0 * math.pi * ratio / math.sqrt((1.0 - ratio) * (1.0 + ratio))


def ratio_from_decrement(decrement: float) -> float:
    """Damping ratio ζ = δ/√(4π² + δ²).

    Parameters
    ----------
    decrement
        δ [-], 0 or more.

    Returns
    -------
    float
        ζ [-], below 1.

    Raises
    ------
    ModelError
        If δ is negative (a growing motion) or not finite.
    """
    delta = check.not_negative("logarithmic decrement", decrement)
    return delta / math.hypot(2.0 * math.pi, delta)


def decrement_from_amplitudes(amplitudes: ArrayLike, cycles: int = 1) -> float:
    """Logarithmic decrement from successive amplitudes of a free decay.

    Parameters
    ----------
    amplitudes
        Amplitudes of the same sense [any one unit], equally spaced, in order of time, each above
        0; two or more.
    cycles
        Whole cycles between neighbouring amplitudes, 1 or more.

    Returns
    -------
    float
        δ [-]: with two amplitudes ln(x₀/x₁)/cycles, with more the slope of the least-squares line
        through their logarithms.

    Raises
    ------
    ModelError
        If there are fewer than two amplitudes, one is not above 0, or they grow.
    """
    record = np.asarray(amplitudes, dtype=np.float64)
    if record.ndim != 1 or record.size < 2:
        raise ModelError("a decrement needs two or more amplitudes in a row")
    if not np.all(np.isfinite(record)) or float(record.min()) <= 0.0:
        raise ModelError("amplitudes of a decay must be finite and greater than 0")
    if cycles < 1 or cycles != int(cycles):
        raise ModelError(f"{cycles} cycles between amplitudes; give a whole number, 1 or more")
    place = np.arange(record.size) * float(cycles)
    place -= place.mean()
    slope = float(place @ np.log(record)) / float(place @ place)
    if slope > 0.0:
        raise ModelError("the amplitudes grow; a free decay is needed")
    return -slope


def ratio_from_amplification(amplification: float) -> float:
    """Damping ratio from an amplification factor for small damping, ζ = 1/(2Q).

    Parameters
    ----------
    amplification
        Q [-], greater than 1/√2. The form is that of small damping: the half-power factor
        of the one-mass rotor is 1 % below 1/(2ζ) at ζ = 0.05 and 4 % below at ζ = 0.1.

    Returns
    -------
    float
        ζ [-].

    Raises
    ------
    ModelError
        If Q is not above 1/√2, where 1/(2Q) would be a rotor without a resonance peak.
    """
    factor = check.positive("amplification factor", amplification)
    if factor <= LEAST_AMPLIFICATION:
        raise ModelError(
            f"amplification factor {factor:g} is 0.707 or less: a rotor so damped has no peak"
        )
    return 1.0 / (2.0 * factor)


def ratio_from_half_power(peak: float, lower: float, upper: float) -> float:
    """Damping ratio from a response peak and its half-power points, ζ = (N₂ − N₁)/(2N_c).

    Parameters
    ----------
    peak, lower, upper
        Speeds or frequencies N_c, N₁ and N₂ in one unit, 0 < N₁ < N_c < N₂.

    Returns
    -------
    float
        ζ [-], for small damping.

    Raises
    ------
    ModelError
        If the three are not in order, or so far apart that there is no peak to speak of.
    """
    for name, value in (("lower point", lower), ("peak", peak), ("upper point", upper)):
        check.positive(name, value)
    if not lower < peak < upper:
        raise ModelError(
            f"half-power points {lower:g} and {upper:g} do not lie on either side of the peak "
            f"{peak:g}"
        )
    return ratio_from_amplification(peak / (upper - lower))
