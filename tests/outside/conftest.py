"""Notes every comparison with the outside while its test runs.

With ``--catalogue FILE`` each value that a test in this folder compares by ``pytest.approx`` is
written to the file, one JSON line each: test, ours, theirs, tolerance. ``table.py`` makes the
README's table from it.
"""

from __future__ import annotations

import json
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import numpy as np
import pytest


@pytest.fixture(autouse=True)
def noted(request: pytest.FixtureRequest, monkeypatch: pytest.MonkeyPatch) -> Iterator[None]:
    """Note what the test compares, where that is asked for."""
    place = request.config.getoption("--catalogue")
    if not place:
        yield
        return
    seen: list[dict[str, Any]] = []
    monkeypatch.setattr(pytest, "approx", _noting(pytest.approx, seen))
    yield
    file = Path(str(request.node.path)).name
    with Path(place).open("a", encoding="utf-8") as out:
        for one in seen or [{}]:
            line = {"file": file, "test": request.node.originalname or request.node.name, **one}
            out.write(json.dumps(line) + "\n")


def _noting(approx: Any, seen: list[dict[str, Any]]) -> Any:
    def wrapped(expected: Any, *args: Any, **kw: Any) -> Any:
        made = approx(expected, *args, **kw)

        def equal(self: Any, actual: Any) -> bool:
            result = bool(super(type(self), self).__eq__(actual))
            note = _first(actual, expected, made)
            if note is not None:
                seen.append(note)
            return result

        kind = type(made.__class__.__name__, (made.__class__,), {"__eq__": equal, "__hash__": None})
        made.__class__ = kind
        return made

    return wrapped


def _first(actual: Any, expected: Any, made: Any) -> dict[str, Any] | None:
    """Return the farthest pair of a comparison of numbers, and the tolerance it was held to."""
    try:
        ours, theirs = np.broadcast_arrays(np.asarray(actual), np.asarray(expected))
        gaps = np.abs(ours - theirs)
        at = np.unravel_index(int(np.argmax(gaps)), gaps.shape)
        a, b = complex(ours[at]), complex(theirs[at])
    except (TypeError, ValueError):
        return None
    rel, absolute = getattr(made, "rel", None), getattr(made, "abs", None)
    allowed = max(
        (1e-6 if rel is None and absolute is None else (rel or 0.0)) * abs(b),
        absolute or 0.0,
        1e-12,
    )
    ours_shown, theirs_shown = (v.real if v.imag == 0 else abs(v) for v in (a, b))
    return {"ours": ours_shown, "theirs": theirs_shown, "gap": abs(a - b), "tolerance": allowed}
