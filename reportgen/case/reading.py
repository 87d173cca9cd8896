"""One reading of a case: where problems are gathered with their places."""

from __future__ import annotations

import difflib
import math
import re
from collections.abc import Iterable
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from pydantic_core import PydanticCustomError

from reportgen.case.nodes import ListNode, MapNode, Mark, TextNode
from reportgen.errors import Problem

REPORTED = "reported"
CHECK = "check"


@dataclass
class Reading:
    """What validators share while a case file is read.

    Parameters
    ----------
    file
        Name of the case file, as given.
    folder
        Folder that side files are named from.
    problems
        Everything found wrong so far.
    sides
        Side files as read, by their names.
    """

    file: str
    folder: Path
    problems: list[Problem] = field(default_factory=list)
    sides: dict[str, bytes] = field(default_factory=dict)

    def report(self, message: str, remedy: str, place: Mark, path: str) -> None:
        """Add a problem at a place of the case file."""
        self.problems.append(Problem(message, remedy, self.file, *place, path))


def fault(
    info_context: Any, node: Any, message: str, remedy: str, key: str = ""
) -> PydanticCustomError:
    """Return the error to raise; in a reading the problem is gathered first, with its place.

    Parameters
    ----------
    info_context
        The validation's context: a :class:`Reading`, or None for a resolved case.
    node
        Where it stands.
    message, remedy
        What was found, what would do.
    key
        Key within ``node``, where the problem is with the value under it.
    """
    if isinstance(info_context, Reading) and hasattr(node, "mark"):
        if isinstance(node, MapNode) and key:
            info_context.report(message, remedy, node.place(key), node.child(key))
        else:
            info_context.report(message, remedy, node.mark, node.path)
        return already()
    # a value that stands nowhere (an empty one, a resolved one) is placed by its path
    context = {"message": message, "remedy": remedy, "key": ""}
    return PydanticCustomError(CHECK, "{message}", context)


def already() -> PydanticCustomError:
    """Return the error to raise where the reading has the problems already."""
    return PydanticCustomError(REPORTED, "reported")


def nearest(word: str, words: Iterable[str]) -> str:
    """Return the likeliest word meant, empty where none is near."""
    lowered = {w.lower(): w for w in words}
    key = word.lower().replace("_", " ").replace("-", " ")
    found = difflib.get_close_matches(key, lowered, n=1, cutoff=0.6)
    return lowered[found[0]] if found else ""


def read_number(text: str) -> float | None:
    """Return a text as the number it is, None where it is none or is not finite."""
    if not re.fullmatch(r"[+-]?(\d+(\.\d*)?|\.\d+)([eE][+-]?\d{1,3})?", text):
        return None
    number = float(text)
    return number if math.isfinite(number) else None


def described(node: Any) -> str:
    """Return what a node is, in words for a message."""
    if node is None:
        return "nothing"
    if isinstance(node, (MapNode, dict)):
        return "a mapping"
    if isinstance(node, (ListNode, list)):
        return "a list"
    text = str(node)
    return repr(text if len(text) <= 60 else f"{text[:60]}…")


__all__ = [
    "REPORTED",
    "MapNode",
    "Reading",
    "TextNode",
    "already",
    "described",
    "fault",
    "nearest",
    "read_number",
]
