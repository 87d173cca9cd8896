"""The one-mass rotor as first-order modes driven by e^{iθ}, for the exact passage.

In the motion of the mass centre g = z + e e^{iθ} the excitation is linear in the speed,

    m g̈ + c ġ + k (g − y_s) = (k e + k b + i c θ̇ e) e^{iθ},

so with x = (g, ġ, y_s, ẏ_s) it reads x' = A x + (P + Qθ') e^{iθ}. The shift v = x + iQ e^{iθ}
leaves v' = A v + (P − iAQ) e^{iθ}, and the eigenvectors of A part that into q' = s q + f e^{iθ}.
The term −iΩ̇ of the excitation and the damping's base, which is at rest, are in this exactly.
Time is counted in 1/ωₙ.
"""

from __future__ import annotations

import cmath
import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from reportgen.errors import ModelError
from reportgen.rotor.onemass_model import OneMassRotor

Complexes = NDArray[np.complex128]


@dataclass(frozen=True)
class Modes:
    """First-order modes of a rotor and what they make of the disc's motion.

    Parameters
    ----------
    rate
        Eigenvalues s over ωₙ, shape (n,).
    drive
        Excitation f of each mode [m], shape (n,).
    vectors
        Columns: the state v per unit of each mode, shape (n, n).
    inverse
        Inverse of `vectors`.
    shift
        iQ: v = x + shift·e^{iθ} [m], shape (n,).
    eccentricity
        e [m].
    frequency
        ωₙ [rad/s]: one unit of time is 1/ωₙ.
    """

    rate: Complexes
    drive: Complexes
    vectors: Complexes
    inverse: Complexes
    shift: Complexes
    eccentricity: float
    frequency: float


def modes_of(rotor: OneMassRotor) -> Modes:
    """Modes of a rotor on rigid or flexible isotropic supports.

    Parameters
    ----------
    rotor
        The rotor without internal damping.

    Returns
    -------
    Modes
        Two modes on rigid supports, up to four on flexible ones.

    Raises
    ------
    ModelError
        If the rotor has internal damping, whose force depends on the changing speed, or if its
        modes cannot be parted (a support tuned to an exact double root).
    """
    if rotor.internal_damping > 0.0:
        raise ModelError(
            "the closed form of the passage does not cover internal damping; set it to 0 or "
            "integrate (reportgen.rotor.passage_integrated)"
        )
    matrix, constant, rising, condensed = _first_order(rotor)
    rate, vectors, inverse = _parted(matrix, rotor, condensed)
    drive = inverse @ (constant - 1j * (matrix @ rising))
    return Modes(
        rate=rate,
        drive=drive,
        vectors=vectors,
        inverse=inverse,
        shift=1j * rising,
        eccentricity=rotor.eccentricity,
        frequency=rotor.natural_frequency,
    )


def _first_order(rotor: OneMassRotor) -> tuple[Complexes, Complexes, Complexes, float]:
    """Give A, P, Q over ωₙ, and the share of k that massless bare supports leave."""
    zeta, e, bow = rotor.damping_ratio, rotor.eccentricity, rotor.bow_vector
    own = rotor.support
    if own is None or (own.mass == 0.0 and own.damping == 0.0):
        share = 1.0 if own is None else own.stiffness / (own.stiffness + rotor.stiffness)
        return (
            np.array([[0.0, 1.0], [-share, -2.0 * zeta]], dtype=np.complex128),
            np.array([0.0, share * (e + bow)], dtype=np.complex128),
            np.array([0.0, 2j * zeta * e], dtype=np.complex128),
            share,
        )
    kappa = own.stiffness / rotor.stiffness
    gamma = own.damping * rotor.natural_frequency / rotor.stiffness
    mu = own.mass / rotor.mass
    if own.mass == 0.0:
        matrix = [
            [0.0, 1.0, 0.0],
            [-1.0, -2.0 * zeta, 1.0],
            [1.0 / gamma, 0.0, -(1.0 + kappa) / gamma],
        ]
        ends = [-(e + bow) / gamma]
    else:
        matrix = [
            [0.0, 1.0, 0.0, 0.0],
            [-1.0, -2.0 * zeta, 1.0, 0.0],
            [0.0, 0.0, 0.0, 1.0],
            [1.0 / mu, 0.0, -(1.0 + kappa) / mu, -gamma / mu],
        ]
        ends = [0.0, -(e + bow) / mu]
    size = len(matrix)
    rising = np.zeros(size, dtype=np.complex128)
    rising[1] = 2j * zeta * e
    constant = np.array([0.0, e + bow, *ends], dtype=np.complex128)
    return np.array(matrix, dtype=np.complex128), constant, rising, 1.0


def _parted(
    matrix: Complexes, rotor: OneMassRotor, share: float
) -> tuple[Complexes, Complexes, Complexes]:
    if matrix.shape == (2, 2):
        rate = rates(rotor.damping_ratio, share)
        vectors = np.array([[1.0, 1.0], [rate[0], rate[1]]], dtype=np.complex128)
        inverse = np.array([[rate[1], -1.0], [-rate[0], 1.0]]) / (rate[1] - rate[0])
        return rate, vectors, np.asarray(inverse, dtype=np.complex128)
    rate, vectors = np.linalg.eig(matrix)
    if np.linalg.cond(vectors) > 1e9:
        raise ModelError(
            "two modes of the rotor on its supports coincide and cannot be parted; change the "
            "support damping by a small amount"
        )
    # Rounding may leave an undamped eigenvalue a hair unstable.
    rate = np.where(rate.real > 0.0, 1j * rate.imag, rate)
    return rate, vectors, np.asarray(np.linalg.inv(vectors), dtype=np.complex128)


def rates(damping_ratio: float, share: float = 1.0) -> Complexes:
    """Roots s of s² + 2ζs + share = 0.

    At the double root of critical damping the two are held 2·10⁻⁵ apart, which is a change of the
    stiffness by one part in 10¹⁰.
    """
    half = cmath.sqrt(damping_ratio**2 - share)
    if abs(half) < 1e-5 * math.sqrt(share):
        half = complex(0.0, 1e-5 * math.sqrt(share))
    # The smaller of two real roots by their product: no cancellation at heavy damping.
    if half.imag == 0.0 and half.real > 0.0:
        large = -damping_ratio - half.real
        return np.array([share / large, large], dtype=np.complex128)
    return np.array([-damping_ratio + half, -damping_ratio - half], dtype=np.complex128)
