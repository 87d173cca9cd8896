"""The case of a comparison of two revisions, template ``revision-comparison``."""

from __future__ import annotations

from typing import Annotated, ClassVar, Literal, Self

from pydantic import Field, model_validator

from reportgen.case.base import Line, Section
from reportgen.case.case import Case
from reportgen.case.common import problem
from reportgen.case.given import Given
from reportgen.case.inner import Archived, ArchivedOf, CaseFile, CaseOf


class Compared(Section):
    """One of the two revisions; what comes from a package is checked against its results."""

    words: ClassVar[str] = "a revision"

    case: Annotated[CaseFile, CaseOf()] = Field(examples=["old/fan.yaml"])
    results: Annotated[Archived, ArchivedOf()] | None = None
    package: Line | None = None
    digest: Line | None = Field(None, title="SHA-512 of the package's tag manifest")


class ComparisonCase(Case):
    """A case for ``revision-comparison``."""

    template: Literal["revision-comparison"]
    old: Compared
    new: Compared

    @model_validator(mode="after")
    def _of_one_kind(self) -> Self:
        old, new = self.old.case.case, self.new.case.case
        if old.template != new.template:
            found = f"the old case is of {old.template}, the new of {new.template}"
            raise problem(found, "compare two cases of one template", "new")
        return self

    def givens(self) -> list[tuple[str, str, Given, str]]:
        """Return the givens of the new revision."""
        return self.new.case.case.givens()

    def holds(self) -> list[dict[str, str]]:
        """Return what is open in the new revision, and in the comparison itself."""
        inner = self.new.case.case.holds()
        own = super().holds()
        texts = [(h["kind"], h["text"]) for h in (*inner, *own)]
        return [
            {"id": f"H{number}", "text": text, "kind": kind}
            for number, (kind, text) in enumerate(texts, 1)
        ]
