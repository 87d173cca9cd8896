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

_HALF_ROOT_PI = 0.5 * math.sqrt(math.pi)


def swept(p: Complexes, acceleration: Floats | float) -> Complexes:
    """K(p, a) = ∫₀^∞ exp(−p x + i a x²/2) dx for a ≠ 0 and Re p ≥ 0."""
    kappa = _kappa(acceleration)
    return np.asarray(_HALF_ROOT_PI * kappa * wofz(0.5j * kappa * p))


def swept_parts(p: Complexes, acceleration: float) -> tuple[Complexes, Floats]:
    """K(p, a) without the ringing of a critical that has been passed, and the ringing's size."""
    kappa = _kappa(acceleration)
    argument = 0.5j * kappa * p
    passed = argument.imag < 0.0
    sign = np.where(passed, -1.0, 1.0)
    forced = sign * _HALF_ROOT_PI * kappa * wofz(sign * argument)
    decay = np.exp(np.where(passed, -np.real(argument**2), -np.inf))
    return np.asarray(forced), np.asarray(2.0 * _HALF_ROOT_PI * np.abs(kappa) * decay)


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
