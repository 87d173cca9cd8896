"""Static stiffness of a stepped shaft on rigid or spring bearings.

The bending moment follows from the loads and the bearings' forces by statics, and the deflection
from EI w'' = M by exact integration over the pieces of constant EI (Euler-Bernoulli). The bearings'
forces and the shaft's position as a rigid body are solved for together, so any number of bearings
will do, and steps that lie close together cost no accuracy.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.errors import ModelError
from reportgen.rotor import onemass_checks as check
from reportgen.rotor.beams import area_moment


@dataclass(frozen=True)
class Section:
    """Piece of shaft of one diameter.

    Parameters
    ----------
    length
        Length [m], greater than 0.
    modulus
        Young's modulus [Pa].
    outer, inner
        Diameters that carry bending [m].

    Raises
    ------
    ModelError
        If a value is out of range.
    """

    length: float
    modulus: float
    outer: float
    inner: float = 0.0

    def __post_init__(self) -> None:
        check.positive("length of a section", self.length, "m")
        check.positive("Young's modulus", self.modulus, "Pa")
        area_moment(self.outer, self.inner)

    @property
    def rigidity(self) -> float:
        """EI [N·m²]."""
        return self.modulus * area_moment(self.outer, self.inner)


@dataclass(frozen=True)
class Bearing:
    """Support of the shaft at a point.

    Parameters
    ----------
    position
        Distance from the left end of the shaft [m].
    stiffness
        Radial stiffness [N/m], greater than 0; infinite if rigid.
    tilting
        Stiffness against tilting [N·m/rad], 0 if self-aligning, infinite if held.

    Raises
    ------
    ModelError
        If a value is out of range.
    """

    position: float
    stiffness: float = math.inf
    tilting: float = 0.0

    def __post_init__(self) -> None:
        check.not_negative("position of a bearing", self.position, "m")
        if self.stiffness != math.inf:
            check.positive("stiffness of a bearing", self.stiffness, "N/m")
        if self.tilting != math.inf:
            check.not_negative("tilting stiffness of a bearing", self.tilting, "N·m/rad")


@dataclass(frozen=True)
class SteppedShaft:
    """Shaft of sections in a row, on bearings.

    Parameters
    ----------
    sections
        Sections from left to right, one or more.
    bearings
        Bearings in any order; together they must hold the shaft.

    Raises
    ------
    ModelError
        If there are no sections, a bearing is off the shaft or two stand at one place, or the
        bearings leave the shaft free to fall or tilt.
    """

    sections: Sequence[Section]
    bearings: Sequence[Bearing]

    def __post_init__(self) -> None:
        if not self.sections:
            raise ModelError("a shaft needs at least one section")
        places = [bearing.position for bearing in self.bearings]
        for place in places:
            if place > self.length * (1.0 + 1e-12):
                raise ModelError(
                    f"a bearing at {place:g} m is off the shaft, which is {self.length:g} m long"
                )
        if len(set(places)) < len(places):
            raise ModelError("two bearings stand at the same place; give their sum as one")
        if not places or (len(places) == 1 and self.bearings[0].tilting == 0.0):
            raise ModelError(
                "the bearings leave the shaft free to fall or tilt; give two, or one that holds "
                "against tilting"
            )

    @property
    def length(self) -> float:
        """Length of the shaft [m]."""
        return sum(section.length for section in self.sections)


def flexibility(shaft: SteppedShaft, position: float) -> NDArray[np.float64]:
    """Deflection and slope at a point for a unit force and a unit moment there.

    Parameters
    ----------
    shaft
        The shaft on its bearings.
    position
        Distance from the left end [m].

    Returns
    -------
    ndarray of float
        (deflection, slope) = flexibility @ (force, moment), shape (2, 2), symmetric
        [m/N, 1/N, 1/(N·m)].

    Raises
    ------
    ModelError
        If the point is off the shaft.
    """
    beam = _Beam(shaft)
    loads = [beam.loaded(position, of_moment=kind) for kind in (False, True)]
    return np.array([[load.shape(position, kind) for load in loads] for kind in (False, True)])


def stiffness_at(shaft: SteppedShaft, position: float) -> float:
    """Force at a point of the shaft per deflection there, the bearings' yield included.

    Parameters
    ----------
    shaft
        The shaft on its bearings.
    position
        Distance from the left end [m].

    Returns
    -------
    float
        Stiffness [N/m].

    Raises
    ------
    ModelError
        If the point is off the shaft or on a rigid bearing.
    """
    for bearing in shaft.bearings:
        if math.isinf(bearing.stiffness) and abs(bearing.position - position) < 1e-9 * shaft.length:
            raise ModelError(f"the point at {position:g} m is on a rigid bearing; it cannot yield")
    return 1.0 / float(flexibility(shaft, position)[0, 0])


def influence(shaft: SteppedShaft, points: ArrayLike) -> NDArray[np.float64]:
    """Deflection at each of some points per unit force at each.

    Parameters
    ----------
    shaft
        The shaft on its bearings.
    points
        Distances from the left end [m], shape (n,).

    Returns
    -------
    ndarray of float
        Influence coefficients, shape (n, n), symmetric (Maxwell) [m/N].

    Raises
    ------
    ModelError
        If a point is off the shaft.
    """
    places = np.atleast_1d(np.asarray(points, dtype=np.float64)).tolist()
    beam = _Beam(shaft)
    loads = [beam.loaded(place, of_moment=False) for place in places]
    return np.array([[load.shape(place, slope=False) for load in loads] for place in places])


def bending_moments(
    shaft: SteppedShaft, force: float, load_at: float, at: ArrayLike
) -> NDArray[np.float64]:
    """Bending moment along the shaft under one force.

    Parameters
    ----------
    shaft
        The shaft on its bearings.
    force
        Force [N].
    load_at
        Where it acts [m from the left end].
    at
        Points [m from the left end], shape (n,).

    Returns
    -------
    ndarray of float
        EI w'' at the points, shape (n,) [N·m]; just left of a bearing that holds against tilting.

    Raises
    ------
    ModelError
        If a point is off the shaft or the force not finite.
    """
    beam = _Beam(shaft)
    load = beam.loaded(load_at, of_moment=False)
    places = np.atleast_1d(np.asarray(at, dtype=np.float64)).tolist()
    size = check.finite("force", force, "N")
    return size * np.array([load.moment(beam.checked(place)) for place in places])


@dataclass(frozen=True)
class _Source:
    """Unit force or moment on the shaft, to be scaled by its size."""

    position: float
    of_moment: bool

    def moment(self, x: float) -> float:
        """Bending moment it puts on a shaft that is free to its left."""
        if x <= self.position:
            return 0.0
        return -1.0 if self.of_moment else x - self.position


class _Beam:
    """Deflection of the shaft by integration from its left end."""

    def __init__(self, shaft: SteppedShaft) -> None:
        self.length = shaft.length
        ends = np.concatenate([[0.0], np.cumsum([piece.length for piece in shaft.sections])])
        self.left, self.right = ends[:-1], ends[1:]
        self.rigidity = np.array([piece.rigidity for piece in shaft.sections])
        self.sources: list[_Source] = []
        self.yields: list[float] = []
        for bearing in shaft.bearings:
            self.sources.append(_Source(bearing.position, of_moment=False))
            self.yields.append(1.0 / bearing.stiffness)
            if bearing.tilting > 0.0:
                self.sources.append(_Source(bearing.position, of_moment=True))
                self.yields.append(1.0 / bearing.tilting)
        self.matrix = self._system()

    def checked(self, point: float) -> float:
        """Return the point, or refuse one that is off the shaft."""
        check.finite("position", point, "m")
        if not -1e-9 * self.length <= point <= (1.0 + 1e-9) * self.length:
            raise ModelError(
                f"the point at {point:g} m is off the shaft, which is {self.length:g} m long"
            )
        return min(max(point, 0.0), self.length)

    def free_shape(self, source: _Source, x: float, slope: bool) -> float:
        """Deflection or slope at x from a source's moment alone, zero left of the source."""
        s = source.position
        if x <= s:
            return 0.0
        flat, first, second = (self._power(n, x) - self._power(n, s) for n in range(3))
        if source.of_moment:
            return -flat if slope else -(x * flat - first)
        return first - s * flat if slope else (x + s) * first - second - x * s * flat

    def loaded(self, position: float, of_moment: bool) -> _Loaded:
        """Solve for the bearings' forces and the rigid motion under a unit force or moment."""
        load = _Source(self.checked(position), of_moment)
        right = [-self.free_shape(load, one.position, one.of_moment) for one in self.sources]
        right += self._balance(load, sign=-1.0)
        row, column = self._scales()
        scaled = np.linalg.solve(self.matrix, np.array(right) * row)
        return _Loaded(self, load, scaled * column)

    def _power(self, n: int, x: float) -> float:
        """∫₀ˣ tⁿ/EI dt."""
        upto = np.clip(x, self.left, self.right) ** (n + 1) - self.left ** (n + 1)
        return float(np.sum(upto / ((n + 1) * self.rigidity)))

    def _balance(self, source: _Source, sign: float = 1.0) -> list[float]:
        force = 0.0 if source.of_moment else 1.0
        lever = -1.0 if source.of_moment else self.length - source.position
        return [sign * force, sign * lever]

    def _system(self) -> NDArray[np.float64]:
        """Compatibility at each bearing and balance of the whole, over forces and rigid motion."""
        count = len(self.sources)
        matrix = np.zeros((count + 2, count + 2))
        for i, here in enumerate(self.sources):
            for j, source in enumerate(self.sources):
                matrix[i, j] = self.free_shape(source, here.position, here.of_moment)
            matrix[i, i] += self.yields[i]
            matrix[i, count:] = [0.0, 1.0] if here.of_moment else [1.0, here.position]
            matrix[count:, i] = self._balance(here)
        row, column = self._scales()
        return row[:, None] * matrix * column[None, :]

    def _scales(self) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
        """Units of length and of EI, so that the system holds numbers of like size."""
        length, rigidity = self.length, float(self.rigidity.min())
        kinds = np.array([source.of_moment for source in self.sources])
        # Per unit force: deflections L³/EI, slopes L²/EI, moments L.
        deflection = length**3 / rigidity
        shapes = np.where(kinds, deflection / length, deflection)
        forces = np.where(kinds, length, 1.0)
        row = 1.0 / np.append(shapes, [1.0, length])
        return row, np.append(forces, [deflection, deflection / length])


@dataclass(frozen=True)
class _Loaded:
    """The shaft under one unit load, with the bearings' forces and the rigid motion found."""

    beam: _Beam
    load: _Source
    found: NDArray[np.float64]

    def shape(self, x: float, slope: bool) -> float:
        """Deflection or slope at a point."""
        rigid = self.found[-1] if slope else self.found[-2] + self.found[-1] * x
        own = self.beam.free_shape(self.load, x, slope)
        forces = zip(self.beam.sources, self.found, strict=False)
        return float(
            own + rigid + sum(f * self.beam.free_shape(one, x, slope) for one, f in forces)
        )

    def moment(self, x: float) -> float:
        """Bending moment at a point."""
        forces = zip(self.beam.sources, self.found, strict=False)
        return float(self.load.moment(x) + sum(f * one.moment(x) for one, f in forces))
