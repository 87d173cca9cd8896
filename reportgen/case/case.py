"""What all cases have in common: holds, givens, the resolved form."""

from __future__ import annotations

import re
from typing import Annotated, Any, ClassVar, Literal

from pydantic import BeforeValidator, Field, PrivateAttr

from reportgen.case.base import Section, walk
from reportgen.case.common import Assumption, Document, Machine
from reportgen.case.criteria import Limit
from reportgen.case.given import Given
from reportgen.case.letterhead import HouseFile
from reportgen.case.seen import Seen, SeenOf

_CRITERION = re.compile(r"criteria\[(\d+)\]")
_ASSUMED = re.compile(r"\bassum", re.IGNORECASE)


def _format(value: Any) -> Any:
    return 1 if value == "1" else value


class Case(Section):
    """A case as read; frozen.

    The subclass of each template adds what the template needs.
    """

    words: ClassVar[str] = "a case"

    reportgen: Annotated[Literal[1], BeforeValidator(_format)] = Field(examples=[1])
    template: str
    document: Document
    machine: Machine
    units: Literal["si", "us"] = Field(examples=["si"])
    house: Annotated[str, HouseFile()] | None = None
    assumptions: tuple[Assumption, ...] = ()
    see: tuple[Annotated[Seen, SeenOf()], ...] = Field(
        (), title="finished calculations to see", examples=[["CAL-0452_A"]]
    )
    _sides: dict[str, bytes] = PrivateAttr(default_factory=dict)

    def __eq__(self, other: object) -> bool:
        """Compare what is stated; the bytes of side tables are not part of it."""
        return type(self) is type(other) and self.__dict__ == other.__dict__

    __hash__ = None  # type: ignore[assignment]

    def resolved(self) -> dict[str, Any]:
        """Return the case as plain data in SI; the way back is ``reportgen.case.from_resolved``."""
        return self.model_dump(mode="json")

    def givens(self) -> list[tuple[str, str, Given, str]]:
        """Return path, title, given and quantity of every input, in the order of the document.

        Limits are not inputs: they stand with the criteria.
        """
        return [
            (path, title, given, given.quantity)
            for path, title, given in walk(self)
            if isinstance(given, Given) and not _CRITERION.match(path)
        ]

    def holds(self) -> list[dict[str, str]]:
        """Return what is open, each with id, text and kind.

        Open are preliminary givens and limits, givens without a source or with an assumed one,
        and assumptions to be confirmed.
        """
        found: list[tuple[str, str]] = []
        for path, title, given in walk(self):
            number = _CRITERION.match(path)
            stated = given.as_given if isinstance(given, Given) else given.file
            what = f"{title}{f' of criterion {number[1]}' if number else ''}, {stated}"
            source = given.source or "no source stated"
            if given.status == "preliminary":
                found.append(("preliminary", f"{what}: preliminary; {source}"))
            elif not given.source or _ASSUMED.search(source):
                found.append(("source", f"{what}: {source}"))
        for assumption in self.assumptions:
            if assumption.status == "to be confirmed":
                text = f"Assumption {assumption.id} to be confirmed: {assumption.text}"
                found.append(("assumption", text))
        found += [
            (
                "data",
                f"Calculation {one.number} revision {one.revision}, which this one refers to: "
                + ("its status is " + one.status if not one.holds else f"{one.holds} open holds"),
            )
            for one in self.see
            if one.holds or one.status != "for issue"
        ]
        return [
            {"id": f"H{number}", "text": text, "kind": kind}
            for number, (kind, text) in enumerate(found, 1)
        ]


def criteria_of(case: Case) -> tuple[Limit, ...]:
    """Return the limits that a case states."""
    stated: tuple[Limit, ...] = getattr(case, "criteria", ())
    return stated
