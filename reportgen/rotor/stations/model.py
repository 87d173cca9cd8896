"""Assembly of a rotor into block-tridiagonal matrices.

The shaft is the same in every plane through its axis, so it is stored once, as symmetric
chains of 2×2 blocks in (deflection, slope). Only bearings tell x from y; they are kept
apart and enter where a matrix is formed.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.errors import ModelError
from reportgen.rotor.stations.element import ElementMatrices, element_matrices
from reportgen.rotor.stations.inputs import Bearing, Disc, Rotor, Section

Real = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class Chain:
    """Symmetric block-tridiagonal matrix of n stations: 2×2 blocks on and above the diagonal.

    ``diagonal`` has shape (n, 2, 2), ``upper`` (n − 1, 2, 2); the lower blocks are the
    transposes of the upper.
    """

    diagonal: Real
    upper: Real

    def __add__(self, other: Chain) -> Chain:
        return Chain(self.diagonal + other.diagonal, self.upper + other.upper)

    def times(self, vector: NDArray[np.float64] | NDArray[np.complex128]) -> Any:
        """Multiply ``vector`` of shape (n, 2, ...), real or complex."""
        out = _each(self.diagonal, vector)
        out[:-1] += _each(self.upper, vector[1:])
        out[1:] += _each(np.swapaxes(self.upper, 1, 2), vector[:-1])
        return out


def _each(blocks: Real, vector: Any) -> Any:
    flat = vector.reshape(*vector.shape[:2], -1)
    return (blocks @ flat).reshape(vector.shape)


def chain_of_elements(matrices: Real) -> Chain:
    """Assemble element matrices (E, 4, 4) of consecutive elements."""
    diagonal = np.zeros((matrices.shape[0] + 1, 2, 2))
    diagonal[:-1] += matrices[:, :2, :2]
    diagonal[1:] += matrices[:, 2:, 2:]
    return Chain(diagonal, matrices[:, :2, 2:].copy())


@dataclass(frozen=True, eq=False)
class Support:
    """A bearing in the model: its station in the mesh and its pedestal's number, or −1."""

    bearing: Bearing
    node: int
    pedestal: int


@dataclass(frozen=True, eq=False)
class Model:
    """A rotor ready for analysis. Made by :func:`assemble`.

    Attributes
    ----------
    rotor
        What it was made from.
    positions
        Of the n mesh stations from the left end [m].
    node_of
        Mesh station of each station of the rotor.
    elements
        Element matrices, for recovery of moments.
    element_stiffness
        Elastic stiffness of each element with the effect of axial load, (E, 4, 4).
    mass, polar, stiffness, internal
        Chains of shaft, discs and axial load: inertia, gyroscopic, elastic, internal damping.
    station_mass, station_polar, station_diametral
        Of rigid parts at each mesh station [kg], [kg m²].
    supports
        Bearings and seals.
    """

    rotor: Rotor
    sections: tuple[Section, ...]
    positions: Real
    node_of: NDArray[np.int64]
    elements: ElementMatrices
    element_stiffness: Real
    mass: Chain
    polar: Chain
    stiffness: Chain
    internal: Chain
    station_mass: Real
    station_polar: Real
    station_diametral: Real
    supports: tuple[Support, ...]

    @property
    def stations(self) -> int:
        """Number of mesh stations n."""
        return int(self.positions.size)

    @property
    def pedestals(self) -> int:
        """Number of pedestals."""
        return sum(s.pedestal >= 0 for s in self.supports)

    @property
    def has_internal_damping(self) -> bool:
        """Whether any section damps in the turning frame."""
        return bool(np.any(self.internal.diagonal))

    def node(self, station: int) -> int:
        """Mesh station of a station of the rotor; refuse one that does not exist."""
        if not 0 <= station < self.node_of.size:
            raise ModelError(
                f"station {station} does not exist; the shaft has 0 to {self.node_of.size - 1}"
            )
        return int(self.node_of[station])


def _tension(rotor: Rotor, node_of: NDArray[np.int64], elements: int) -> Real:
    tension = np.zeros(elements)
    for load in rotor.axial_loads:
        tension[node_of[load.station_from] : node_of[load.station_to]] += load.force
    return tension


def assemble(rotor: Rotor) -> Model:
    """Assemble a rotor.

    Parameters
    ----------
    rotor
        Sections, parts and supports.

    Returns
    -------
    Model
        With one mesh station at each element's end.
    """
    node_of = np.cumsum([0, *(s.elements for s in rotor.sections)])
    sections = tuple(cut for section in rotor.sections for cut in section.split())
    elements = element_matrices(sections)
    positions = np.concatenate([[0.0], np.cumsum(elements.length)])
    n = positions.size

    mass, polar, diametral = np.zeros(n), np.zeros(n), np.zeros(n)
    parts: list[Disc] = [
        *rotor.discs,
        *(Disc(p.station, p.mass, 0.0, 0.0) for p in rotor.masses),
        *(c.as_disc() for c in rotor.couplings),
    ]
    for part in parts:
        i = node_of[part.station]
        mass[i] += part.mass
        polar[i] += part.polar_inertia
        diametral[i] += part.diametral_inertia

    tension = _tension(rotor, node_of.astype(np.int64), len(sections))
    loaded = elements.stiffness + tension[:, None, None] * elements.string
    inertia = chain_of_elements(elements.mass)
    inertia.diagonal[:, 0, 0] += mass
    inertia.diagonal[:, 1, 1] += diametral
    gyroscopic = chain_of_elements(elements.polar)
    gyroscopic.diagonal[:, 1, 1] += polar

    supports: list[Support] = []
    pedestals = 0
    for bearing in rotor.bearings:
        number = -1
        if bearing.pedestal is not None:
            number, pedestals = pedestals, pedestals + 1
        supports.append(Support(bearing, int(node_of[bearing.station]), number))

    return Model(
        rotor=rotor,
        sections=sections,
        positions=positions,
        node_of=node_of.astype(np.int64),
        elements=elements,
        mass=inertia,
        polar=gyroscopic,
        stiffness=chain_of_elements(loaded),
        element_stiffness=loaded,
        internal=chain_of_elements(elements.internal),
        station_mass=mass,
        station_polar=polar,
        station_diametral=diametral,
        supports=tuple(supports),
    )
