"""What differs between two payloads, in words that lead to the change."""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping
from typing import Any

_MOST_SHOWN = 12


def payload_changes(old: Mapping[str, bytes], new: Mapping[str, bytes]) -> list[str]:
    """Name each file that was added, removed or changed, and the fields of the inputs.

    Parameters
    ----------
    old, new
        Content by file name.

    Returns
    -------
    list of str
        One line a difference; the fields of ``inputs.json`` come first because they
        are the cause of the others. Empty if both are the same.
    """
    lines = []
    if old.get("inputs.json") != new.get("inputs.json"):
        lines += _field_lines(old.get("inputs.json", b""), new.get("inputs.json", b""))
    lines += [f"{name}: only in the package" for name in sorted(old.keys() - new.keys())]
    lines += [f"{name}: only in the new run" for name in sorted(new.keys() - old.keys())]
    lines += [
        f"{name}: changed" for name in sorted(old.keys() & new.keys()) if old[name] != new[name]
    ]
    return lines


def _field_lines(old: bytes, new: bytes) -> list[str]:
    try:
        pairs = list(field_changes(json.loads(old), json.loads(new)))
        pairs.sort(key=lambda pair: pair[0].startswith("provenance"))  # digests lead nowhere
    except ValueError:
        return []
    lines = [f"inputs.json: {path}: {before} → {after}" for path, before, after in pairs]
    if len(lines) > _MOST_SHOWN:
        lines = [*lines[:_MOST_SHOWN], f"inputs.json: and {len(lines) - _MOST_SHOWN} more fields"]
    return lines


def field_changes(old: Any, new: Any, path: str = "") -> Iterator[tuple[str, str, str]]:
    """Give path, old and new value of each leaf that differs between two JSON values."""
    if isinstance(old, dict) and isinstance(new, dict):
        for key in sorted(old.keys() | new.keys()):
            below = f"{path}.{key}" if path else key
            yield from field_changes(old.get(key, _ABSENT), new.get(key, _ABSENT), below)
    elif isinstance(old, list) and isinstance(new, list):
        for i in range(max(len(old), len(new))):
            before = old[i] if i < len(old) else _ABSENT
            after = new[i] if i < len(new) else _ABSENT
            yield from field_changes(before, after, f"{path}[{i}]")
    elif old is _ABSENT or new is _ABSENT or old != new or type(old) is not type(new):
        yield path, _short(old), _short(new)


class _Absent:
    pass


_ABSENT = _Absent()


def _short(value: Any) -> str:
    if value is _ABSENT:
        return "absent"
    text = json.dumps(value, ensure_ascii=False)
    return text if len(text) <= 60 else text[:57] + "…"
