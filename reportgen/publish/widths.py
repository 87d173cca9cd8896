"""How wide a table's columns are on paper, and how tall the table becomes.

Widths are estimated from the letters; the page needs no more than that to set columns
well, and both are known before anything is set. All widths are in ems of the table's type
unless points are said.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import cached_property, lru_cache

ROOM = {"a4": 476.0, "letter": 492.0}
"""Points between the margins."""

SIZES = (9.5, 9.0, 8.5, 7.5, 7.0)
"""Sizes of type in points, tried in this order."""

_PADDING = 9.2  # points at both sides of a cell together
_LINE, _GAP = 1.22, 6.6  # a line's height as a share of the type size; points around a row
_NARROW, _WIDE = frozenset("fijlrtI.,;:!|'()[]/ -·"), frozenset("mwMWÆŒ@%—…")
_UNIT = re.compile(
    r"(?:at (?:most|least) )?(?:[±<>≤≥] )?[−+-]?\d[\d.]*"  # a number with what leads to it,
    r"(?:×10[⁻⁰¹²³⁴⁵⁶⁷⁸⁹]+)?(?: (?!peak|r\.m)[^\s\d]\S*){0,2}(?=\s|$)"  # its power, its unit
    r"|\S+"
)
_BREAKS = re.compile(r"(?:[^\s/-]|[/-](?=\d))+[/-]*|\S")  # no break between hyphen and digit
_SPACE = 0.27
_BOLD = "nn"  # about what a bold word is wider
_MOST_KEPT, _MOST_WORD, _CHUNK = 24, 20, 5  # characters: longer words break, anywhere
_LINES = (1, 2, 3, 4, 5, 6, 8, 10, 13, 17, 23, 30, 40)  # of the longest cell, tried in this order
_WORTH = 0.85  # of a table's height: a smaller type must spare this much
_READ_WELL = 8.5  # points: below this only where words do not fit
_TIMES, _TRIALS = 3, 4
_LOOKED_AT = 6  # longest cells of a column; they decide


@dataclass(frozen=True, slots=True)
class Layout:
    """A table's columns as shares of the width, its type size, and its height in points."""

    shares: tuple[float, ...]
    size: float
    height: float


def layout(
    head: Sequence[str],
    rows: Sequence[Sequence[str]],
    kept: Sequence[bool],
    stated: Sequence[float | None],
    paper: str,
) -> Layout:
    """Return how a table is laid out.

    Parameters
    ----------
    head, rows
        Text of each cell.
    kept
        Columns in which a number keeps its unit in the line; see :func:`pieces`.
    stated
        Width that the template states, as a share; None where it states none.
    paper
        Key of :data:`ROOM`.

    Notes
    -----
    No column is narrower than its longest word. Beyond that the columns are such that the
    longest cells take the fewest lines, a value with its measure one line where that costs
    the words beside it none; what is left of the width is shared out.
    """
    columns = [_Column(head[n], [row[n] for row in rows], keep) for n, keep in enumerate(kept)]
    best: Layout | None = None
    for size in SIZES:
        widths, lines = _fitted(columns, stated, (ROOM[paper] - _PADDING * len(columns)) / size)
        height = size * _LINE * _lines(columns, widths) + _GAP * (len(rows) + 1)
        points = [_PADDING + size * width for width in widths]
        made = Layout(tuple(width / sum(points) for width in points), size, height)
        if best is None or lines == math.inf or made.height < _WORTH * best.height:
            best = made
        if lines <= (1 if size > _READ_WELL else _LINES[-1]):
            break
    assert best is not None  # there is a size to try
    return best


class _Cell:
    """A text as the words that a line may break between."""

    def __init__(self, text: str, kept: bool) -> None:
        self.words = list(_words(text, kept))
        self.widest = max((width for width, _ in self.words), default=0.5)
        self.whole = sum(width + space for width, space in self.words) or 0.5

    def lines(self, width: float) -> int:
        """Return how many lines the text takes."""
        count, used = 1, 0.0
        for word, space in self.words:
            if used and used + space + word > width:
                count, used = count + 1, word
            else:
                used += space + word
        return count

    def narrowest(self, lines: int) -> float:
        """Return the least width in which the text takes no more lines than these."""
        low, high = self.widest, self.whole
        if lines == 1 or high <= low:
            return max(low, high)
        if self.lines(low) <= lines:
            return low
        low, high = max(low, high / lines), min(high, 2 * high / lines + low)
        for _ in range(7):
            middle = (low + high) / 2
            low, high = (low, middle) if self.lines(middle) <= lines else (middle, high)
        return high


class _Column:
    """A column's cells, the title first."""

    def __init__(self, title: str, texts: Sequence[str], kept: bool) -> None:
        self.kept = kept
        self.title = _Cell(title + _BOLD, kept=False)
        body = [_Cell(text, kept) for text in texts]
        self.cells = [self.title, *body]
        self.longest = sorted(body, key=lambda cell: cell.whole)[-_LOOKED_AT:]

    @cached_property
    def least(self) -> float:
        return max(cell.widest for cell in self.cells)

    def narrowest(self, lines: int) -> float:
        return max(self.least, *(cell.narrowest(lines) for cell in self.longest), 0.0)


