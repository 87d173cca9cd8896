"""How wide a table's columns are on paper, and how tall the table becomes.

Widths are estimated from the letters; the page needs no more than that to set columns
well, and both are known before anything is set.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

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
_BOLD = "nn"  # about what a bold word is wider
_FEW_LINES = 1.9  # of words beside values in one line; where words take more, values break too
_MOST_LINES = 2.4  # before a smaller type is tried
_READ_WELL = 8.5  # points: below this only where words do not fit
_MOST_EM = 45.0  # of a cell; longer ones claim no more of the width
_MOST_KEPT = 24  # characters that never break; a longer word may


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
    No column is narrower than its longest word. Room beyond that goes to where the longest
    cell takes most lines, so that the longest cells of all columns take about as many; a
    value with its measure stays in one line where the words beside it allow that.
    """
    room = ROOM[paper]
    size, widths = SIZES[-1], [room / len(head) for _ in head]
    for size in SIZES:
        widths, count = _at(size, head, rows, kept, stated, room)
        if count <= (_MOST_LINES if size > _READ_WELL else math.inf):
            break
    lines = [
        max(
            math.ceil(1.03 * size * em(text) / max(width - _PADDING, size))
            for text, width in zip(row, widths, strict=True)
        )
        for row in (head, *rows)
    ]
    height = sum(max(count, 1) * size * _LINE + _GAP for count in lines)
    return Layout(tuple(width / sum(widths) for width in widths), size, height)


def _at(
    size: float,
    head: Sequence[str],
    rows: Sequence[Sequence[str]],
    kept: Sequence[bool],
    stated: Sequence[float | None],
    room: float,
) -> tuple[list[float], float]:
    """Return widths at a type size, and about how many lines the longest cells then take."""
    columns = range(len(head))
    least = [
        _PADDING
        + size * max(_least(text, kept[n]) for text in (head[n] + _BOLD, *_column(rows, n)))
        for n in columns
    ]
    whole = [
        max(least[n], *(_PADDING + size * min(em(t), _MOST_EM) for t in _column(rows, n)), 0)
        for n in columns
    ]
    heads = [max(whole[n], _PADDING + size * em(head[n] + _BOLD)) for n in columns]
    if sum(least) > room:
        return least, math.inf
    if given := _stated(least, stated, room):
        return given, 1.0
    if sum(heads) <= room:
        spare = room / sum(heads)
        return [width * spare for width in heads], 1.0
    if sum(whole) <= room:
        return _filled(whole, heads, room)[0], 1.0
    values = [w if keep else low for low, w, keep in zip(least, whole, kept, strict=True)]
    if sum(values) < room:
        widths, lines = _filled(values, whole, room)
        if lines <= _FEW_LINES:
            return widths, lines
    return _filled(least, whole, room)


def _column(rows: Sequence[Sequence[str]], n: int) -> Iterator[str]:
    return (row[n] for row in rows)


def _filled(least: list[float], whole: list[float], room: float) -> tuple[list[float], float]:
    """Return widths that fill the room, and about how many lines the longest cells then take."""

    def at(lines: float) -> list[float]:
        return [max(a, b / lines) for a, b in zip(least, whole, strict=True)]

    few, many = 1.0, 1e4
    for _ in range(50):
        middle = math.sqrt(few * many)
        few, many = (middle, many) if sum(at(middle)) > room else (few, middle)
    return at(many), many


def _stated(least: list[float], stated: Sequence[float | None], room: float) -> list[float]:
    """Return the widths that a template states, if it states all; none under its words."""
    if not stated or any(share is None for share in stated):
        return []
    widths = [share * room for share in stated if share is not None]
    over = [max(width - low, 0.0) for width, low in zip(widths, least, strict=True)]
    missing = sum(max(low - width, 0.0) for width, low in zip(widths, least, strict=True))
    scale = max(0.0, 1 - missing / sum(over)) if sum(over) else 0.0
    return [low + scale * more for low, more in zip(least, over, strict=True)]


def _least(text: str, kept: bool) -> float:
    """Return the width in ems that no line break can go below."""
    found = (piece for piece, _ in pieces(text)) if kept else iter(_BREAKS.findall(text))
    words = [em(piece[:_MOST_KEPT] if kept else piece[:20]) for piece in found]
    return max(words, default=0.5)


def pieces(text: str) -> Iterator[tuple[str, bool]]:
    """Yield the parts of a value between which a line may break, and whether each is kept whole.

    ``at most 50.8 µm peak-to-peak`` may break before and after ``50.8 µm``, never within.
    """
    for piece in _UNIT.findall(text):
        yield piece, len(piece) <= _MOST_KEPT


def em(text: str) -> float:
    """Return the width of a text in ems, about."""
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
