"""Which characters can be shown, and how those that cannot are told.

A character that the PDF's fonts lack, or that acts instead of showing (a control, a
direction override), is printed as its code point, ``U+4E2D``: never as an empty box,
never dropped.
"""

from __future__ import annotations

import re
import unicodedata
from bisect import bisect_right
from collections.abc import Callable, Iterator
from functools import cache
from importlib import resources

_SPACES = re.compile("[\t\n\r\v\f\x85\u2028\u2029]+")
_PLAIN = re.compile("[ -~]+")
_JOINERS = {0x200C, 0x200D, 0xFE0E, 0xFE0F}  # shape their neighbours; harmless on screen
_LONG = 20  # characters without a break: more may not fit a column
_RUN = re.compile(rf"((?:[^\s\u200b/-]|[/-](?=\d)){{{_LONG + 1},}})")


def acts(character: str) -> bool:
    """Tell whether a character has an effect in place of a shape."""
    code = ord(character)
    if code in _JOINERS or code == 0xAD or code == 0x200B:
        return False
    category = unicodedata.category(character)
    return category in ("Cc", "Cf", "Cs") or code & 0xFFFE == 0xFFFE or 0xFDD0 <= code <= 0xFDEF


def for_screen(text: str) -> Iterator[tuple[bool, str]]:
    """Yield pieces of a text for a browser: whether it is a code point told in words, and it."""
    return _pieces(text, acts)


def for_paper(text: str) -> Iterator[tuple[bool, str]]:
    """Yield pieces of a text for the PDF, whose fonts are those inside the typst wheel."""
    return _pieces(unicodedata.normalize("NFC", text), lambda c: not printable(c))


def plain(text: str) -> str:
    """Return a text for places that no font shows (metadata, alternative texts)."""
    return "".join(piece for _, piece in for_screen(text))


def printable(character: str) -> bool:
    """Tell whether the PDF's fonts show the character."""
    starts, ends = _glyphs()
    code = ord(character)
    at = bisect_right(starts, code) - 1
    return at >= 0 and code <= ends[at]


def rare(text: str) -> set[str]:
    """Return the code points of a page's characters that not every system can show."""
    return {
        f"U+{ord(c):04X}" for c in set(text) if ord(c) > 0x24F and not printable(c) and not acts(c)
    }


def listed(points: set[str], most: int = 40) -> str:
    """Return code points in order, as words; beyond ``most`` their number."""
    ordered = sorted(points, key=lambda point: int(point[2:], 16))
    rest = len(ordered) - most
    return ", ".join(ordered[:most]) + (f" and {rest} more" if rest > 0 else "")


def long_runs(text: str) -> Iterator[tuple[bool, str]]:
    """Yield pieces of a text: whether it is too long a run to fit every column, and it.

    A run ends where a line may break anyway: at a space, and at a hyphen or a stroke that no
    digit follows (Unicode Standard Annex 14, LB25).
    """
    for n, piece in enumerate(_RUN.split(text)):
        if piece:
            yield n % 2 == 1, piece


def _pieces(text: str, told: Callable[[str], bool]) -> Iterator[tuple[bool, str]]:
    if _PLAIN.fullmatch(text):  # nearly all texts, and ten times as fast
        yield False, text
        return
    run: list[str] = []
    for character in _SPACES.sub(" ", text):
        if not told(character):
            run.append(character)
            continue
        if run:
            yield False, "".join(run)
            run = []
        yield True, f"U+{ord(character):04X}"
    if run:
        yield False, "".join(run)


@cache
def _glyphs() -> tuple[list[int], list[int]]:
    """Return first and last code points of the ranges that the PDF's fonts cover."""
    data = resources.files("reportgen.publish").joinpath("page/glyphs.txt").read_text("ascii")
    pairs = [
        [int(end, 16) for end in (line.split("-") * 2)[:2]]
        for line in data.splitlines()
        if not line.startswith("#")
    ]
    return [first for first, _ in pairs], [last for _, last in pairs]
