"""What a rotor is made of, as a drawing and a data sheet give it. SI throughout."""

from __future__ import annotations

import math
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from reportgen.errors import ModelError
from reportgen.rotor.stations.coefficients import Coefficients


def _require(ok: bool, message: str) -> None:
    if not ok:
        raise ModelError(message)


def _positive(value: float, what: str, unit: str) -> None:
    _require(
        math.isfinite(value) and value > 0,
        f"{what} is {value:g} {unit}; give a finite value above zero",
    )


def _not_negative(value: float, what: str, unit: str) -> None:
    _require(
        math.isfinite(value) and value >= 0,
        f"{what} is {value:g} {unit}; give a finite value, zero or above",
    )


@dataclass(frozen=True)
class Material:
    """Isotropic shaft material.

    Parameters
    ----------
    density [kg/m³], modulus (Young) [Pa], poisson [-]
        0 ≤ poisson < 0.5; Cowper's shear coefficient depends on it.
    shear_modulus
        [Pa]; E / (2(1 + ν)) where left out.
    internal_damping
        Viscous internal (rotating) damping, force = ``internal_damping`` × stiffness ×
        deformation rate in the turning shaft [s].
    """

    density: float
    modulus: float
    poisson: float = 0.3
    shear_modulus: float | None = None
    internal_damping: float = 0.0

    def __post_init__(self) -> None:
        _positive(self.density, "density", "kg/m³")
        _positive(self.modulus, "Young's modulus", "Pa")
        _require(0 <= self.poisson < 0.5, f"Poisson's ratio is {self.poisson:g}; give 0 to 0.5")
        _not_negative(self.internal_damping, "internal damping", "s")
        if self.shear_modulus is None:
            object.__setattr__(self, "shear_modulus", self.modulus / (2 * (1 + self.poisson)))
        _positive(self.shear, "shear modulus", "Pa")

    @property
    def shear(self) -> float:
        """Shear modulus [Pa]."""
        assert self.shear_modulus is not None
        return self.shear_modulus


@dataclass(frozen=True)
class Section:
    """One length of shaft between two stations, cylindrical or conical, solid or hollow.

    Parameters
    ----------
    length
        [m].
    outer
        Outer diameter that carries bending, at the left end [m].
    material
        Of the shaft.
    inner
        Bore at the left end [m].
    outer_right, inner_right
        At the right end [m]; equal to the left where left out (cylinder).
    mass_outer, mass_outer_right
        Outer diameter that counts for mass and inertia [m] (sleeves that add mass only);
        equal to the stiffness diameters where left out.
    position
        Distance of the left end from the left end of the shaft [m]; optional, checked
        against the lengths before it, so that overlaps and gaps are seen.
    elements
        Number of equal finite elements made of this section.
    """

    length: float
    outer: float
    material: Material
    inner: float = 0.0
    outer_right: float | None = None
    inner_right: float | None = None
    mass_outer: float | None = None
    mass_outer_right: float | None = None
    position: float | None = None
    elements: int = 1

    def __post_init__(self) -> None:
        _positive(self.length, "length of a section", "m")
        _require(self.elements >= 1, f"a section has {self.elements} elements; give at least 1")
        for name, do, di in zip(("left", "right"), self.outers, self.inners, strict=True):
            _positive(do, f"outer diameter at the {name} end", "m")
            _not_negative(di, f"inner diameter at the {name} end", "m")
            _require(di < do, f"inner diameter {di:g} m is not below outer {do:g} m ({name} end)")
        for do, di in zip(self.mass_outers, self.inners, strict=True):
            _require(do > di, f"mass diameter {do:g} m is not above the bore {di:g} m")

    @property
    def outers(self) -> tuple[float, float]:
        """Outer diameters for stiffness at both ends [m]."""
        return self.outer, self.outer if self.outer_right is None else self.outer_right

    @property
    def inners(self) -> tuple[float, float]:
        """Bores at both ends [m]."""
        return self.inner, self.inner if self.inner_right is None else self.inner_right

    @property
    def mass_outers(self) -> tuple[float, float]:
        """Outer diameters for mass at both ends [m]."""
        left, right = self.outers
        if self.mass_outer is None:
            return left, right
        again = self.mass_outer if self.mass_outer_right is None else self.mass_outer_right
        return self.mass_outer, again

    def split(self) -> list[Section]:
        """Cut the section into its equal elements, diameters running linearly."""

        def cut(ends: tuple[float, float]) -> NDArray[np.float64]:
            return np.linspace(*ends, self.elements + 1)

        do, di, dm = cut(self.outers), cut(self.inners), cut(self.mass_outers)
        return [
            replace(
                self,
                length=self.length / self.elements,
                outer=float(do[i]),
                outer_right=float(do[i + 1]),
                inner=float(di[i]),
                inner_right=float(di[i + 1]),
                mass_outer=float(dm[i]),
                mass_outer_right=float(dm[i + 1]),
                position=None,
                elements=1,
            )
            for i in range(self.elements)
        ]


