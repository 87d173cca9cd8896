"""Formats of archived results: every one that was ever written can be read."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

from reportgen.errors import VerificationError

CURRENT = 1
"""Format of ``results.json`` that this version writes and works with."""

MIGRATIONS: dict[int, Callable[[Mapping[str, Any]], Mapping[str, Any]]] = {}
"""By format, what turns results of it into results of the next; a chain leads to the current one.

Each must keep what signatures stand on: number, revision and status of the document, the open
holds, and which second computations agreed."""


def current(name: str, data: Mapping[str, Any]) -> Mapping[str, Any]:
    """Return an archived file's data in the current format.

    Raises
    ------
    VerificationError
        If it states no format, or one that a later version wrote.
    """
    found = data.get("format")
    if not isinstance(found, int) or isinstance(found, bool) or found < 1:
        raise VerificationError(f"{name}: states no format that can be read: {found!r}")
    if found > CURRENT:
        raise VerificationError(
            f"{name}: format {found} was written by a later version; this one reads up to {CURRENT}"
        )
    while found < CURRENT:
        data = MIGRATIONS[found](data)
        found += 1
    return data
