"""The case of the lateral review of a rotor by stations, template ``lateral-review``."""

from __future__ import annotations

from typing import Annotated, ClassVar, Literal, Self

from pydantic import Field, model_validator

from reportgen.case.base import GivenSection, Line
from reportgen.case.case import Case
from reportgen.case.common import Speeds, problem
from reportgen.case.criteria import LateralCriterion
from reportgen.case.given import Given, Of
from reportgen.case.places import Placed
from reportgen.case.stations import StationRotor
from reportgen.case.unique import require_unique


class ProbeGiven(Placed):
    """A vibration probe; its angle counts from the horizontal, with the rotation."""

    words: ClassVar[str] = "a probe"

    name: Line = Field(examples=["DE-X"])
    angle: Annotated[Given, Of("angle")] = Field(examples=["45 deg"])
    runout: Annotated[Given, Of("displacement", at_least=0.0)] | None = None


class ClearanceGiven(Placed):
    """A close radial clearance along the shaft."""

    words: ClassVar[str] = "a clearance"

    name: Line = Field(examples=["Wear ring 1"])
    clearance: Annotated[Given, Of("clearance", above=0.0)] = Field(examples=["0.3 mm"])
    runout: Annotated[Given, Of("displacement", at_least=0.0)] | None = None


class PlaneGiven(Placed):
    """Unbalance in one plane, by amount or as a share of the case's rule."""

    words: ClassVar[str] = "a plane"
    prefix: ClassVar[str] = "Plane"

    amount: Annotated[Given, Of("unbalance", at_least=0.0)] | None = None
    share: Annotated[Given, Of("percent", at_least=0.0)] | None = None
    angle: Annotated[Given, Of("angle")] | None = None


class UnbalanceCase(GivenSection):
    """A distribution of unbalance along the rotor.

    Without ``rule`` every plane states its amount. With one, planes state shares of the total
    that the rule gives, times ``factor``.
    """

    words: ClassVar[str] = "an unbalance case"

    name: Line = Field(examples=["Static, mid-span"])
    rule: Literal["balance grade", "journal load over speed"] | None = None
    grade: Annotated[Given, Of("grade", above=0.0)] | None = None
    factor: Annotated[Given, Of("ratio", above=0.0)] | None = None
    planes: tuple[PlaneGiven, ...] = Field(min_length=1)

    @model_validator(mode="after")
    def _rule_and_planes(self) -> Self:
        if (self.rule == "balance grade") != (self.grade is not None):
            found = "a grade without its rule" if self.grade else "the rule has no grade"
            raise problem(found, "give rule: balance grade and grade:, such as G2.5, together")
        wanted = "amount" if self.rule is None else "share"
        for number, plane in enumerate(self.planes, 1):
            stated = {"amount": plane.amount, "share": plane.share}
            other = "share" if wanted == "amount" else "amount"
            if stated[wanted] is None or stated[other] is not None:
                why = "no rule is named" if self.rule is None else f"the rule is {self.rule}"
                found = f"plane {number} needs the {wanted} alone, since {why}"
                raise problem(found, f"give {wanted}: and no {other}:", "planes")
        if self.rule is None and self.factor is not None:
            raise problem("a factor without a rule", "give the amounts themselves", "factor")
        return self


class Analysis(GivenSection):
    """How far the calculation looks; what is left out is chosen from the speeds."""

    words: ClassVar[str] = "the analysis"

    highest_speed: Annotated[Given, Of("speed", above=0.0)] | None = None
    modes: int | None = Field(None, ge=1, le=40)


class LateralCase(Case):
    """A case for ``lateral-review``."""

    template: Literal["lateral-review"]
    rotor: StationRotor
    speeds: Speeds
    probes: tuple[ProbeGiven, ...] = ()
    clearances: tuple[ClearanceGiven, ...] = ()
    unbalance_cases: tuple[UnbalanceCase, ...] = Field(min_length=1)
    analysis: Analysis | None = None
    criteria: tuple[LateralCriterion, ...] = ()

    @model_validator(mode="after")
    def _names(self) -> Self:
        require_unique(
            probes=[p.name for p in self.probes],
            clearances=[c.name for c in self.clearances],
            unbalance_cases=[u.name for u in self.unbalance_cases],
            assumptions=[a.id for a in self.assumptions],
        )
        return self

    @model_validator(mode="after")
    def _places_exist(self) -> Self:
        layout = self.rotor.layout()
        for key in ("probes", "clearances"):
            for number, part in enumerate(getattr(self, key), 1):
                layout.require(part, f"{key}[{number}]", key)
        for number, case in enumerate(self.unbalance_cases, 1):
            for index, plane in enumerate(case.planes, 1):
                layout.require(
                    plane, f"plane {index} of unbalance case {number}", "unbalance_cases"
                )
        names = self.rotor.names()
        for number, criterion in enumerate(self.criteria, 1):
            on = getattr(criterion, "on", None)
            if on is not None and on not in names:
                found = f"criterion {number} acts on {on!r}, which is no part of the rotor"
                raise problem(found, f"parts are {', '.join(names)}", "criteria")
        return self