@dataclass(frozen=True)
class Disc:
    """Rigid disc at a station: mass [kg], polar and diametral moment of inertia [kg m²]."""

    station: int
    mass: float
    polar_inertia: float
    diametral_inertia: float
    name: str = ""

    def __post_init__(self) -> None:
        _not_negative(self.mass, "mass of a disc", "kg")
        _not_negative(self.polar_inertia, "polar inertia of a disc", "kg m²")
        _not_negative(self.diametral_inertia, "diametral inertia of a disc", "kg m²")
        _require(
            self.polar_inertia <= 2 * self.diametral_inertia * (1 + 1e-9),
            f"polar inertia {self.polar_inertia:g} kg m² exceeds twice the diametral "
            f"{self.diametral_inertia:g} kg m², which no body has; check the two values",
        )


@dataclass(frozen=True)
class PointMass:
    """Mass [kg] without moments of inertia at a station."""

    station: int
    mass: float
    name: str = ""

    def __post_init__(self) -> None:
        _not_negative(self.mass, "added mass", "kg")


@dataclass(frozen=True)
class Coupling:
    """Coupling of which a share (half by common practice) is carried by this rotor.

    ``mass`` [kg] and inertias [kg m²] are those of the whole coupling.
    """

    station: int
    mass: float
    polar_inertia: float = 0.0
    diametral_inertia: float = 0.0
    share: float = 0.5
    name: str = ""

    def __post_init__(self) -> None:
        _require(0 < self.share <= 1, f"share of a coupling is {self.share:g}; give 0 to 1")
        self.as_disc()

    def as_disc(self) -> Disc:
        """Give the carried share as a disc."""
        return Disc(
            self.station,
            self.share * self.mass,
            self.share * self.polar_inertia,
            self.share * self.diametral_inertia,
            self.name,
        )


@dataclass(frozen=True)
class Pedestal:
    """Bearing pedestal on rigid ground: values for x and y, no cross terms.

    Parameters
    ----------
    mass [kg], stiffness [N/m], damping [N s/m]
        Each a pair (x, y).
    """

    mass: tuple[float, float]
    stiffness: tuple[float, float]
    damping: tuple[float, float] = (0.0, 0.0)

    def __post_init__(self) -> None:
        for axis, m, k, c in zip("xy", self.mass, self.stiffness, self.damping, strict=True):
            _not_negative(m, f"pedestal mass ({axis})", "kg")
            _positive(k, f"pedestal stiffness ({axis})", "N/m")
            _not_negative(c, f"pedestal damping ({axis})", "N s/m")


