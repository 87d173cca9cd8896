"""Names that must differ."""

from __future__ import annotations

from reportgen.case.base import words_of
from reportgen.case.common import problem


def require_unique(**lists: list[str]) -> None:
    """Refuse a list in which a name stands twice; keys are the fields' names."""
    for field, names in lists.items():
        for number, name in enumerate(names):
            if name in names[:number]:
                words = words_of(field)
                raise problem(f"{name!r} stands twice in {words}", "give each its own name", words)
