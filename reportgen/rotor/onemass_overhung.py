"""Disc on an overhang: deflection and slope together, with the gyroscopic moment.

With z the displacement of the disc and β its slope along the shaft, both complex in the frame at
rest, and K the 2×2 stiffness of the shaft end:

    M q̈ − iΩ G q̇ + C q̇ + K q = Ω² (M − G) ε e^{iΩt},   q = (z, β),  ε = (e, τ),
    M = diag(m, I_d),  G = diag(0, I_p),  C = diag(c, c_β).

e is the offset of the mass centre and τ the angle between the principal axis of the disc and the
shaft. A free whirl q e^{iωt} runs forward for ω > 0 and backward for ω < 0; turning faster raises
the forward and lowers the backward frequencies.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.errors import ModelError
from reportgen.rotor import onemass_checks as check


@dataclass(frozen=True)
class OverhungDisc:
    """Rigid disc at the end of a massless shaft.

    Parameters
    ----------
    mass
        Mass [kg], above 0.
    diametral_inertia
        I_d about a diameter through the mass centre [kg·m²], above 0.
    polar_inertia
        I_p about the axis [kg·m²], 0 to 2·I_d (a flat disc has I_p = 2·I_d).
    flexibility
        (deflection, slope) = flexibility @ (force, moment) at the disc, 2×2, symmetric, positive
        definite [m/N, 1/N, 1/(N·m)]: from `beams.overhung_flexibility` or
        `beams_stepped.flexibility`.
    eccentricity
        Offset of the mass centre e [m], 0 or more.
    skew
        Angle of the principal axis τ [rad], in the plane of the offset, of either sign, small.
    damping
        Viscous damping of the deflection c [N·s/m], 0 or more.
    tilt_damping
        Viscous damping of the slope [N·m·s/rad], 0 or more.

    Raises
    ------
    ModelError
        If a value is out of range.
    """

    mass: float
    diametral_inertia: float
    polar_inertia: float
    flexibility: Sequence[Sequence[float]] | NDArray[np.float64]
    eccentricity: float = 0.0
    skew: float = 0.0
    damping: float = 0.0
    tilt_damping: float = 0.0

    def __post_init__(self) -> None:
        check.positive("mass", self.mass, "kg")
        check.positive("diametral inertia", self.diametral_inertia, "kg·m²")
        check.not_negative("polar inertia", self.polar_inertia, "kg·m²")
        if self.polar_inertia > 2.0 * self.diametral_inertia * (1.0 + 1e-9):
            raise ModelError(
                "polar inertia is more than twice the diametral inertia, which no body has"
            )
        check.not_negative("eccentricity", self.eccentricity, "m")
        if abs(check.finite("skew", self.skew, "rad")) > 0.1:
            raise ModelError(f"a skew of {self.skew:g} rad is not small; it must be within ±0.1")
        check.not_negative("damping", self.damping, "N·s/m")
        check.not_negative("tilt damping", self.tilt_damping, "N·m·s/rad")
        _require_flexibility(np.asarray(self.flexibility, dtype=np.float64))

    @property
    def stiffness(self) -> NDArray[np.float64]:
        """K, shape (2, 2) [N/m, N, N·m]."""
        return np.linalg.inv(np.asarray(self.flexibility, dtype=np.float64))


def whirl_frequencies(disc: OverhungDisc, speed: ArrayLike) -> NDArray[np.float64]:
    """Undamped whirl frequencies at given speeds of rotation.

    Parameters
    ----------
    disc
        The disc on its shaft.
    speed
        Speed of rotation [rad/s], any shape.

    Returns
    -------
    ndarray of float
        Four a speed, rising: two backward (negative), two forward, shape (..., 4) [rad/s].

    Raises
    ------
    ModelError
        If a speed is negative or not finite.

    References
    ----------
    Stodola, A. (1924), Dampf- und Gasturbinen, 6th ed. (gyroscopic effect of the disc).
    """
    omega = check.speeds(speed)
    inverse = np.array([1.0 / disc.mass, 1.0 / disc.diametral_inertia])
    # K q + Ωω G q = ω² M q as ω (q, ωq) = [[0, 1], [M⁻¹K, ΩM⁻¹G]] (q, ωq).
    matrix = np.zeros((*omega.shape, 4, 4))
    matrix[..., 0, 2] = matrix[..., 1, 3] = 1.0
    matrix[..., 2:, :2] = inverse[:, None] * disc.stiffness
    matrix[..., 3, 3] = omega * disc.polar_inertia * inverse[1]
    return np.sort(np.real(np.linalg.eigvals(matrix)), axis=-1)


def forward_criticals(disc: OverhungDisc) -> tuple[float, ...]:
    """Undamped speeds where a forward whirl frequency equals the speed, rising [rad/s].

    One for a disc with I_p ≥ I_d, whose second forward frequency the rotor never reaches; two
    otherwise. Roots of det(K − Ω²(M − G)) = 0.
    """
    return _criticals(disc, disc.diametral_inertia - disc.polar_inertia)


def backward_criticals(disc: OverhungDisc) -> tuple[float, float]:
    """Undamped speeds where a backward whirl frequency equals minus the speed, rising [rad/s].

    Unbalance does not excite them on supports alike in all directions.
    Roots of det(K − Ω²(M + G)) = 0.
    """
    first, second = _criticals(disc, disc.diametral_inertia + disc.polar_inertia)
    return first, second


def overhung_response(disc: OverhungDisc, speed: ArrayLike) -> NDArray[np.complex128]:
    """Deflection and slope of the disc at constant speed, in the turning frame.

    Parameters
    ----------
    disc
        The disc with its eccentricity and skew.
    speed
        Speed of rotation [rad/s], any shape.

    Returns
    -------
    ndarray of complex
        (z, β) [m, rad] (0-peak), shape (..., 2).

    Raises
    ------
    ModelError
        If a speed is exactly an undamped critical speed.
    """
    omega = check.speeds(speed)
    effective = np.array([disc.mass, disc.diametral_inertia - disc.polar_inertia])
    resisting = np.array([disc.damping, disc.tilt_damping])
    matrix = np.broadcast_to(disc.stiffness, (*omega.shape, 2, 2)).astype(np.complex128)
    diagonal = 1j * omega[..., None] * resisting - omega[..., None] ** 2 * effective
    matrix[..., [0, 1], [0, 1]] += diagonal
    load = omega[..., None] ** 2 * effective * np.array([disc.eccentricity, disc.skew])
    try:
        return np.asarray(np.linalg.solve(matrix, load[..., None].astype(np.complex128))[..., 0])
    except np.linalg.LinAlgError:
        raise ModelError(
            "at one of the speeds the undamped response has no bound; give damping or leave that "
            "speed out"
        ) from None


def _criticals(disc: OverhungDisc, inertia: float) -> tuple[float, ...]:
    """Positive roots of det(F⁻¹ − x diag(m, I)) = 0, x = Ω², by the reciprocal u = 1/x.

    u² − (m f₁₁ + I f₂₂) u + m I det F = 0 needs no division by I, which is zero for I_p = I_d.
    """
    f = np.asarray(disc.flexibility, dtype=np.float64)
    trace = disc.mass * f[0, 0] + inertia * f[1, 1]
    product = disc.mass * inertia * float(np.linalg.det(f))
    # The discriminant as a sum, which cannot turn negative by rounding unless I is negative.
    gap = (disc.mass * f[0, 0] - inertia * f[1, 1]) ** 2
    root = math.sqrt(max(gap + 4.0 * disc.mass * inertia * f[0, 1] ** 2, 0.0))
    large = 0.5 * (trace + root) if trace >= 0.0 else 0.5 * (trace - root)
    reciprocals = sorted((large, product / large if large else 0.0), reverse=True)
    return tuple(1.0 / math.sqrt(u) for u in reciprocals if u > 1e-12 * abs(large))


def _require_flexibility(f: NDArray[np.float64]) -> None:
    if f.shape != (2, 2) or not np.all(np.isfinite(f)):
        raise ModelError("flexibility must be 2×2: deflection and slope for force and moment")
    if abs(f[0, 1] - f[1, 0]) > 1e-6 * abs(f[0, 1]):
        raise ModelError(
            f"flexibility is not symmetric ({f[0, 1]:g} against {f[1, 0]:g}); a unit moment must "
            "deflect as much as a unit force tilts"
        )
    if f[0, 0] <= 0.0 or f[0, 0] * f[1, 1] - f[0, 1] * f[1, 0] <= 0.0:
        raise ModelError("flexibility must be positive definite, as that of a held shaft is")
