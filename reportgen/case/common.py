"""What every case states: the document, the machine, its speeds, assumptions."""

from __future__ import annotations

import datetime
import re
from itertools import pairwise
from typing import Annotated, ClassVar, Literal, Self

from pydantic import AfterValidator, Field, StringConstraints, model_validator
from pydantic_core import PydanticCustomError

from reportgen.case.base import GivenSection, Line, Prose, Section
from reportgen.case.given import Given, Of
from reportgen.case.reading import CHECK


def problem(message: str, remedy: str, key: str = "") -> PydanticCustomError:
    """Return the error of a check across fields; ``key`` names the field it stands at."""
    context = {"message": message, "remedy": remedy, "key": key}
    return PydanticCustomError(CHECK, "{message}", context)


def exactly_one(section: Section, *names: str) -> str:
    """Return the one of these fields that is given; refuse none and several."""
    found = [n for n in names if getattr(section, n) is not None]
    keys = [n.rstrip("_").replace("_", " ") for n in names]
    if len(found) != 1:
        several = " and ".join(n.replace("_", " ") for n in found)
        message = (
            f"{several} are given together" if found else f"none of {', '.join(keys)} is given"
        )
        raise problem(message, f"give exactly one of {', '.join(keys)}")
    return found[0]


def _date(text: str) -> str:
    try:
        day = datetime.date.fromisoformat(text)
    except ValueError:
        day = None
    if day is None or text != day.isoformat() or not 1900 <= day.year <= 2200:
        raise problem(f"{text!r} is not a date", "write year-month-day, as in 2026-03-02")
    return text


def _folder_name(text: str) -> str:
    if not re.fullmatch(_FOLDER_NAME, text) or text.endswith("."):
        raise problem(
            f"{text!r} cannot name a folder",
            "use letters, digits, hyphens, points and underscores, a letter or digit first",
        )
    return text


_FOLDER_NAME = "[A-Za-z0-9][A-Za-z0-9._-]*"
_AS_FOLDER = Field(json_schema_extra={"pattern": f"^{_FOLDER_NAME}$"})
# number and revision together name the package's folder
Number = Annotated[Line, StringConstraints(max_length=60), AfterValidator(_folder_name), _AS_FOLDER]
Revision = Annotated[
    Line, StringConstraints(max_length=12), AfterValidator(_folder_name), _AS_FOLDER
]
Day = Annotated[
    Line, AfterValidator(_date), Field(json_schema_extra={"format": "date", "maxLength": 10})
]


class Person(Section):
    """Who prepared, checked or approved."""

    words: ClassVar[str] = "a person"

    name: Line
    role: Line | None = None


class HistoryEntry(Section):
    """One earlier issue of the document."""

    words: ClassVar[str] = "an entry of the history"

    revision: Revision
    date: Day
    text: Line = Field(examples=["First issue"])
    by: Line | None = None


class Document(Section):
    """Document control."""

    words: ClassVar[str] = "the document control"

    number: Number = Field(examples=["CAL-0417"])
    title: Line
    revision: Revision = Field(examples=["A"])
    status: Literal["draft", "for review", "for issue"] = Field(examples=["draft"])
    date: Day = Field(examples=["2026-03-02"])
    project: Line | None = None
    client_reference: Line | None = None
    history: tuple[HistoryEntry, ...] = ()
    prepared: Person
    checked: Person | None = None
    approved: Person | None = None

    @model_validator(mode="after")
    def _history_in_order(self) -> Self:
        dates = [entry.date for entry in self.history]
        revisions = [entry.revision for entry in self.history]
        if dates != sorted(dates):
            raise problem("the history is not in the order of its dates", "sort it", "history")
        if len(set(revisions)) != len(revisions):
            raise problem("the history names a revision twice", "keep one entry", "history")
        if dates and dates[-1] > self.date:
            found = f"the history goes to {dates[-1]}, after the document's date {self.date}"
            raise problem(found, "give the date of this revision", "date")
        if self.revision in revisions[:-1]:
            found = f"revision {self.revision} stands in the history before a later one"
            raise problem(found, "give this revision a new letter or number", "revision")
        return self


class Machine(Section):
    """The machine that the calculation is for."""

    words: ClassVar[str] = "the machine"

    name: Line
    tag: Line | None = None
    service: Line | None = None
    orientation: Literal["horizontal", "vertical"] = Field(examples=["horizontal"])


_Speed = Annotated[Given, Of("speed", above=0.0)]


class Speeds(GivenSection):
    """The speeds that the machine runs at."""

    words: ClassVar[str] = "the speeds"
    suffix: ClassVar[str] = "speed"

    minimum: _Speed | None = None
    rated: _Speed = Field(examples=["1480 rpm"])
    maximum_continuous: _Speed | None = None
    trip: _Speed | None = None

    def stated(self) -> dict[str, float]:
        """Return the speeds that the case states in rad/s, lowest first, by their names."""
        found = {
            "minimum": self.minimum,
            "rated": self.rated,
            "maximum continuous": self.maximum_continuous,
            "trip": self.trip,
        }
        return {name: float(given) for name, given in found.items() if given is not None}

    @model_validator(mode="after")
    def _in_order(self) -> Self:
        stated = list(self.stated().items())
        for (low, slower), (high, faster) in pairwise(stated):
            if faster < slower or (high == "trip" and faster == slower):
                found = (
                    f"the {high} speed is {'not above' if high == 'trip' else 'below'} the {low}"
                )
                order = "minimum ≤ rated ≤ maximum continuous < trip"
                raise problem(found, f"the order is {order}", high)
        return self


class Assumption(Section):
    """Something taken as so."""

    words: ClassVar[str] = "an assumption"

    id: Line = Field(examples=["A1"])
    text: Prose
    basis: Prose | None = None
    status: Literal["confirmed", "to be confirmed"] = Field(examples=["to be confirmed"])
