"""The shaft as drawn: materials, sections, or a side table of sections."""

from __future__ import annotations

from typing import Annotated, ClassVar, Self

from pydantic import Field, model_validator

from reportgen.case.base import GivenSection, Line
from reportgen.case.common import problem
from reportgen.case.given import Given, Of
from reportgen.case.layout import Piece
from reportgen.case.places import Position
from reportgen.case.tables import Column, Table, TableOf

_Length = Annotated[Given, Of("length", above=0.0)]
_Outer = Annotated[Given, Of("diameter", above=0.0)]
_Inner = Annotated[Given, Of("diameter", at_least=0.0)]


class MaterialGiven(GivenSection):
    """A shaft material; internal damping is a time, damping stress over stress rate."""

    words: ClassVar[str] = "a material"
    prefix: ClassVar[str] = "Material"

    density: Annotated[Given, Of("density", above=0.0)] = Field(examples=["7850 kg/m^3"])
    modulus: Annotated[Given, Of("modulus", above=0.0)] = Field(examples=["205 GPa"])
    poisson: (
        Annotated[
            Given,
            Of("ratio", at_least=0.0, below=0.5, because="Poisson's ratio lies from 0 to 0.5"),
        ]
        | None
    ) = None
    shear_modulus: Annotated[Given, Of("modulus", above=0.0)] | None = None
    internal_damping: Annotated[Given, Of("time", at_least=0.0)] | None = None

    @model_validator(mode="after")
    def _shear_is_known(self) -> Self:
        if self.poisson is None and self.shear_modulus is None:
            found = "neither poisson nor shear modulus is given"
            raise problem(found, "add poisson:, such as poisson: 0.29")
        return self


class SectionGiven(GivenSection):
    """One length of shaft, cylindrical or conical, solid or hollow.

    ``right`` diameters differ from the left ones for a cone; mass diameters count for mass
    where a sleeve adds mass but no stiffness.
    """

    words: ClassVar[str] = "a shaft section"
    prefix: ClassVar[str] = "Section"

    length: _Length = Field(examples=["120 mm"])
    outer_diameter: _Outer = Field(examples=["80 mm"])
    inner_diameter: _Inner | None = None
    outer_diameter_right: _Outer | None = None
    inner_diameter_right: _Inner | None = None
    mass_diameter: _Outer | None = None
    mass_diameter_right: _Outer | None = None
    material: Line = Field(examples=["steel"])
    position: Position | None = None
    elements: int | None = Field(None, ge=1, le=200)

    @model_validator(mode="after")
    def _bore_inside(self) -> Self:
        left, right = (
            float(self.outer_diameter),
            float(self.outer_diameter_right or self.outer_diameter),
        )
        bore = float(self.inner_diameter or 0.0)
        bore_right = bore if self.inner_diameter_right is None else float(self.inner_diameter_right)
        if bore >= left or bore_right >= right:
            end = "inner_diameter" if bore >= left else "inner_diameter_right"
            raise problem("the bore is not below the outer diameter", "check both diameters", end)
        mass = None if self.mass_diameter is None else float(self.mass_diameter)
        mass_right = mass if self.mass_diameter_right is None else float(self.mass_diameter_right)
        if mass is None and mass_right is not None:
            raise problem("the left mass diameter is missing", "add mass diameter:")
        if (
            mass is not None
            and mass_right is not None
            and (mass <= bore or mass_right <= bore_right)
        ):
            raise problem("the mass diameter is not above the bore", "check both", "mass_diameter")
        return self


SHAFT_TABLE = TableOf(
    (
        Column("length", "length", above=0.0),
        Column("outer diameter", "diameter", above=0.0),
        Column("inner diameter", "diameter", required=False, at_least=0.0),
        Column("outer diameter right", "diameter", required=False, above=0.0),
        Column("inner diameter right", "diameter", required=False, at_least=0.0),
        Column("mass diameter", "diameter", required=False, above=0.0),
        Column("mass diameter right", "diameter", required=False, above=0.0),
        Column("position", "position", required=False, at_least=0.0),
        Column("elements", "count", required=False, above=0.0),
        Column("material", ""),
    )
)


class ShaftGiven(GivenSection):
    """The shaft from left to right, in sections or in a side table."""

    words: ClassVar[str] = "the shaft"
    prefix: ClassVar[str] = "Shaft"

    sections: tuple[SectionGiven, ...] = ()
    table: Annotated[Table, SHAFT_TABLE] | None = None

    @model_validator(mode="after")
    def _either(self) -> Self:
        if bool(self.sections) == (self.table is not None):
            found = (
                "sections and table are given together"
                if self.sections
                else ("neither sections nor table is given")
            )
            raise problem(found, "give the shaft as sections: or as table:, a CSV file")
        return self

    @model_validator(mode="after")
    def _rows_are_bodies(self) -> Self:
        for number, piece in enumerate(pieces_of(self) if self.table else (), 1):
            solid = piece.mass_outer or piece.outer
            ends = zip(piece.inner, piece.outer, solid, strict=True)
            if any(bore >= min(outer, mass) for bore, outer, mass in ends):
                found = f"section {number} of the table: the bore is not below the outer diameters"
                raise problem(found, "check its diameters", "table")
        return self


def pieces_of(given: ShaftGiven) -> list[Piece]:
    """Return the lengths of shaft of a case in SI, from its sections or its side table."""
    if given.table is None:
        return [
            Piece(
                float(s.length),
                (float(s.outer_diameter), float(s.outer_diameter_right or s.outer_diameter)),
                _ends(s.inner_diameter, s.inner_diameter_right) or (0.0, 0.0),
                _ends(s.mass_diameter, s.mass_diameter_right),
                s.material,
                None if s.position is None else float(s.position),
                s.elements,
            )
            for s in given.sections
        ]
    table = given.table

    def cell(name: str, row: int) -> float | None:
        return table.columns[name][row] if name in table.columns else None

    pieces = []
    for row in range(len(table)):
        outer = cell("outer diameter", row) or 0.0
        elements = cell("elements", row)
        pieces.append(
            Piece(
                cell("length", row) or 0.0,
                (outer, cell("outer diameter right", row) or outer),
                _ends(cell("inner diameter", row), cell("inner diameter right", row)) or (0.0, 0.0),
                _ends(cell("mass diameter", row), cell("mass diameter right", row)),
                table.texts["material"][row],
                cell("position", row),
                None if elements is None else int(elements),
            )
        )
    return pieces


def _ends(left: Given | float | None, right: Given | float | None) -> tuple[float, float] | None:
    if left is None and right is None:
        return None
    first = 0.0 if left is None else float(left)
    return first, first if right is None else float(right)
