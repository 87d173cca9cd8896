"""Timoshenko beam elements with rotary inertia, shear and gyroscopic terms.

One derivation for cylinders and cones. Between its ends an unloaded element carries a
constant shear force and a linear bending moment, so its deflection is an integral of the
section's flexibility; these static shapes are the interpolation for all inertia terms.
For a uniform element the matrices are those of Nelson (1980).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from reportgen.rotor.stations.inputs import Section

Real = NDArray[np.float64]

# Exact for a cylinder (shapes are cubic, inertia integrands of degree 6); for a cone the
# integrand is a smooth ratio of quartics, and 12 points leave about 1e-10 at 1 : 3 taper.
_POINTS, _WEIGHTS = (np.asarray(a) for a in np.polynomial.legendre.leggauss(12))
_POINTS, _WEIGHTS = (_POINTS + 1) / 2, _WEIGHTS / 2


def shear_coefficient(bore_ratio: Real, poisson: Real) -> Real:
    """Shear coefficient κ of a hollow circular section.

    κ = 6(1+ν)(1+m²)² / ((7+6ν)(1+m²)² + (20+12ν)m²), m = inner / outer diameter.

    Source: Cowper (1966), J. Appl. Mech. 33, 335-340. Valid for 0 ≤ m < 1.
    """
    m2 = bore_ratio**2
    s = (1 + m2) ** 2
    return 6 * (1 + poisson) * s / ((7 + 6 * poisson) * s + (20 + 12 * poisson) * m2)


@dataclass(frozen=True, eq=False)
class ElementMatrices:
    """Matrices of E elements, each (E, 4, 4) in (deflection, slope) left, then right.

    They act alike in both planes: ``stiffness`` [N/m, N, N m], ``mass`` (translation and
    rotary inertia), ``polar`` (gyroscopic: multiplies Ω times the other plane's rate),
    ``internal`` (internal damping [s] × stiffness), ``string`` (per newton of tension).
    ``length`` [m]; ``section_modulus`` [m³] at both ends, shape (E, 2).
    """

    stiffness: Real
    mass: Real
    polar: Real
    internal: Real
    string: Real
    length: Real
    section_modulus: Real
    weight: Real
    polar_inertia: Real


def _area(outer: Real, inner: Real) -> Real:
    return np.pi / 4 * (outer**2 - inner**2)


def _second_moment(outer: Real, inner: Real) -> Real:
    return np.pi / 64 * (outer**4 - inner**4)


@dataclass(frozen=True, eq=False)
class _Run:
    """Section properties at fractions of the length, arrays (E, ...)."""

    bending: Real
    shear: Real
    mass: Real
    rotary: Real


class _Geometry:
    def __init__(self, sections: Sequence[Section]) -> None:
        self.length = np.array([s.length for s in sections])
        self.outer = np.array([s.outers for s in sections])
        self.inner = np.array([s.inners for s in sections])
        self.mass_outer = np.array([s.mass_outers for s in sections])
        self.E = np.array([s.material.modulus for s in sections])
        self.G = np.array([s.material.shear for s in sections])
        self.rho = np.array([s.material.density for s in sections])
        self.nu = np.array([s.material.poisson for s in sections])
        self.eta = np.array([s.material.internal_damping for s in sections])

    def at(self, fraction: Real) -> _Run:
        tail = (slice(None),) + (None,) * fraction.ndim

        def along(ends: Real) -> Real:
            left, right = ends[:, 0][tail], ends[:, 1][tail]
            return np.asarray(left + (right - left) * fraction)

        do, di, dm = along(self.outer), along(self.inner), along(self.mass_outer)
        kappa = shear_coefficient(di / do, self.nu[tail])
        return _Run(
            self.E[tail] * _second_moment(do, di),
            kappa * self.G[tail] * _area(do, di),
            self.rho[tail] * _area(dm, di),
            self.rho[tail] * _second_moment(dm, di),
        )


def element_matrices(sections: Sequence[Section]) -> ElementMatrices:
    """Build the matrices of all elements at once.

    With M = EIφ', V = κGA(w' − φ) and M' + V = 0, an element carries M = c₀ + c₁s and
    V = −c₁; compatibility gives F c = B q and the stiffness BᵀF⁻¹B.

    Parameters
    ----------
    sections
        One element each.

    Returns
    -------
    ElementMatrices
        Of the E elements.

    Notes
    -----
    Source: Nelson (1980), J. Mech. Des. 102, 793-803 (uniform and conical Timoshenko
    element); flexibility form after Przemieniecki (1968).
    """
    geo = _Geometry(sections)
    L = geo.length
    E = L.size
    run = geo.at(_POINTS)
    s = L[:, None] * _POINTS
    w = L[:, None] * _WEIGHTS

    F = np.empty((E, 2, 2))
    F[:, 0, 0] = (w / run.bending).sum(1)
    F[:, 0, 1] = F[:, 1, 0] = (w * s / run.bending).sum(1)
    F[:, 1, 1] = (w * (s**2 / run.bending + 1 / run.shear)).sum(1)
    B = np.zeros((E, 2, 4))
    B[:, 0] = (0, -1, 0, 1)
    B[:, 1] = (1, 0, -1, 0)
    B[:, 1, 3] = L
    c = np.linalg.solve(F, B)
    stiffness = np.swapaxes(B, 1, 2) @ c
    stiffness = (stiffness + np.swapaxes(stiffness, 1, 2)) / 2

    # Integrals from the left end up to each point, by the same rule on each part.
    part = geo.at(_POINTS[:, None] * _POINTS[None, :])
    t = s[:, :, None] * _POINTS
    dt = s[:, :, None] * _WEIGHTS
    turn0, turn1 = (dt / part.bending).sum(2), (dt * t / part.bending).sum(2)
    arm = s[:, :, None] - t
    sag0 = (dt * arm / part.bending).sum(2)
    sag1 = (dt * (arm * t / part.bending - 1 / part.shear)).sum(2)

    slope = turn0[..., None] * c[:, None, 0] + turn1[..., None] * c[:, None, 1]
    slope[..., 1] += 1
    deflection = sag0[..., None] * c[:, None, 0] + sag1[..., None] * c[:, None, 1]
    deflection[..., 0] += 1
    deflection[..., 1] += s
    tangent = slope - c[:, None, 1] / run.shear[..., None]

    def weigh(density: Real, shape: Real) -> Real:
        return np.asarray(np.einsum("ep,epi,epj->eij", density * w, shape, shape))

    rotary = weigh(run.rotary, slope)
    ends = np.stack([geo.outer, geo.inner])
    return ElementMatrices(
        stiffness=stiffness,
        mass=weigh(run.mass, deflection) + rotary,
        polar=2 * rotary,
        internal=geo.eta[:, None, None] * stiffness,
        string=weigh(np.ones_like(w), tangent),
        length=L,
        section_modulus=_second_moment(ends[0], ends[1]) / (ends[0] / 2),
        weight=(w * run.mass).sum(1),
        polar_inertia=2 * (w * run.rotary).sum(1),
    )
