"""Zones A to D of a measured vibration and the boundaries between them."""

from __future__ import annotations

from typing import Literal, NamedTuple

from reportgen.errors import ModelError

Boundary = Literal["A/B", "B/C", "C/D"]


class Zones(NamedTuple):
    """Upper ends of zones A, B and C, in SI."""

    a: float
    b: float
    c: float

    def at(self, boundary: Boundary) -> float:
        """Return the value at a boundary.

        Raises
        ------
        ModelError
            If the boundary is not A/B, B/C or C/D.
        """
        ends = {"A/B": self.a, "B/C": self.b, "C/D": self.c}
        if boundary not in ends:
            raise ModelError(f"the zone boundary is {boundary!r}; state A/B, B/C or C/D")
        return ends[boundary]

    def zone(self, value: float) -> str:
        """Return the letter of the zone that a value lies in; a boundary is the lower zone's."""
        return next((letter for letter, end in zip("ABC", self, strict=True) if value <= end), "D")
