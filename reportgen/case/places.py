"""Places on the shaft."""

from __future__ import annotations

from typing import Annotated, ClassVar, Self

from pydantic import Field, model_validator

from reportgen.case.base import GivenSection, Line
from reportgen.case.common import problem
from reportgen.case.given import Given, Of

Position = Annotated[Given, Of("position", at_least=0.0)]


class Located(GivenSection):
    """Something at a place of the shaft: a station counted from 1, or a position from the left.

    Station 1 is the left end of the first section, station 2 the end of it, and so on.
    """

    needs_place: ClassVar[bool] = True

    station: int | None = Field(None, ge=1, le=10_000)
    position: Position | None = None

    @model_validator(mode="after")
    def _one_place(self) -> Self:
        named = hasattr(self, "on")
        places = [self.station, self.position, getattr(self, "on", None)]
        count = sum(place is not None for place in places)
        if count > 1 or (count == 0 and self.needs_place):
            keys = "station, position" + (", on" if named else "")
            found = "more than one place is given" if count else "no place is given"
            raise problem(found, f"give exactly one of {keys}")
        return self

    @property
    def has_place(self) -> bool:
        """Whether a place is stated."""
        on = getattr(self, "on", None)
        return any(place is not None for place in (self.station, self.position, on))


class Placed(Located):
    """Something at a station, at a position, or on a part of that name."""

    on: Line | None = None
