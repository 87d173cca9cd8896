"""Static stiffness and stress of a uniform shaft (Euler-Bernoulli beam theory).

The stiffness is the force at a point per deflection at that point. Shear deflection is left out:
for a solid round shaft on a span of ten diameters that makes it about 2 % too stiff, more on
shorter spans. Stepped shafts and spring bearings: `reportgen.rotor.beams_stepped`.

Sources: Young, W. C. & Budynas, R. G., Roark's Formulas for Stress and Strain, beams with
concentrated loads; Timoshenko, S. P., Strength of Materials, part I.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.errors import ModelError
from reportgen.rotor import onemass_checks as check


def area_moment(outer: float, inner: float = 0.0) -> float:
    """Second moment of area of a round section, π(D⁴ − d⁴)/64.

    Parameters
    ----------
    outer, inner
        Diameters D > d ≥ 0 [m].

    Returns
    -------
    float
        I [m⁴].

    Raises
    ------
    ModelError
        If the diameters are out of range.
    """
    _require_section(outer, inner)
    return math.pi / 64.0 * (outer**4 - inner**4)


def section_modulus(outer: float, inner: float = 0.0) -> float:
    """Section modulus in bending of a round section, 2I/D.

    Parameters
    ----------
    outer, inner
        Diameters D > d ≥ 0 [m].

    Returns
    -------
    float
        W [m³].

    Raises
    ------
    ModelError
        If the diameters are out of range.
    """
    return 2.0 * area_moment(outer, inner) / outer


def bending_stress(moment: ArrayLike, outer: float, inner: float = 0.0) -> NDArray[np.float64]:
    """Bending stress at the surface of a round shaft, |M|/W.

    Parameters
    ----------
    moment
        Bending moment [N·m], any shape, real or complex.
    outer, inner
        Diameters D > d ≥ 0 [m].

    Returns
    -------
    ndarray of float
        Nominal stress [Pa], without notch factors.

    Raises
    ------
    ModelError
        If the diameters are out of range or a moment is not finite.
    """
    size = np.abs(np.asarray(moment))
    if size.size and not np.all(np.isfinite(size)):
        raise ModelError("bending moment holds a value that is not finite")
    return np.asarray(size / section_modulus(outer, inner), dtype=np.float64)


def simply_supported(modulus: float, moment: float, span: float, position: float) -> float:
    """Stiffness of a shaft on two self-aligning bearings, load between them: 3EIL/(a²b²).

    Parameters
    ----------
    modulus
        Young's modulus E [Pa].
    moment
        Second moment of area I [m⁴].
    span
        Distance of the bearings L [m].
    position
        Distance of the load from one bearing a [m], 0 < a < L; b = L − a.

    Returns
    -------
    float
        Force per deflection at the load [N/m].

    Raises
    ------
    ModelError
        If a value is out of range.
    """
    rigidity, a, b = _between(modulus, moment, span, position)
    return 3.0 * rigidity * span / (a * b) ** 2


def built_in_both_ends(modulus: float, moment: float, span: float, position: float) -> float:
    """Stiffness of a shaft held against tilting at both bearings: 3EIL³/(a³b³).

    Parameters
    ----------
    modulus, moment, span, position
        As in `simply_supported`.

    Returns
    -------
    float
        Force per deflection at the load [N/m]; 192EI/L³ at the middle.

    Raises
    ------
    ModelError
        If a value is out of range.
    """
    rigidity, a, b = _between(modulus, moment, span, position)
    return 3.0 * rigidity * (span / (a * b)) ** 3


def built_in_and_supported(modulus: float, moment: float, span: float, position: float) -> float:
    """Stiffness of a shaft held against tilting at one bearing only: 12EIL³/(a³b²(3L + b)).

    Parameters
    ----------
    modulus, moment, span
        As in `simply_supported`.
    position
        Distance a of the load from the bearing that holds against tilting [m]; b = L − a.

    Returns
    -------
    float
        Force per deflection at the load [N/m]; 768EI/(7L³) at the middle.

    Raises
    ------
    ModelError
        If a value is out of range.
    """
    rigidity, a, b = _between(modulus, moment, span, position)
    return 12.0 * rigidity * span**3 / (a**3 * b**2 * (3.0 * span + b))


def cantilever(modulus: float, moment: float, length: float) -> float:
    """Stiffness at the free end of a shaft built in at the other: 3EI/L³.

    Parameters
    ----------
    modulus, moment
        E [Pa] and I [m⁴].
    length
        Distance of the load from the built-in end L [m].

    Returns
    -------
    float
        Force per deflection at the load [N/m].

    Raises
    ------
    ModelError
        If a value is out of range.
    """
    return 3.0 * _rigidity(modulus, moment) / check.positive("length", length, "m") ** 3


def overhung(modulus: float, moment: float, span: float, overhang: float) -> float:
    """Stiffness at the end of an overhang beyond two bearings: 3EI/(a²(L + a)).

    Parameters
    ----------
    modulus, moment, span
        As in `simply_supported`.
    overhang
        Distance of the load from the nearer bearing a [m].

    Returns
    -------
    float
        Force per deflection at the load [N/m].

    Raises
    ------
    ModelError
        If a value is out of range.
    """
    rigidity = _rigidity(modulus, moment)
    length = check.positive("span", span, "m")
    a = check.positive("overhang", overhang, "m")
    return 3.0 * rigidity / (a**2 * (length + a))


def overhung_flexibility(
    modulus: float, moment: float, span: float, overhang: float
) -> NDArray[np.float64]:
    """Deflection and slope at the end of an overhang for a unit force and a unit moment there.

    Parameters
    ----------
    modulus, moment, span, overhang
        As in `overhung`.

    Returns
    -------
    ndarray of float
        [[a²(L + a)/3, a(2L + 3a)/6], [a(2L + 3a)/6, (L + 3a)/3]]/(EI), shape (2, 2) [m/N, 1/N,
        1/(N·m)]: (deflection, slope) = flexibility @ (force, moment).

    Raises
    ------
    ModelError
        If a value is out of range.
    """
    rigidity = _rigidity(modulus, moment)
    length = check.positive("span", span, "m")
    a = check.positive("overhang", overhang, "m")
    cross = a * (2.0 * length + 3.0 * a) / 6.0
    return (
        np.array([[a**2 * (length + a) / 3.0, cross], [cross, (length + 3.0 * a) / 3.0]]) / rigidity
    )


def simply_supported_deflection(
    modulus: float, moment: float, span: float, load_at: float, at: ArrayLike
) -> NDArray[np.float64]:
    """Deflection anywhere between two self-aligning bearings per unit force at a point.

    Parameters
    ----------
    modulus, moment, span
        As in `simply_supported`.
    load_at
        Distance of the force from the first bearing [m], 0 < a < L.
    at
        Distances x from the first bearing [m], within [0, L], any shape.

    Returns
    -------
    ndarray of float
        Influence coefficient bx(L² − b² − x²)/(6EIL) for x ≤ a [m/N], by reciprocity beyond.

    Raises
    ------
    ModelError
        If a value is out of range.
    """
    rigidity, a, _ = _between(modulus, moment, span, load_at)
    x = np.asarray(at, dtype=np.float64)
    if x.size and not (float(x.min()) >= 0.0 and float(x.max()) <= span):
        raise ModelError(f"positions must lie between the bearings, 0 to {span:g} m")
    near, far = np.minimum(x, a), span - np.maximum(x, a)
    return np.asarray(far * near * (span**2 - far**2 - near**2) / (6.0 * rigidity * span))


def simply_supported_moment(force: ArrayLike, span: float, position: float) -> NDArray[np.float64]:
    """Bending moment under a force between two self-aligning bearings, Fab/L.

    Parameters
    ----------
    force
        Force [N], any shape, real or complex (its size is taken).
    span, position
        As in `simply_supported`.

    Returns
    -------
    ndarray of float
        Size of the moment at the load [N·m], the greatest along the shaft.

    Raises
    ------
    ModelError
        If a value is out of range.
    """
    _, a, b = _between(1.0, 1.0, span, position)
    return np.asarray(np.abs(np.asarray(force)) * a * b / span, dtype=np.float64)


def built_in_moment(force: ArrayLike, span: float, position: float) -> NDArray[np.float64]:
    """Largest bending moment under a force on a shaft built in at both ends.

    The moment at the end nearer the load, F a b²/L² with a ≤ b, is never below the one at the
    other end, F a² b/L², or at the load, 2 F a² b²/L³ (Roark, built-in beam, point load).

    Parameters
    ----------
    force
        Force [N], any shape, real or complex (its size is taken).
    span, position
        As in `built_in_both_ends`.

    Returns
    -------
    ndarray of float
        Size of the largest moment [N·m].

    Raises
    ------
    ModelError
        If a value is out of range.
    """
    _, a, b = _between(1.0, 1.0, span, position)
    near, far = min(a, b), max(a, b)
    return np.asarray(np.abs(np.asarray(force)) * near * far**2 / span**2, dtype=np.float64)


def overhung_moment(force: ArrayLike, overhang: float) -> NDArray[np.float64]:
    """Bending moment at the nearer bearing under a force on an overhang, Fa.

    Parameters
    ----------
    force
        Force [N], any shape, real or complex (its size is taken).
    overhang
        Distance of the load from the bearing a [m].

    Returns
    -------
    ndarray of float
        Size of the moment at the bearing [N·m], the greatest along the shaft.

    Raises
    ------
    ModelError
        If the overhang is not above 0.
    """
    a = check.positive("overhang", overhang, "m")
    return np.asarray(np.abs(np.asarray(force)) * a, dtype=np.float64)


def _require_section(outer: float, inner: float) -> None:
    check.positive("outer diameter", outer, "m")
    check.not_negative("inner diameter", inner, "m")
    if inner >= outer:
        raise ModelError(f"inner diameter {inner:g} m is not below the outer {outer:g} m")


def _rigidity(modulus: float, moment: float) -> float:
    check.positive("Young's modulus", modulus, "Pa")
    return modulus * check.positive("second moment of area", moment, "m⁴")


def _between(
    modulus: float, moment: float, span: float, position: float
) -> tuple[float, float, float]:
    rigidity = _rigidity(modulus, moment)
    check.positive("span", span, "m")
    check.finite("position of the load", position, "m")
    if not 0.0 < position < span:
        raise ModelError(
            f"the load at {position:g} m is not between the bearings at 0 and {span:g} m"
        )
    return rigidity, position, span - position
