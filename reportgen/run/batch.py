"""Many cases: one failing does not stop the rest, and an interrupt leaves what is finished."""

from __future__ import annotations

import time
import traceback
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from reportgen.errors import ReportgenError
from reportgen.run.outcome import Outcome, Status, Summary
from reportgen.run.pools import DaskPool, HerePool, LocalPool, Pool

Job = Callable[[Path], dict[str, Any]]
"""What is done with one case. A function at the top level of a module, or a
:func:`functools.partial` of one, so that it can be sent to other processes. Its result is plain
JSON; ``exit_status`` in it, if any, counts for the whole."""

_INTERRUPT_SECONDS = 15.0  # for running cases to put away their kernels


@dataclass(frozen=True)
class State:
    """How far a batch is, told at each start and each end.

    Parameters
    ----------
    running
        Cases being run.
    done, failed, left
        Numbers of cases; ``left`` counts those not begun.
    ended
        The outcome that this report is about; None at a start.
    """

    running: tuple[Path, ...]
    done: int
    failed: int
    left: int
    ended: Outcome | None = None


def run_many(
    job: Job,
    cases: Sequence[Path],
    n: int = 1,
    *,
    on_progress: Callable[[State], None] | None = None,
    scheduler: str = "",
    warm: bool = True,
) -> Summary:
    """Do a job over many cases, here, in processes of this computer, or on a Dask cluster.

    Parameters
    ----------
    job
        What is done with each case.
    cases
        Case files. On a cluster the workers must see them, and what the job writes, by the
        same paths.
    n
        Processes; one case, or ``n`` of 1, is run in this process.
    on_progress
        Told how far it is.
    scheduler
        Address of a Dask scheduler; empty for this computer.
    warm
        Whether processes of this computer share one parent of warm kernels.

    Returns
    -------
    Summary
        Also after an interrupt: then with what was finished, the rest ``stopped``.

    Raises
    ------
    InputError
        If no scheduler answers, or dask.distributed is not installed.
    """
    with _pool(job, min(n, len(cases)), scheduler, warm) as pool:
        return _Batch(pool, list(cases), on_progress).run()


def _pool(job: Job, n: int, scheduler: str, warm: bool) -> Pool:
    call = _Call(job)
    if scheduler:
        return DaskPool(call, scheduler)
    return LocalPool(call, n, warm) if n > 1 else HerePool(call)


@dataclass(frozen=True)
class _Call:
    """Do the job and turn whatever comes into an outcome, which any process can send back."""

    job: Job

    def __call__(self, case: Path) -> Outcome:
        start = time.perf_counter()

        def outcome(status: Status, **what: Any) -> Outcome:
            return Outcome(str(case), status, round(time.perf_counter() - start, 3), **what)

        try:
            return outcome("done", result=self.job(case))
        except ReportgenError as error:
            return outcome("failed", error=_described(error, error.exit_status))
        except Exception as error:
            trace = "".join(traceback.format_exception(error))
            return outcome("failed", error={**_described(error, 1), "traceback": trace})
        except KeyboardInterrupt:
            return outcome("stopped")


def _described(error: Exception, exit_status: int) -> dict[str, Any]:
    return {"kind": type(error).__name__, "message": str(error), "exit_status": exit_status}


@dataclass
class _Batch:
    """The run of a batch: never more cases given out than the pool has places."""

    pool: Pool
    cases: list[Path]
    on_progress: Callable[[State], None] | None
    waiting: list[int] = field(default_factory=list)
    running: dict[Any, int] = field(default_factory=dict)
    outcomes: dict[int, Outcome] = field(default_factory=dict)

    def run(self) -> Summary:
        self.waiting = list(range(len(self.cases)))
        interrupted = False
        try:
            while self.waiting or self.running:
                self.give_out()
                self.take_in(None)
                if any(outcome.status == "stopped" for outcome in self.outcomes.values()):
                    raise KeyboardInterrupt  # it met a job of this very process
        except KeyboardInterrupt:
            interrupted = True
            self.stop()
        for index, case in enumerate(self.cases):
            self.outcomes.setdefault(index, Outcome(str(case), "stopped"))
        return Summary([self.outcomes[index] for index in range(len(self.cases))], interrupted)

    def give_out(self) -> None:
        while self.waiting and len(self.running) < max(self.pool.places(), 1):
            index = self.waiting.pop(0)
            # Counted as running first: a pool of this process does the job as it is given.
            token = self.pool.token()
            self.running[token] = index
            self.tell(None)
            self.pool.submit(token, self.cases[index])

    def take_in(self, seconds: float | None) -> None:
        for token, outcome in self.pool.ended(seconds):
            index = self.running.pop(token)
            self.outcomes[index] = outcome
            self.tell(outcome)

    def stop(self) -> None:
        """Interrupt what runs, and still take in what finishes meanwhile."""
        self.pool.interrupt()
        deadline = time.monotonic() + _INTERRUPT_SECONDS
        while self.running and time.monotonic() < deadline:
            self.take_in(0.2)

    def tell(self, ended: Outcome | None) -> None:
        if self.on_progress is None:
            return
        statuses = [outcome.status for outcome in self.outcomes.values()]
        self.on_progress(
            State(
                tuple(self.cases[index] for index in self.running.values()),
                statuses.count("done"),
                statuses.count("failed"),
                len(self.waiting),
                ended,
            )
        )
