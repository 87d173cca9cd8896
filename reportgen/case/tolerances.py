"""The case of a tolerance study, template ``tolerance-study``."""

from __future__ import annotations

from typing import Annotated, Any, ClassVar, Literal, Self

from pydantic import Field, model_validator

from reportgen.case.base import Line, Section
from reportgen.case.case import Case, criteria_of
from reportgen.case.common import problem
from reportgen.case.criteria import Limit, Share
from reportgen.case.given import Given
from reportgen.case.inner import CaseFile, CaseOf

_LEAST, _MOST = 16, 1 << 18


class Sampling(Section):
    """How rotors are drawn from the tolerances of the case that is studied."""

    words: ClassVar[str] = "the sampling"

    method: Literal["sobol", "latin hypercube", "random"] = Field(examples=["sobol"])
    samples: int = Field(ge=_LEAST, le=_MOST, examples=[1024])
    seed: int = Field(ge=0, le=2**32 - 1, examples=[20260316])
    confidence: Literal["90 %", "95 %", "99 %"] = "95 %"
    interval: Literal["clopper-pearson", "wilson"] = "clopper-pearson"

    @model_validator(mode="after")
    def _is_a_power_of_two(self) -> Self:
        count = self.samples
        if count & (count - 1):
            near = 1 << (count.bit_length() - 1)
            found = f"{count} samples is no power of two, which the sensitivities need"
            raise problem(found, f"give {near} or {2 * near}", "samples")
        return self


class FailingShare(Limit):
    """Largest share of rotors that may not meet a criterion of the case that is studied."""

    kind: Literal["failing share"]
    limit: Share = Field(examples=["5 %"])
    of: Line | None = None


class StudyCase(Case):
    """A case for ``tolerance-study``."""

    template: Literal["tolerance-study"]
    of: Annotated[CaseFile, CaseOf()] = Field(examples=["fan.yaml"])
    sampling: Sampling
    criteria: tuple[FailingShare, ...] = ()

    @model_validator(mode="after")
    def _has_something_to_vary_and_to_judge(self) -> Self:
        inner: Any = self.of.case
        if not any(given.half_width for _, _, given, _ in inner.givens()):
            found = f"no given of {self.of.file} has a tolerance"
            raise problem(found, "add tolerance: to those that vary", "of")
        if not criteria_of(inner):
            found = f"{self.of.file} states no criterion, so that no rotor can fail"
            raise problem(found, "add criteria: to it", "of")
        return self

    def givens(self) -> list[tuple[str, str, Given, str]]:
        """Return the givens of the case that is studied."""
        return self.of.case.givens()

    def holds(self) -> list[dict[str, str]]:
        """Return what is open in the case that is studied, and in the study itself."""
        texts = [(h["kind"], h["text"]) for h in (*self.of.case.holds(), *super().holds())]
        return [
            {"id": f"H{number}", "text": text, "kind": kind}
            for number, (kind, text) in enumerate(texts, 1)
        ]
