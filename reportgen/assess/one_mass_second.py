"""Second computations of the one-mass rotor, by methods that share no formula with the first.

The first computation uses closed forms in the complex plane. Here the same rotor is
written in two real planes as matrices, with general-purpose linear algebra and root finding only.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np
from scipy.linalg import eigh, eigvals
from scipy.optimize import brentq, minimize_scalar

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from reportgen.rotor.onemass import OneMassRotor

    Matrix = NDArray[np.float64]


def matrices(rotor: OneMassRotor) -> tuple[Matrix, Matrix, Matrix]:
    """Return mass, damping and stiffness of one plane: the rotor, then the support if any.

    Shapes (1, 1), or (2, 2) with a support that has mass or damping of its own.
    """
    m, c, k = rotor.mass, rotor.damping, rotor.stiffness
    if rotor.support is None:
        return np.array([[m]]), np.array([[c]]), np.array([[k]])
    s = rotor.support
    return (
        np.diag([m, s.mass]),
        np.array([[c, 0.0], [0.0, s.damping]]),
        np.array([[k, -k], [-k, k + s.stiffness]]),
    )


def natural_frequencies(rotor: OneMassRotor) -> NDArray[np.float64]:
    """Return the undamped natural frequencies in rad/s, lowest first, from the matrices."""
    M, _, K = matrices(rotor)
    if M[-1, -1] == 0.0:  # a support without mass adds compliance, not a frequency
        K, M = K[:1, :1] - K[:1, 1:] @ K[1:, :1] / K[1, 1], M[:1, :1]
    return np.sqrt(eigh(K, M, eigvals_only=True))


def amplitude(rotor: OneMassRotor, speed: float) -> float:
    """Return the 0-peak amplitude at constant speed, in m, from real two-plane equations.

    Cosine and sine parts of x and y are the unknowns of one real linear system, so that
    neither complex whirl nor rotational symmetry is assumed.
    """
    M, C, K = matrices(rotor)
    n = len(M)
    D, B = K - speed**2 * M, speed * C
    Z = np.zeros((n, n))
    plane = np.block([[D, B], [-B, D]])  # rows: cosine balance, sine balance
    system = np.block([[plane, np.block([[Z, Z], [Z, Z]])], [np.zeros((2 * n, 2 * n)), plane]])
    force = np.zeros(4 * n)
    direct = rotor.mass * rotor.eccentricity * speed**2
    bent = rotor.stiffness * rotor.bow
    cos, sin = direct + bent * np.cos(rotor.bow_angle), bent * np.sin(rotor.bow_angle)
    force[0], force[n] = cos, -sin  # x: F cos(Ωt) and, from the angle, −F sin(Ωt)
    force[2 * n], force[3 * n] = sin, cos  # y lags x by a quarter turn
    if n == 2:
        # the bow's elastic force acts back on the support
        bow_cos, bow_sin = bent * np.cos(rotor.bow_angle), bent * np.sin(rotor.bow_angle)
        force[1], force[n + 1] = -bow_cos, bow_sin
        force[2 * n + 1], force[3 * n + 1] = -bow_sin, -bow_cos
    u = np.linalg.solve(system, force)
    xc, xs, yc, ys = u[0], u[n], u[2 * n], u[3 * n]
    # major half-axis of the orbit, general ellipse
    forward = 0.5 * np.hypot(xc + ys, yc - xs)
    backward = 0.5 * np.hypot(xc - ys, yc + xs)
    return float(forward + backward)


def searched_peak(rotor: OneMassRotor, near: float) -> tuple[float, float]:
    """Return speed and amplitude of the largest response found by search around ``near``."""
    speeds = np.linspace(0.6, 1.6, 401) * near
    values = [amplitude(rotor, s) for s in speeds]
    i = int(np.argmax(values))
    found = minimize_scalar(
        lambda s: -amplitude(rotor, s),
        bounds=(speeds[max(i - 1, 0)], speeds[min(i + 1, len(speeds) - 1)]),
        method="bounded",
        options={"xatol": 1e-9 * near},
    )
    return float(found.x), float(-found.fun)


def half_power_amplification(rotor: OneMassRotor, peak_speed: float, peak: float) -> float:
    """Return N_c/(N₂ − N₁) with both half-power speeds found by bracketing."""

    def above(speed: float) -> float:
        return amplitude(rotor, speed) - peak / math.sqrt(2)

    low = brentq(above, 1e-3 * peak_speed, peak_speed, xtol=1e-10 * peak_speed)
    high = peak_speed * 1.001
    while above(high) > 0:
        high *= 1.05
        if high > 100 * peak_speed:
            return float("nan")
    upper = brentq(above, peak_speed, high, xtol=1e-10 * peak_speed)
    return float(peak_speed / (upper - low))


def ground_force(rotor: OneMassRotor, speed: float, displacement: complex) -> float:
    """Return the force into the ground in N, by Newton's law on the centre of mass.

    All that holds the rotor on its path reaches the ground, so mass times the
    acceleration of the mass centre is that force; rigid supports only.
    """
    return float(rotor.mass * speed**2 * abs(displacement + rotor.eccentricity))


def instability_onset(rotor: OneMassRotor) -> float:
    """Return the speed in rad/s at which an eigenvalue crosses into growth, by bracketing."""
    m, k = rotor.mass, rotor.stiffness
    ce, ci = rotor.damping, rotor.internal_damping

    def growth(speed: float) -> float:
        C, K = (ce + ci) * np.eye(2), np.array([[k, ci * speed], [-ci * speed, k]])
        A = np.block([[np.zeros((2, 2)), np.eye(2)], [-K / m, -C / m]])
        return float(eigvals(A).real.max())

    low = high = rotor.natural_frequency * (1 - 1e-6)
    while growth(high) < 0:
        low, high = high, 2 * high
    return float(brentq(growth, low, high, xtol=1e-10 * high))
