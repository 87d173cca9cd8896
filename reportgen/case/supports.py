"""Bearings, seals and pedestals: constant coefficients, or a side table against speed."""

from __future__ import annotations

from typing import Annotated, Any, ClassVar, Self

from pydantic import Field, GetJsonSchemaHandler, model_validator
from pydantic_core import CoreSchema
from pydantic_core.core_schema import ValidationInfo

from reportgen.case.base import GivenSection, Line
from reportgen.case.common import problem
from reportgen.case.given import Given, Of
from reportgen.case.nodes import MapNode, ShortNode
from reportgen.case.places import Located
from reportgen.case.reading import Reading
from reportgen.case.tables import Column, Table, TableOf

_K = Annotated[Given, Of("stiffness")]
_C = Annotated[Given, Of("damping")]
_M = Annotated[Given, Of("mass")]
_KAxis = Annotated[Given, Of("stiffness", above=0.0)]
_CAxis = Annotated[Given, Of("damping", at_least=0.0)]
_MAxis = Annotated[Given, Of("mass", at_least=0.0)]


class _Short(GivenSection):
    """A section that may be written short, as the one value that holds for ``both``."""

    @model_validator(mode="before")
    @classmethod
    def _short(cls, data: Any, info: ValidationInfo) -> Any:
        whole = isinstance(data, MapNode) and "value" not in data
        if whole or not isinstance(info.context, Reading) or not hasattr(data, "mark"):
            return data
        node = ShortNode(data.path, data.mark)
        node["both"] = data
        node.key_marks["both"] = data.mark
        return node

    @classmethod
    def __get_pydantic_json_schema__(
        cls, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        reference = handler(schema)
        whole = handler.resolve_ref_schema(reference)
        if "properties" in whole:
            written_out = dict(whole)
            whole.clear()
            whole["anyOf"] = [written_out["properties"]["both"], written_out]
        return reference


class _Matrix(_Short):
    """Two by two in (x, y), x horizontal and y vertical up; ``both`` is alike in x and y."""

    words: ClassVar[str] = "coefficients"

    def matrix(self) -> tuple[tuple[float, float], tuple[float, float]]:
        """Return the coefficients in SI, rows x and y."""
        both = getattr(self, "both", None)
        if both is not None:
            return (float(both), 0.0), (0.0, float(both))
        xx, xy, yx, yy = (float(getattr(self, n) or 0.0) for n in ("xx", "xy", "yx", "yy"))
        return (xx, xy), (yx, yy)

    @model_validator(mode="after")
    def _is_whole(self) -> Self:
        direct = [getattr(self, n) is not None for n in ("xx", "yy")]
        cross = [getattr(self, n) is not None for n in ("xy", "yx")]
        if (getattr(self, "both", None) is not None) == any(direct) or any(direct) != all(direct):
            raise problem("the coefficients are not whole", "give one value, or xx: and yy:")
        if any(cross) != all(cross) or (any(cross) and not any(direct)):
            raise problem("a cross term stands alone", "give xx:, xy:, yx: and yy:")
        return self


class StiffnessGiven(_Matrix):
    """Stiffness coefficients."""

    prefix: ClassVar[str] = "Stiffness"

    both: _K | None = None
    xx: _K | None = None
    xy: _K | None = None
    yx: _K | None = None
    yy: _K | None = None


class DampingMatrix(_Matrix):
    """Damping coefficients."""

    prefix: ClassVar[str] = "Damping"

    both: _C | None = None
    xx: _C | None = None
    xy: _C | None = None
    yx: _C | None = None
    yy: _C | None = None


class InertiaGiven(_Matrix):
    """Added-mass coefficients, of seals above all."""

    prefix: ClassVar[str] = "Inertia"

    both: _M | None = None
    xx: _M | None = None
    xy: _M | None = None
    yx: _M | None = None
    yy: _M | None = None


class _Axes(_Short):
    words: ClassVar[str] = "values"

    def axes(self) -> tuple[float, float]:
        """Return the values for x and y in SI."""
        both = getattr(self, "both", None)
        x, y = (both, both) if both is not None else (getattr(self, "x"), getattr(self, "y"))  # noqa: B009
        return float(x), float(y)

    @model_validator(mode="after")
    def _is_whole(self) -> Self:
        axes = [getattr(self, n) is not None for n in ("x", "y")]
        if (getattr(self, "both", None) is not None) == any(axes) or any(axes) != all(axes):
            raise problem("the values are not whole", "give one value, or x: and y:")
        return self


class PedestalStiffness(_Axes):
    """Stiffness of a pedestal."""

    prefix: ClassVar[str] = "Pedestal stiffness"

    both: _KAxis | None = None
    x: _KAxis | None = None
    y: _KAxis | None = None


class PedestalDamping(_Axes):
    """Damping of a pedestal."""

    prefix: ClassVar[str] = "Pedestal damping"

    both: _CAxis | None = None
    x: _CAxis | None = None
    y: _CAxis | None = None


class PedestalMass(_Axes):
    """Mass of a pedestal that takes part in the motion."""

    prefix: ClassVar[str] = "Pedestal mass"

    both: _MAxis | None = None
    x: _MAxis | None = None
    y: _MAxis | None = None


class PedestalGiven(GivenSection):
    """A pedestal between a bearing and the ground."""

    words: ClassVar[str] = "a pedestal"

    mass: PedestalMass
    stiffness: PedestalStiffness
    damping: PedestalDamping | None = None


SUPPORT_TABLE = TableOf(
    (
        Column("speed", "speed", at_least=0.0),
        *(
            Column(f"{letter}{ends}", quantity, required=letter != "m" and ends[0] == ends[1])
            for letter, quantity in (("k", "stiffness"), ("c", "damping"), ("m", "mass"))
            for ends in ("xx", "xy", "yx", "yy")
        ),
    ),
    rising="speed",
    least_rows=2,
)
"""Columns speed, kxx, kxy, kyx, kyy, cxx … and, where there is inertia, mxx …"""


class SealGiven(Located):
    """A seal or the like: coefficients that carry no weight."""

    words: ClassVar[str] = "a seal"

    name: Line = Field(examples=["Balance piston"])
    stiffness: StiffnessGiven | None = None
    damping: DampingMatrix | None = None
    inertia: InertiaGiven | None = None
    table: Annotated[Table, SUPPORT_TABLE] | None = None

    @model_validator(mode="after")
    def _either(self) -> Self:
        constants = [self.stiffness, self.damping, self.inertia]
        if self.table is not None and any(constants):
            raise problem(
                "a table and constant coefficients are given together", "give one of them"
            )
        if self.table is None and self.stiffness is None:
            remedy = "add stiffness:, or table: with a CSV file against speed"
            raise problem("no stiffness is given", remedy)
        if self.table is not None:
            for letter in "kcm":
                pair = [f"{letter}{ends}" in self.table.columns for ends in ("xy", "yx")]
                direct = [f"{letter}{ends}" in self.table.columns for ends in ("xx", "yy")]
                if any(pair) != all(pair) or any(direct) != all(direct):
                    found = f"the table has not all of the {letter} columns"
                    raise problem(
                        found, f"give {letter}xx and {letter}yy, the cross terms in pairs"
                    )
        return self


class BearingGiven(SealGiven):
    """A bearing that carries weight, on a pedestal where one is given."""

    words: ClassVar[str] = "a bearing"

    name: Line = Field(examples=["Drive-end bearing"])
    pedestal: PedestalGiven | None = None

    @model_validator(mode="after")
    def _carries(self) -> Self:
        if self.stiffness is not None:
            (xx, _), (_, yy) = self.stiffness.matrix()
            if xx <= 0 or yy <= 0:
                found = "a direct stiffness of a bearing is not above zero"
                raise problem(found, "give what carries the weight", "stiffness")
        return self
