"""What becomes of one case of a batch."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Literal

Status = Literal["done", "failed", "stopped"]


@dataclass(frozen=True)
class Outcome:
    """What became of one case.

    Parameters
    ----------
    case
        As it was given.
    status
        ``done``; ``failed``; ``stopped`` where an interrupt ended it or kept it from starting.
    seconds
        Time it took.
    result
        What the job returned.
    error
        ``kind``, ``message``, ``exit_status`` of what it raised, and ``traceback`` where that
        was no error of ours.
    """

    case: str
    status: Status
    seconds: float = 0.0
    result: dict[str, Any] | None = None
    error: dict[str, Any] | None = None


Call = Callable[[Path], Outcome]
"""Gives an outcome for a case and never raises."""