def _fitted(
    columns: Sequence[_Column], stated: Sequence[float | None], room: float
) -> tuple[list[float], float]:
    """Return widths that fill the room, and how many lines the longest cells then take."""
    least = [column.least for column in columns]
    if sum(least) > room:
        return least, math.inf
    if given := _stated(least, stated, room):
        return given, 1
    for lines in _LINES:
        broken = [column.narrowest(lines) for column in columns]
        whole = [
            column.narrowest(1) if column.kept else width
            for column, width in zip(columns, broken, strict=True)
        ]
        for widths in (whole, broken):
            if sum(widths) <= room:
                return _best(widths, columns, lines, room), lines
    return _spread(least, [column.narrowest(1) for column in columns], room), _LINES[-1]


def _lines(columns: Sequence[_Column], widths: Sequence[float]) -> int:
    """Return how many lines all rows take together."""
    rows = zip(*(column.cells for column in columns), strict=True)
    return sum(max(map(_Cell.lines, row, widths)) for row in rows)


def _best(widths: list[float], columns: Sequence[_Column], lines: int, room: float) -> list[float]:
    """Share out what is left of the room in the way that gives the shortest table."""
    titles = [column.title.whole for column in columns]
    longest = max(range(len(columns)), key=lambda n: columns[n].narrowest(1))
    to_longest = list(widths)
    to_longest[longest] += room - sum(widths)
    ways = [_spread(widths, titles, room), to_longest]
    eased = list(widths)
    wanted = [column.narrowest(max(lines - 1, 1)) for column in columns]
    for n in sorted(range(len(widths)), key=lambda n: wanted[n] - widths[n]):
        if sum(eased) - eased[n] + wanted[n] <= room:
            eased[n] = max(eased[n], wanted[n])
    ways.append(_spread(eased, titles, room))
    return _improved(min(ways, key=lambda way: _lines(columns, way)), columns)


def _improved(widths: list[float], columns: Sequence[_Column]) -> list[float]:
    """Move width to columns that a little more of it spares many lines."""
    lines = _lines(columns, widths)
    for _ in range(_TIMES):
        tried = [way for n in range(len(columns)) for way in _moved(widths, columns, n)]
        best = min(tried, key=lambda way: _lines(columns, way), default=widths)
        if (fewer := _lines(columns, best)) >= lines:
            break
        widths, lines = best, fewer
    return widths


def _moved(widths: list[float], columns: Sequence[_Column], to: int) -> Iterator[list[float]]:
    """Yield widths in which a column has enough for some of its cells to take a line less."""
    slack = [0.0 if n == to else width - columns[n].least for n, width in enumerate(widths)]
    spare = sum(slack)
    enough = {
        round(cell.narrowest(count - 1) + 0.05, 2)
        for cell in columns[to].cells
        if (count := cell.lines(widths[to])) > 1
    }
    reached = sorted(width for width in enough if 0 < width - widths[to] < spare)
    for width in reached[:: max(1, len(reached) // _TRIALS)]:
        taken = (width - widths[to]) / spare
        yield [width if n == to else w - taken * slack[n] for n, w in enumerate(widths)]


def _spread(widths: list[float], wanted: list[float], room: float) -> list[float]:
    """Share out what is left of the room: first to what wants more, then to all."""
    more = [max(want - width, 0.0) for width, want in zip(widths, wanted, strict=True)]
    share = min(1.0, (room - sum(widths)) / sum(more)) if sum(more) else 0.0
    widened = [width + share * extra for width, extra in zip(widths, more, strict=True)]
    return [width * room / sum(widened) for width in widened]


def _stated(least: list[float], stated: Sequence[float | None], room: float) -> list[float]:
    """Return the widths that a template states, if it states all; none under its words."""
    if any(share is None for share in stated):
        return []
    widths = [share * room for share in stated if share is not None]
    over = [max(width - low, 0.0) for width, low in zip(widths, least, strict=True)]
    missing = sum(max(low - width, 0.0) for width, low in zip(widths, least, strict=True))
    scale = max(0.0, 1 - missing / sum(over)) if sum(over) else 0.0
    return [low + scale * more for low, more in zip(least, over, strict=True)]


def _words(text: str, kept: bool) -> Iterator[tuple[float, float]]:
    """Yield the width of each word, and of the space before it."""
    if kept:
        for piece, whole in pieces(text):
            yield from _broken(piece, _MOST_KEPT if whole else _CHUNK, _SPACE)
        return
    for word in text.split():
        space = _SPACE
        for part in _BREAKS.findall(word):
            yield from _broken(part, _MOST_WORD if len(part) <= _MOST_WORD else _CHUNK, space)
            space = 0.0


def _broken(word: str, most: int, space: float) -> Iterator[tuple[float, float]]:
    for start in range(0, len(word), most):
        yield em(word[start : start + most]), 0.0 if start else space


def pieces(text: str) -> Iterator[tuple[str, bool]]:
    """Yield the parts of a value between which a line may break, and whether each is kept whole.

    ``at most 50.8 µm peak-to-peak`` may break before and after ``50.8 µm``, never within.
    """
    for piece in _UNIT.findall(text):
        yield piece, len(piece) <= _MOST_KEPT


@lru_cache(maxsize=4096)
def em(text: str) -> float:
    """Return the width of a text, about."""
    return 1.05 * sum(map(_em, text))


def _em(character: str) -> float:
    if character in _NARROW:
        return 0.3
    if character in _WIDE:
        return 0.86
    if character.isdigit():
        return 0.48
    if character.isupper():
        return 0.67
    return 0.49 if character.isalpha() else 0.55
