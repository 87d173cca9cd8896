"""Integrals and modes from which the exact passage is built.

One mode q' = s q + f e^{iθ(t)} under θ' = w, θ'' = a has the particular solution, with p = iw − s,

    q = f e^{iθ} ∫₀^∞ exp(−p x + i a x²/2) dx = f e^{iθ} K(p, a).

Turning the path of integration by ±π/4, where the quadratic phase becomes a decay, gives

    K(p, a) = κ (√π/2) w(iκp/2),   κ = √(2/|a|) e^{±iπ/4} (upper sign for a > 0),

with w the Faddeeva function (NIST DLMF §7.2; Poppe & Wijers 1990). K is the response that has run
up from the infinite past. Before the critical speed the argument lies in the upper half-plane,
where |w| ≤ 1; after it w is 2 exp(−(·)²) − w(−·), and the exponential, the ringing left over from
the critical, has the size exp(−Re p |Im p / a|): it only decays. Nothing can overflow, run-up or
coast-down, as long as the mode is not unstable (Re p ≥ 0).
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray
from scipy.special import wofz

Complexes = NDArray[np.complex128]
Floats = NDArray[np.float64]
Flags = NDArray[np.bool_]

_HALF_ROOT_PI = 0.5 * math.sqrt(math.pi)


def swept(p: Complexes, acceleration: Floats | float, late: Flags | bool = False) -> Complexes:
    """K(p, a) = ∫₀^∞ exp(−p x + i a x²/2) dx for a ≠ 0 and Re p ≥ 0.

    Where `late` is set the ringing of a critical passed before the start is left out, which is a
    particular solution as good and has no large terms that the start would have to cancel.
    """
    kappa = _kappa(acceleration)
    kappa = np.where(late, -kappa, kappa)
    return np.asarray(_HALF_ROOT_PI * kappa * wofz(0.5j * kappa * p))


def is_past(p: Complexes, acceleration: Floats | float) -> Flags:
    """Whether the critical speed of a mode has been passed, so that K holds its ringing."""
    return np.asarray((0.5j * _kappa(acceleration) * p).imag < 0.0)


def ringing(p: Complexes, acceleration: float) -> Complexes:
    """K(p, a) less its late form where the critical has been passed, zero before."""
    kappa = _kappa(acceleration)
    square = (0.5j * kappa * p) ** 2
    past = is_past(p, acceleration)
    exponent = np.where(past, -square, 0.0)
    return np.asarray(np.where(past, 2.0 * _HALF_ROOT_PI * kappa * np.exp(exponent), 0.0))


def dwelt(p: Complexes, elapsed: Floats) -> Complexes:
    """∫₀^T exp(−p x) dx = (1 − e^{−pT})/p, also where p is zero (an undamped resonance)."""
    exponent = -p * elapsed
    small = np.abs(exponent) < 1e-8
    safe = np.where(small, 1.0, exponent)
    mean = np.where(small, 1.0 + 0.5 * exponent, np.expm1(safe) / safe)
    return np.asarray(elapsed * mean)


def _kappa(acceleration: Floats | float) -> Complexes:
    a = np.asarray(acceleration, dtype=np.float64)
    turn = np.where(a > 0.0, np.exp(0.25j * math.pi), np.exp(-0.25j * math.pi))
    return np.asarray(np.sqrt(2.0 / np.abs(a)) * turn)