@dataclass(frozen=True, eq=False)
class Bearing:
    """Bearing, or anything that acts like one, between a station and ground or a pedestal.

    Parameters
    ----------
    station
        Counted from 0.
    coefficients
        :class:`~.coefficients.Constant`, :class:`~.coefficients.SpeedTable` or the like.
    pedestal
        In series, where there is one.
    carries_weight
        False for a seal: it takes no part in static loads nor in the critical speed map.
    """

    station: int
    coefficients: Coefficients
    name: str = ""
    pedestal: Pedestal | None = None
    carries_weight: bool = True


def seal(station: int, coefficients: Coefficients, name: str = "") -> Bearing:
    """Give a seal: bearing-like coefficients that carry no weight."""
    return Bearing(station, coefficients, name, None, carries_weight=False)


@dataclass(frozen=True)
class AxialLoad:
    """Constant axial force [N] between two stations, tension positive."""

    station_from: int
    station_to: int
    force: float

    def __post_init__(self) -> None:
        _require(math.isfinite(self.force), "axial force is not finite; give a finite value")
        _require(
            self.station_to > self.station_from,
            f"axial load runs from station {self.station_from} to {self.station_to}; "
            "give them in rising order",
        )


@dataclass(frozen=True, eq=False)
class Rotor:
    """A rotor: shaft sections from left to right and what sits on them.

    Stations are the ends of the *sections* as given, counted from 0; a section's own
    ``elements`` subdivide it without changing these numbers.

    Raises
    ------
    ModelError
        If there is no section, a part sits at a station that does not exist, or sections
        overlap or leave a gap.
    """

    sections: tuple[Section, ...]
    discs: tuple[Disc, ...] = ()
    masses: tuple[PointMass, ...] = ()
    couplings: tuple[Coupling, ...] = ()
    bearings: tuple[Bearing, ...] = ()
    axial_loads: tuple[AxialLoad, ...] = ()
    name: str = ""
    _ends: tuple[float, ...] = field(init=False, repr=False)

    def __post_init__(self) -> None:
        for attribute in (
            "sections", "discs", "masses", "couplings", "bearings", "axial_loads",
        ):  # fmt: skip
            object.__setattr__(self, attribute, tuple(getattr(self, attribute)))
        _require(bool(self.sections), "the rotor has no shaft section; give at least one")
        object.__setattr__(self, "_ends", self._run_of_ends())
        for kind, parts in (
            ("disc", self.discs),
            ("added mass", self.masses),
            ("coupling", self.couplings),
            ("bearing or seal", self.bearings),
        ):
            for part in parts:
                self._exists(part.station, f"{kind} {part.name}".strip())
        for load in self.axial_loads:
            self._exists(load.station_from, "axial load")
            self._exists(load.station_to, "axial load")

    def _run_of_ends(self) -> tuple[float, ...]:
        ends = [0.0]
        for number, section in enumerate(self.sections, start=1):
            if section.position is not None:
                off = section.position - ends[-1]
                if abs(off) > 1e-6 * max(section.length, 1e-3):
                    raise ModelError(
                        f"section {number} starts at {section.position:g} m but the one before "
                        f"ends at {ends[-1]:g} m: they {'overlap' if off < 0 else 'leave a gap'}"
                        "; sections must follow one another"
                    )
            ends.append(ends[-1] + section.length)
        return tuple(ends)

    def _exists(self, station: int, what: str) -> None:
        _require(
            0 <= station < len(self._ends),
            f"{what} sits at station {station}, but the shaft has stations 0 to "
            f"{len(self._ends) - 1}",
        )

    @property
    def positions(self) -> NDArray[np.float64]:
        """Distance of each station from the left end [m], shape (n,)."""
        return np.asarray(self._ends)

    def refined(self, factor: int = 2) -> Rotor:
        """Cut each finite element into ``factor`` equal ones; station numbers stay."""
        _require(factor >= 1, f"refinement factor is {factor}; give at least 1")
        return replace(
            self,
            sections=tuple(replace(s, elements=s.elements * factor) for s in self.sections),
        )
