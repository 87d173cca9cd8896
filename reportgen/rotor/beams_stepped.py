"""Static stiffness of a stepped shaft on rigid or spring bearings.

The shaft is cut at every step, bearing, load and point asked for. Between cuts EI is constant, and
the cubic beam element is the exact solution there (Euler-Bernoulli), so that the deflections at the
cuts are exact whatever the number of pieces. The system is banded and positive definite.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.linalg import LinAlgError, solveh_banded

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
    beam = _Beam(shaft, [position])
    node = 2 * int(beam.nodes_at([position])[0])
    unit = np.zeros((beam.size, 2))
    unit[node, 0] = unit[node + 1, 1] = 1.0
    return np.asarray(beam.solved(unit)[node : node + 2])


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
    yielding = float(flexibility(shaft, position)[0, 0])
    if yielding <= 0.0:
        raise ModelError(f"the point at {position:g} m is on a rigid bearing; it does not yield")
    return 1.0 / yielding


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
    beam = _Beam(shaft, places)
    nodes = 2 * beam.nodes_at(places)
    unit = np.zeros((beam.size, len(places)))
    unit[nodes, np.arange(len(places))] = 1.0
    return np.asarray(beam.solved(unit)[nodes])


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
        EI w'' at the points, shape (n,) [N·m]; just left of the point where it jumps.

    Raises
    ------
    ModelError
        If a point is off the shaft or the force not finite.
    """
    places = np.atleast_1d(np.asarray(at, dtype=np.float64)).tolist()
    beam = _Beam(shaft, [*places, load_at])
    loads = np.zeros((beam.size, 1))
    loads[2 * int(beam.nodes_at([load_at])[0]), 0] = check.finite("force", force, "N")
    return beam.moments(beam.solved(loads)[:, 0])[beam.nodes_at(places)]


class _Beam:
    """The shaft cut into pieces of constant EI: banded stiffness over (deflection, slope)."""

    def __init__(self, shaft: SteppedShaft, points: Sequence[float]) -> None:
        ends = np.concatenate([[0.0], np.cumsum([piece.length for piece in shaft.sections])])
        self.slack = 1e-9 * shaft.length
        for point in points:
            check.finite("position", point, "m")
            if not -self.slack <= point <= shaft.length + self.slack:
                raise ModelError(
                    f"the point at {point:g} m is off the shaft, which is {shaft.length:g} m long"
                )
        cuts = np.sort(np.concatenate([ends, points, [b.position for b in shaft.bearings]]))
        cuts = np.clip(cuts, 0.0, ends[-1])
        self.nodes = cuts[np.concatenate([[True], np.diff(cuts) > self.slack])]
        middles = 0.5 * (self.nodes[1:] + self.nodes[:-1])
        owner = np.clip(np.searchsorted(ends, middles) - 1, 0, len(shaft.sections) - 1)
        self.rigidity = np.array([piece.rigidity for piece in shaft.sections])[owner]
        self.lengths = np.diff(self.nodes)
        self.size = 2 * self.nodes.size
        self.band = self._assembled()
        self.held: list[int] = []
        for bearing in shaft.bearings:
            node = 2 * int(self.nodes_at([bearing.position])[0])
            for row, spring in ((node, bearing.stiffness), (node + 1, bearing.tilting)):
                if math.isinf(spring):
                    self.held.append(row)
                else:
                    self.band[0, row] += spring

    def nodes_at(self, points: Sequence[float]) -> NDArray[np.intp]:
        """Give the number of the node at each point."""
        apart = np.abs(self.nodes[None, :] - np.asarray(points)[:, None])
        return np.asarray(np.argmin(apart, axis=1), dtype=np.intp)

    def solved(self, loads: NDArray[np.float64]) -> NDArray[np.float64]:
        """Give deflections and slopes under loads, one column a case."""
        band, right = self.band.copy(), loads.copy()
        for row in self.held:
            # A held freedom leaves the system: its row and column become those of the unit matrix.
            band[:, row] = 0.0
            for below in range(1, min(4, row + 1)):
                band[below, row - below] = 0.0
            band[0, row] = 1.0
            right[row] = 0.0
        try:
            return np.asarray(solveh_banded(band, right, lower=True))
        except LinAlgError:
            raise ModelError(
                "the bearings leave the shaft free to move; give two, or one held against tilting"
            ) from None

    def moments(self, shape: NDArray[np.float64]) -> NDArray[np.float64]:
        """Bending moment at each node from the piece to its left (the first from its right)."""
        w, slope = shape[0::2], shape[1::2]
        chord = (w[1:] - w[:-1]) / self.lengths
        factor = 2.0 * self.rigidity / self.lengths
        right = factor * (slope[:-1] + 2.0 * slope[1:] - 3.0 * chord)
        left = factor[0] * (3.0 * chord[0] - 2.0 * slope[0] - slope[1])
        return np.concatenate([[left], right])

    def _assembled(self) -> NDArray[np.float64]:
        band = np.zeros((4, self.size))
        for number, (length, rigidity) in enumerate(zip(self.lengths, self.rigidity, strict=True)):
            a, b, c = 12.0 / length**3, 6.0 / length**2, 2.0 / length
            piece = rigidity * np.array(
                [[a, b, -a, b], [b, 2 * c, -b, c], [-a, -b, a, -b], [b, c, -b, 2 * c]]
            )
            for row in range(4):
                for column in range(row + 1):
                    band[row - column, 2 * number + column] += piece[row, column]
        return band
