"""The case of the one-mass rotor, template ``one-mass-whirl``."""

from __future__ import annotations

import math
from typing import Annotated, ClassVar, Literal, Self

from pydantic import Field, model_validator

from reportgen.case.base import GivenSection, Line
from reportgen.case.case import Case
from reportgen.case.common import Assumption, Speeds, exactly_one, problem
from reportgen.case.criteria import OneMassCriterion
from reportgen.case.given import Given, Of
from reportgen.case.ramps import require_ramp
from reportgen.case.unique import require_unique

Mass = Annotated[Given, Of("mass", above=0.0)]
Stiffness = Annotated[Given, Of("stiffness", above=0.0)]
Damping = Annotated[Given, Of("damping", at_least=0.0)]
Length = Annotated[Given, Of("length", above=0.0)]
Diameter = Annotated[Given, Of("diameter", above=0.0)]

_NEEDS = {
    "simply supported": ("span", "position"),
    "built in at both ends": ("span", "position"),
    "built in at one end": ("position",),
    "overhung beyond two bearings": ("span", "overhang"),
}


class Shaft(GivenSection):
    """The shaft's dimensions, from which its stiffness at the mass follows."""

    words: ClassVar[str] = "the shaft"
    prefix: ClassVar[str] = "Shaft"

    support: Literal[
        "simply supported",
        "built in at both ends",
        "built in at one end",
        "overhung beyond two bearings",
    ] = Field(examples=["simply supported"])
    span: Length | None = None
    position: Annotated[Given, Of("position", above=0.0)] | None = Field(
        None, title="position of the mass from one support"
    )
    overhang: Length | None = None
    outer_diameter: Diameter = Field(examples=["60 mm"])
    inner_diameter: Annotated[Given, Of("diameter", at_least=0.0)] | None = None
    modulus: Annotated[Given, Of("modulus", above=0.0)] = Field(
        title="shaft modulus of elasticity", examples=["205 GPa"]
    )

    @model_validator(mode="after")
    def _fits_its_support(self) -> Self:
        needed = _NEEDS[self.support]
        for name in ("span", "position", "overhang"):
            stated = getattr(self, name) is not None
            if stated and name not in needed:
                found = f"a shaft {self.support} has no {name}"
                raise problem(found, f"give {' and '.join(needed)}", name)
            if not stated and name in needed:
                found = f"the {name} is missing for a shaft {self.support}"
                raise problem(found, f"add {name}:, such as {name}: 450 mm")
        inside = self.span is not None and self.position is not None
        if inside and float(self.position or 0) >= float(self.span or 0):
            found = "the mass does not lie between the supports"
            raise problem(found, "the position is measured from one support, less than the span",
                          "position")  # fmt: skip
        bore = float(self.inner_diameter or 0)
        if bore >= float(self.outer_diameter):
            found = "the inner diameter is not below the outer diameter"
            raise problem(found, "give the bore, or leave it out for a solid shaft",
                          "inner_diameter")  # fmt: skip
        return self


class DampingGiven(GivenSection):
    """External damping, in whichever way it is known."""

    words: ClassVar[str] = "the damping"
    prefix: ClassVar[str] = "Damping"

    ratio: (
        Annotated[
            Given,
            Of(
                "ratio",
                at_least=0.0,
                below=1.0,
                because="the method covers damping ratios from 0 to below 1, where a rotor whirls",
            ),
        ]
        | None
    ) = None
    logarithmic_decrement: Annotated[Given, Of("ratio", at_least=0.0)] | None = Field(
        None, title="logarithmic decrement"
    )
    amplification_factor: (
        Annotated[
            Given,
            Of(
                "ratio",
                above=0.5,
                because="0.5 is that of critical damping; the method covers less damping",
            ),
        ]
        | None
    ) = Field(None, title="amplification factor")
    coefficient: Damping | None = None

    @model_validator(mode="after")
    def _one(self) -> Self:
        exactly_one(self, "ratio", "logarithmic_decrement", "amplification_factor", "coefficient")
        return self


