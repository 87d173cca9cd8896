"""Stations of a shaft: ends of its sections, and where else something sits."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import accumulate, pairwise

from reportgen.case.common import problem
from reportgen.case.places import Located

_SAME_PLACE = 1e-5  # m; drawings state no place closer


@dataclass(frozen=True)
class Piece:
    """One length of shaft as the case gives it, in SI; left and right values where they differ."""

    length: float
    outer: tuple[float, float]
    inner: tuple[float, float]
    mass_outer: tuple[float, float] | None
    material: str
    position: float | None
    elements: int | None

    def cut(self, start: float, end: float) -> Piece:
        """Return the part between two shares of the length, diameters running linearly."""

        def between(ends: tuple[float, float]) -> tuple[float, float]:
            left, right = ends
            return left + (right - left) * start, left + (right - left) * end

        share = end - start
        return Piece(
            self.length * share,
            between(self.outer),
            between(self.inner),
            None if self.mass_outer is None else between(self.mass_outer),
            self.material,
            None,
            None if self.elements is None else max(1, round(self.elements * share)),
        )

    @property
    def count(self) -> int:
        """Elements to make of it: as stated, else none longer than the shaft is thick."""
        if self.elements is not None:
            return self.elements
        return min(200, max(1, math.ceil(self.length / max(self.outer) - 1e-9)))


class Layout:
    """Where everything sits: stations of the shaft as given, and after cuts at other places.

    A part given by a position that is no end of a section cuts the section there.

    Parameters
    ----------
    pieces
        Lengths of shaft as given, from left to right.
    parts
        The rotor's parts by name.

    Attributes
    ----------
    ends
        Ends of the lengths as given from the left end in m; station k of the case is
        ``ends[k - 1]``.
    """

    def __init__(self, pieces: Sequence[Piece], parts: Mapping[str, Located]) -> None:
        self.pieces, self.parts = tuple(pieces), dict(parts)
        self.ends = tuple(accumulate((p.length for p in pieces), initial=0.0))
        self._require_run()

    def place(self, part: Located) -> float:
        """Return where a part sits, from the left end in m."""
        on = getattr(part, "on", None)
        if on is not None:
            return self.place(self.parts[on])
        if part.position is not None:
            return float(part.position)
        return self.ends[(part.station or 1) - 1]

    def require(self, part: Located, what: str, key: str) -> None:
        """Refuse a part at a place that the shaft does not have; ``key`` is the list it is in."""
        on = getattr(part, "on", None)
        if on is not None and on not in self.parts:
            names = ", ".join(self.parts)
            raise problem(f"{what} sits on {on!r}, which is no part", f"parts are {names}", key)
        if part.station is not None and part.station > len(self.ends):
            found = f"{what} sits at station {part.station}, which does not exist"
            raise problem(found, f"the shaft has stations 1 to {len(self.ends)}", key)
        if part.position is not None and float(part.position) > self.ends[-1] + _SAME_PLACE:
            found = f"{what} sits at {part.position.as_given}, beyond the end of the shaft"
            raise problem(found, f"the shaft is {1000 * self.ends[-1]:.6g} mm long", key)

    def _require_run(self) -> None:
        for number, (piece, start) in enumerate(zip(self.pieces, self.ends, strict=False), 1):
            if piece.position is not None and abs(piece.position - start) > _SAME_PLACE:
                way = "overlaps the one before" if piece.position < start else "leaves a gap"
                found = (
                    f"section {number} {way}: it starts at {1000 * piece.position:.6g} mm, the "
                    f"sections before it end at {1000 * start:.6g} mm"
                )
                raise problem(found, "sections follow one another; check the lengths", "shaft")

    def cut_at(self, places: list[float]) -> tuple[list[Piece], tuple[float, ...]]:
        """Return lengths and ends with the shaft cut wherever something sits."""
        pieces: list[Piece] = []
        for piece, start in zip(self.pieces, self.ends, strict=False):
            end = start + piece.length
            inner = sorted({p for p in places if start + _SAME_PLACE < p < end - _SAME_PLACE})
            kept = [p for i, p in enumerate(inner) if not i or p - inner[i - 1] > _SAME_PLACE]
            if not kept:
                pieces.append(piece)
                continue
            shares = [0.0, *((p - start) / piece.length for p in kept), 1.0]
            pieces += [piece.cut(a, b) for a, b in pairwise(shares)]
        return pieces, tuple(accumulate((p.length for p in pieces), initial=0.0))
