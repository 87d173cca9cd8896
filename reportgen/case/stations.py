"""The rotor by stations as a drawing and its data sheets give it."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated, ClassVar, Self

from pydantic import Field, model_validator

from reportgen.case.base import GivenSection, Line
from reportgen.case.common import problem
from reportgen.case.given import Given, Of
from reportgen.case.layout import Layout
from reportgen.case.places import Located, Placed
from reportgen.case.shaft import MaterialGiven, ShaftGiven, pieces_of
from reportgen.case.supports import BearingGiven, SealGiven

_Mass = Annotated[Given, Of("mass", at_least=0.0)]
_Inertia = Annotated[Given, Of("inertia", at_least=0.0)]


class DiscGiven(Located):
    """A rigid disc."""

    words: ClassVar[str] = "a disc"

    name: Line = Field(examples=["Impeller 1"])
    mass: _Mass = Field(examples=["38 kg"])
    polar_inertia: _Inertia = Field(examples=["0.9 kg m^2"])
    diametral_inertia: _Inertia = Field(examples=["0.5 kg m^2"])

    @model_validator(mode="after")
    def _is_a_body(self) -> Self:
        if float(self.polar_inertia) > 2 * float(self.diametral_inertia) * (1 + 1e-9):
            found = "the polar inertia exceeds twice the diametral, which no body has"
            raise problem(found, "check both values", "polar_inertia")
        return self


class AddedMass(Located):
    """A mass without moments of inertia."""

    words: ClassVar[str] = "an added mass"

    name: Line = Field(examples=["Locknut"])
    mass: _Mass = Field(examples=["2 kg"])


class CouplingGiven(Located):
    """A coupling, whole; ``share`` is what this rotor carries, half unless stated."""

    words: ClassVar[str] = "a coupling"

    name: Line = Field(examples=["Coupling"])
    mass: _Mass = Field(examples=["12 kg"])
    polar_inertia: _Inertia | None = None
    diametral_inertia: _Inertia | None = None
    share: (
        Annotated[
            Given,
            Of("percent", above=0.0, at_most=1.0, because="a share is above 0, at most 100 %"),
        ]
        | None
    ) = None


class AxialLoadGiven(GivenSection):
    """A constant axial force between two stations, tension positive."""

    words: ClassVar[str] = "an axial load"
    prefix: ClassVar[str] = "Axial load"

    from_station: int = Field(ge=1, le=10_000, examples=[1])
    to_station: int = Field(ge=1, le=10_000, examples=[12])
    force: Annotated[Given, Of("force")] = Field(examples=["-12 kN"])

    @model_validator(mode="after")
    def _in_order(self) -> Self:
        if self.to_station <= self.from_station:
            raise problem("the axial load runs to the left", "give rising stations", "to_station")
        return self


class BowPoint(Placed):
    """The shaft's residual bow at one place: offset of the resting shaft, fixed in the rotor."""

    words: ClassVar[str] = "a point of the bow"
    prefix: ClassVar[str] = "Bow"

    amount: Annotated[Given, Of("displacement", at_least=0.0)] = Field(examples=["10 µm"])
    angle: Annotated[Given, Of("angle")] | None = None


class StationRotor(GivenSection):
    """A rotor by stations."""

    words: ClassVar[str] = "the rotor"
    prefix: ClassVar[str] = "Rotor"

    materials: dict[str, MaterialGiven] = Field(min_length=1)
    shaft: ShaftGiven
    discs: tuple[DiscGiven, ...] = ()
    added_masses: tuple[AddedMass, ...] = ()
    couplings: tuple[CouplingGiven, ...] = ()
    bearings: tuple[BearingGiven, ...] = Field(min_length=1)
    seals: tuple[SealGiven, ...] = ()
    axial_loads: tuple[AxialLoadGiven, ...] = ()
    bow: tuple[BowPoint, ...] = ()
    stated_mass: Annotated[Given, Of("mass", above=0.0)] | None = None

    def parts(self) -> Iterator[tuple[str, Located]]:
        """Yield the key and each part that has a place and a name."""
        for key in ("discs", "added_masses", "couplings", "bearings", "seals"):
            for part in getattr(self, key):
                yield key, part

    def names(self) -> list[str]:
        """Return the names of the parts."""
        return [str(getattr(part, "name", "")) for _, part in self.parts()]

    @model_validator(mode="after")
    def _belongs_together(self) -> Self:
        names = self.names()
        for number, name in enumerate(names):
            if name in names[:number]:
                raise problem(f"two parts are named {name!r}", "give each its own name")
        used = (
            self.shaft.table.texts["material"]
            if self.shaft.table
            else tuple(section.material for section in self.shaft.sections)
        )
        for number, material in enumerate(used, 1):
            if material not in self.materials:
                found = f"section {number} is of {material!r}, which materials does not have"
                raise problem(found, f"materials are {', '.join(self.materials)}", "shaft")
        return self

    def layout(self) -> Layout:
        """Return where the parts sit."""
        parts = {str(getattr(part, "name", "")): part for _, part in self.parts()}
        return Layout(pieces_of(self.shaft), parts)

    @model_validator(mode="after")
    def _places_exist(self) -> Self:
        layout = self.layout()
        for key, part in self.parts():
            layout.require(part, str(getattr(part, "name", key)), key)
        for number, point in enumerate(self.bow, 1):
            layout.require(point, f"point {number} of the bow", "bow")
        for load in self.axial_loads:
            if load.to_station > len(layout.ends):
                found = f"an axial load ends at station {load.to_station}, which does not exist"
                remedy = f"the shaft has stations 1 to {len(layout.ends)}"
                raise problem(found, remedy, "axial_loads")
        return self
