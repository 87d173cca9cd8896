"""What becomes of the cases of a batch."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import asdict, dataclass
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


@dataclass(frozen=True)
class Summary:
    """What became of every case, in the order given.

    Parameters
    ----------
    outcomes
        One for each case.
    interrupted
        Whether the user stopped it.
    """

    outcomes: list[Outcome]
    interrupted: bool = False

    @property
    def exit_status(self) -> int:
        """1 if interrupted or anything failed on its own, else 2, 3, 0 as the cases say."""
        statuses = {outcome.error["exit_status"] for outcome in self.outcomes if outcome.error}
        statuses |= {
            outcome.result.get("exit_status", 0) for outcome in self.outcomes if outcome.result
        }
        if self.interrupted:
            statuses.add(1)
        return next((status for status in (1, 2, 4, 3) if status in statuses), 0)

    def as_dict(self) -> dict[str, Any]:
        """Give the machine-readable form."""
        counts = dict.fromkeys(("done", "failed", "stopped"), 0)
        for outcome in self.outcomes:
            counts[outcome.status] += 1
        return {
            "format": 1,
            **counts,
            "interrupted": self.interrupted,
            "exit_status": self.exit_status,
            "cases": [asdict(outcome) for outcome in self.outcomes],
        }


Call = Callable[[Path], Outcome]
"""Gives an outcome for a case and never raises."""
