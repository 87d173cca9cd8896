"""The limits that a case asks to be judged against, each with its source."""

from __future__ import annotations

from typing import Annotated, ClassVar, Literal, Self

from pydantic import Field, model_validator

from reportgen.case.base import GivenSection, Line
from reportgen.case.common import exactly_one, problem
from reportgen.case.given import Given, Of
from reportgen.errors import ModelError
from reportgen.units import QUANTITIES, UnitError, parse_quantity

Measure = Literal["0-peak", "peak-to-peak", "r.m.s."]
Margin = Annotated[
    Given,
    Of("percent", above=0.0, below=1.0, because="a margin lies between 0 and 100 %"),
]
Share = Annotated[
    Given,
    Of("percent", above=0.0, at_most=1.0, because="a share is above 0 and at most 100 %"),
]


class Limit(GivenSection):
    """What all criteria have: where the limit is from."""

    words: ClassVar[str] = "a criterion"

    source: Line = Field(examples=["purchase specification"])
    clause: Line | None = None


class SeparationMargin(Limit):
    """Distance of critical speeds from the operating range."""

    kind: Literal["separation margin"]
    rule: Literal["flat", "amplification factor"]
    margin: Margin | None = None

    @model_validator(mode="after")
    def _margin_of_the_rule(self) -> Self:
        if self.rule == "flat" and self.margin is None:
            raise problem("the flat rule has no margin", "add margin:, such as margin: 20 %")
        if self.rule == "amplification factor" and self.margin is not None:
            found = "the rule by amplification factor sets its own margin"
            raise problem(found, "leave margin: out, or take rule: flat", "margin")
        return self


class AmplitudeAtSpeed(Limit):
    """Whirl amplitude at running speed."""

    kind: Literal["amplitude at speed"]
    limit: Annotated[Given, Of("displacement", above=0.0)] = Field(examples=["60 µm"])
    measure: Measure = Field(examples=["peak-to-peak"])
    at: Literal["rated", "operating range"] = Field(examples=["rated"])


class PassageClearance(Limit):
    """Share of the smallest clearance that a passage may use."""

    kind: Literal["passage clearance"]
    share: Share = Field(examples=["75 %"])


class BalanceGrade(Limit):
    """Residual unbalance by balance quality grade."""

    kind: Literal["balance grade"]
    grade: Annotated[Given, Of("grade", above=0.0)] = Field(examples=["G2.5"])


class Stability(Limit):
    """Distance of the onset of instability above the highest speed."""

    kind: Literal["stability"]
    margin: Annotated[Given, Of("percent", at_least=0.0)] | None = None


class ProjectLimit(Limit):
    """A project's own limit on any result of the calculation, by the result's id."""

    kind: Literal["project limit"]
    result: Line = Field(examples=["ground-force"])
    limit: Line = Field(examples=["3 kN"])
    sense: Literal["at most", "at least"] = Field(examples=["at most"])
    measure: Measure | None = None

    def limit_si(self, quantity: str) -> float:
        """Return the limit in SI, read as the quantity of the result.

        Raises
        ------
        ModelError
            If the limit is not of that quantity.
        """
        try:
            return parse_quantity(self.limit, quantity).si
        except UnitError as error:
            raise ModelError(f"the project limit on {self.result}: {error}") from None

    @model_validator(mode="after")
    def _is_a_quantity(self) -> Self:
        reasons: list[UnitError] = []
        for quantity in QUANTITIES:
            try:
                parse_quantity(self.limit, quantity)
            except UnitError as error:
                reasons.append(error)
            else:
                return self
        found, remedy = reasons[0].found, "write a number and a unit, such as 3 kN"
        raise problem(found, remedy, "limit")


class Clearance(Limit):
    """Share of the local clearance that whirl, sag and runout may use together."""

    kind: Literal["clearance"]
    share: Share = Field(examples=["75 %"])
    over: Literal["rated", "operating range", "up to trip"] = Field(examples=["operating range"])


class LogarithmicDecrement(Limit):
    """Least logarithmic decrement of any forward mode, with added cross-coupling where stated."""

    kind: Literal["logarithmic decrement"]
    minimum: Annotated[Given, Of("ratio", at_least=0.0)] = Field(examples=["0.1"])
    cross_coupling: Annotated[Given, Of("stiffness", at_least=0.0)] | None = None
    on: Line | None = None

    @model_validator(mode="after")
    def _has_its_place(self) -> Self:
        if (self.cross_coupling is None) != (self.on is None):
            found = "cross coupling and the part that it acts on stand apart"
            raise problem(found, "give both cross coupling: and on:, or neither")
        return self


class BearingLoad(Limit):
    """Rotating force of each bearing as a share of its static load, or with it as a force."""

    kind: Literal["bearing load"]
    share: Annotated[Given, Of("percent", above=0.0)] | None = None
    limit: Annotated[Given, Of("force", above=0.0)] | None = None

    @model_validator(mode="after")
    def _one(self) -> Self:
        exactly_one(self, "share", "limit")
        return self


class ShaftStress(Limit):
    """Bending stress of the shaft by whirl and sag."""

    kind: Literal["shaft stress"]
    limit: Annotated[Given, Of("stress", above=0.0)] = Field(examples=["60 MPa"])
    concentration: Annotated[Given, Of("ratio", at_least=1.0)] | None = None


class TimeAboveLimit(Limit):
    """Longest time of a passage above the case's limit of amplitude."""

    kind: Literal["time above limit"]
    limit: Annotated[Given, Of("time", at_least=0.0)] = Field(examples=["2 s"])


class DriveMargin(Limit):
    """Drive torque above the least that passes the critical speed."""

    kind: Literal["drive margin"]
    margin: Annotated[Given, Of("percent", at_least=0.0)] = Field(examples=["20 %"])


OneMassCriterion = Annotated[
    SeparationMargin
    | AmplitudeAtSpeed
    | PassageClearance
    | BalanceGrade
    | Stability
    | ProjectLimit,
    Field(discriminator="kind"),
]

LateralCriterion = Annotated[
    SeparationMargin
    | AmplitudeAtSpeed
    | Clearance
    | LogarithmicDecrement
    | BearingLoad
    | ShaftStress
    | BalanceGrade
    | ProjectLimit,
    Field(discriminator="kind"),
]

PassageCriterion = Annotated[
    SeparationMargin
    | AmplitudeAtSpeed
    | PassageClearance
    | TimeAboveLimit
    | DriveMargin
    | BalanceGrade
    | ProjectLimit,
    Field(discriminator="kind"),
]