class Bow(GivenSection):
    """Residual bow of the shaft; its angle counts from the unbalance, in the sense of rotation."""

    words: ClassVar[str] = "the bow"
    prefix: ClassVar[str] = "Bow"

    amount: Annotated[Given, Of("displacement", at_least=0.0)] = Field(examples=["10 µm"])
    angle: Annotated[Given, Of("angle")] | None = None


class Support(GivenSection):
    """Flexible supports, the same in all directions; both together."""

    words: ClassVar[str] = "the supports"
    prefix: ClassVar[str] = "Support"

    stiffness: Stiffness = Field(examples=["2.5e7 N/m"])
    damping: Damping | None = None
    mass: Annotated[Given, Of("mass", at_least=0.0)] | None = None


class OneMassRotorGiven(GivenSection):
    """The rotor: one mass on a shaft."""

    words: ClassVar[str] = "the rotor"
    prefix: ClassVar[str] = "Rotor"

    mass: Mass = Field(examples=["62 kg"])
    stiffness: Stiffness | None = None
    shaft: Shaft | None = None
    damping: DampingGiven
    internal_damping: Damping | None = None
    bow: Bow | None = None
    support: Support | None = None

    @model_validator(mode="after")
    def _whirls(self) -> Self:
        exactly_one(self, "stiffness", "shaft")
        c, k = self.damping.coefficient, self.stiffness
        if c is not None and k is not None:
            critical = 2 * math.sqrt(float(k) * float(self.mass))
            if float(c) >= critical:
                found = (
                    f"the damping coefficient makes a damping ratio of {float(c) / critical:.3g}"
                )
                raise problem(found, "the method covers ratios from 0 to below 1", "damping")
        return self


class Unbalance(GivenSection):
    """Unbalance of the rotor, in whichever way it is stated."""

    words: ClassVar[str] = "the unbalance"

    grade: Annotated[Given, Of("grade", above=0.0)] | None = Field(
        None, title="balance quality grade"
    )
    eccentricity: Annotated[Given, Of("eccentricity", at_least=0.0)] | None = Field(
        None, title="mass eccentricity"
    )
    amount: Annotated[Given, Of("unbalance", at_least=0.0)] | None = Field(None, title="unbalance")

    @model_validator(mode="after")
    def _one(self) -> Self:
        exactly_one(self, "grade", "eccentricity", "amount")
        return self


_PassageSpeed = Annotated[Given, Of("speed", at_least=0.0)]


class PassageGiven(GivenSection):
    """A run from one speed to another at constant angular acceleration."""

    words: ClassVar[str] = "a passage"

    name: Line = Field(examples=["Start-up"])
    from_: _PassageSpeed = Field(title="from speed", examples=["0 rpm"])
    to: _PassageSpeed = Field(title="to speed", examples=["1480 rpm"])
    acceleration: Annotated[Given, Of("acceleration_speed")] = Field(examples=["25 rpm/s"])
    clearance: Annotated[Given, Of("clearance", above=0.0)] | None = None
    runout: Annotated[Given, Of("displacement", at_least=0.0)] | None = None

    @model_validator(mode="after")
    def _gets_there(self) -> Self:
        require_ramp(self.from_, self.to, self.acceleration)
        return self


class OneMassCase(Case):
    """A case for ``one-mass-whirl``."""

    template: Literal["one-mass-whirl"]
    rotor: OneMassRotorGiven
    speeds: Speeds
    unbalance: Unbalance
    passages: tuple[PassageGiven, ...] = ()
    assumptions: tuple[Assumption, ...] = ()
    criteria: tuple[OneMassCriterion, ...] = ()

    @model_validator(mode="after")
    def _names_are_unique(self) -> Self:
        require_unique(
            passages=[p.name for p in self.passages], assumptions=[a.id for a in self.assumptions]
        )
        return self
