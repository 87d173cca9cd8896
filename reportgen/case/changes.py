"""What differs between two resolved cases, and a resolved case with parts of another.

A place in a resolved case is a tuple of keys and indices; in print it is the path that
errors name too, such as ``passages[1].acceleration``.
"""

from __future__ import annotations

import copy
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from reportgen.case.base import words_of

Place = tuple[str | int, ...]
_NOT_CALCULATED = (
    "reportgen",
    "template",
    "document",
    "machine",
    "units",
    "assumptions",
    "house",
)
_SPREAD = ("tolerance", "distribution")


@dataclass(frozen=True)
class Change:
    """One difference between two cases.

    Parameters
    ----------
    place
        Where it is.
    before, after
        What stands there; None where nothing does.
    counts
        Whether a result can depend on it: a value, not a source, a status or a tolerance.
    """

    place: Place
    before: Any
    after: Any
    counts: bool

    @property
    def path(self) -> str:
        """The place in print."""
        return path_of(self.place)


def path_of(place: Place) -> str:
    """Return a place as errors print it, items of lists counted from 1."""
    out = ""
    for part in place:
        if isinstance(part, int):
            out += f"[{part + 1}]"
        else:
            out += f".{words_of(part)}" if out else words_of(part)
    return out


def is_given(value: Any) -> bool:
    """Tell whether a part of a resolved case is a given."""
    return isinstance(value, Mapping) and {"si", "quantity", "as_given"} <= value.keys()


def is_table(value: Any) -> bool:
    """Tell whether a part of a resolved case is a side table."""
    return isinstance(value, Mapping) and {"file", "columns"} <= value.keys()


def changes(old: Mapping[str, Any], new: Mapping[str, Any]) -> list[Change]:
    """Return the differences of two resolved cases in the order of the new one.

    Givens and side tables are compared whole; lists item by item where they are of one length,
    else whole.
    """
    return list(_differences(dict(old), dict(new), ()))


def _differences(old: Any, new: Any, at: Place) -> Iterator[Change]:
    if old == new:
        return
    maps = isinstance(old, Mapping) and isinstance(new, Mapping)
    leaf = any(test(side) for test in (is_given, is_table) for side in (old, new))
    if maps and not leaf:
        for key in [*new, *(key for key in old if key not in new)]:
            yield from _differences(old.get(key), new.get(key), (*at, key))
    elif _lists(old, new) and len(old) == len(new):
        for index, (one, other) in enumerate(zip(old, new, strict=True)):
            yield from _differences(one, other, (*at, index))
    else:
        yield Change(at, old, new, _counts(at, old, new))


def _lists(old: Any, new: Any) -> bool:
    return isinstance(old, (list, tuple)) and isinstance(new, (list, tuple))


def _counts(at: Place, old: Any, new: Any) -> bool:
    if at[0] in _NOT_CALCULATED and at != ("machine", "orientation"):
        return False
    if at[-1] in ("source", "status", "clause", "name"):
        return False
    if is_given(old) and is_given(new):
        return bool(old["si"] != new["si"] or old["quantity"] != new["quantity"])
    if is_table(old) and is_table(new):
        return bool(old["columns"] != new["columns"] or old["texts"] != new["texts"])
    return True


def spread_differs(change: Change) -> bool:
    """Tell whether tolerance or distribution of a given differ."""
    old, new = change.before, change.after
    return is_given(old) and is_given(new) and any(old[key] != new[key] for key in _SPREAD)


def value_at(resolved: Any, place: Place) -> Any:
    """Return what stands at a place; None where nothing does."""
    for part in place:
        try:
            resolved = resolved[part]
        except (KeyError, IndexError, TypeError):
            return None
    return resolved


def with_value(resolved: Mapping[str, Any], place: Place, value: Any) -> dict[str, Any]:
    """Return a resolved case with another value at a place that exists in its parent."""
    if not place:
        return dict(copy.deepcopy(value))
    out: dict[str, Any] = dict(resolved)
    parent: Any = out
    for part in place[:-1]:
        inner = parent[part]
        parent[part] = dict(inner) if isinstance(inner, Mapping) else list(inner)
        parent = parent[part]
    parent[place[-1]] = copy.deepcopy(value)
    return out
