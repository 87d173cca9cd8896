"""Where the jobs of a batch run: in this process, in processes beside it, on a Dask cluster.

A pool is given cases one by one, each under a token, and gives the tokens back with outcomes.
"""

from __future__ import annotations

import contextlib
import itertools
import multiprocessing
import os
import signal
import sys
from abc import ABC, abstractmethod
from concurrent.futures import FIRST_COMPLETED, Future, ProcessPoolExecutor, wait
from concurrent.futures.process import BrokenProcessPool
from pathlib import Path
from typing import Any, Self

from reportgen.errors import InputError, Problem
from reportgen.run.outcome import Call, Outcome
from reportgen.run.warm import borrow, lend

_SCHEDULER_SECONDS = 10
_POLL_SECONDS = 0.2


class Pool(ABC):
    """Runs a call over cases.

    Parameters
    ----------
    call
        Gives an outcome for a case and never raises.
    """

    def __init__(self, call: Call) -> None:
        self.call = call
        self._tokens = itertools.count()

    def __enter__(self) -> Self:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    def token(self) -> int:
        """Give a name for the next case."""
        return next(self._tokens)

    @abstractmethod
    def places(self) -> int:
        """Give the number of cases that can run at once, at present."""

    @abstractmethod
    def submit(self, token: int, case: Path) -> None:
        """Begin a case."""

    @abstractmethod
    def ended(self, seconds: float | None) -> list[tuple[int, Outcome]]:
        """Wait for a case to end, at most so long, and give all that have."""

    @abstractmethod
    def interrupt(self) -> None:
        """Ask running cases to stop."""

    @abstractmethod
    def close(self) -> None:
        """End the pool."""


class HerePool(Pool):
    """In this process: a case runs as it is submitted."""

    def __init__(self, call: Call) -> None:
        super().__init__(call)
        self._ended: list[tuple[int, Outcome]] = []

    def places(self) -> int:
        """Give one."""
        return 1

    def submit(self, token: int, case: Path) -> None:
        """Run a case."""
        self._ended.append((token, self.call(case)))

    def ended(self, seconds: float | None) -> list[tuple[int, Outcome]]:  # noqa: ARG002
        """Give what has run."""
        result, self._ended = self._ended, []
        return result

    def interrupt(self) -> None:
        """Do nothing: the interrupt reached the job itself."""

    def close(self) -> None:
        """Do nothing."""


class LocalPool(Pool):
    """Processes of this computer, which fork their kernels from one warm parent.

    A process that is killed takes the pool with it, and nobody can say whose fault that was:
    the cases that ran are run once more, one at a time, and what breaks the pool alone failed.

    Parameters
    ----------
    call
        As for :class:`Pool`; must be picklable.
    n
        Number of processes.
    warm
        Whether they share a warm parent.
    """

    def __init__(self, call: Call, n: int, warm: bool) -> None:
        super().__init__(call)
        self._n = n
        self._warm = warm
        self._not_ours = set(multiprocessing.active_children())
        self._executor = self._new()
        self._running: dict[Future[Outcome], tuple[int, Path]] = {}
        self._suspects: list[tuple[int, Path]] = []
        self._alone: int | None = None
        self._interrupted = False

    def _new(self) -> ProcessPoolExecutor:
        # Not forked: this process may have threads, and holds the warm parent's lifeline.
        return ProcessPoolExecutor(
            self._n,
            mp_context=multiprocessing.get_context("spawn"),
            initializer=begin_worker,
            initargs=(lend() if self._warm else "",),
        )

    def places(self) -> int:
        """Give the number of processes; none while a suspect is to run alone."""
        waiting = self._suspects or self._alone is not None
        return len(self._suspects) + len(self._running) if waiting else self._n

    def submit(self, token: int, case: Path) -> None:
        """Begin a case, or put it behind the suspects if there are any."""
        if self._suspects or self._alone is not None:
            self._suspects.append((token, case))
        else:
            self._begin(token, case)

    def _begin(self, token: int, case: Path) -> None:
        try:
            future = self._executor.submit(run_in_worker, self.call, case)
        except BrokenProcessPool:
            self._renew()
            future = self._executor.submit(run_in_worker, self.call, case)
        self._running[future] = (token, case)

    def _renew(self) -> None:
        self._executor.shutdown(wait=True, cancel_futures=True)
        self._executor = self._new()

    def ended(self, seconds: float | None) -> list[tuple[int, Outcome]]:
        """Wait for cases to end; after a break, begin the suspects one by one."""
        result: list[tuple[int, Outcome]] = []
        done, _ = wait(self._running, timeout=seconds, return_when=FIRST_COMPLETED)
        if any(isinstance(future.exception(), BrokenProcessPool) for future in done):
            done, _ = wait(self._running)  # they all break together
        broken = []
        for future in done:
            token, case = self._running.pop(future)
            if not isinstance(future.exception(), BrokenProcessPool):
                result.append((token, future.result()))
            elif self._alone == token:
                result.append((token, _died(case)))
            else:
                broken.append((token, case))
            if self._alone == token:
                self._alone = None
        self._suspects = sorted(broken) + self._suspects
        if self._suspects and not self._running and not self._interrupted:
            self._alone, case = self._suspects.pop(0)
            self._begin(self._alone, case)
        return result

    def interrupt(self) -> None:
        """Pass the interrupt on to the processes, once each."""
        self._interrupted = True
        for process in self._processes():
            if process.pid is None:
                continue
            if sys.platform == "win32":
                process.terminate()
            else:
                with contextlib.suppress(ProcessLookupError):
                    os.kill(process.pid, signal.SIGINT)

    def _processes(self) -> set[Any]:
        return set(multiprocessing.active_children()) - self._not_ours

    def close(self) -> None:
        """End the processes; by force those that did not stop when interrupted."""
        if self._interrupted and self._running:
            for process in self._processes():
                process.kill()
        self._executor.shutdown(wait=True, cancel_futures=True)


def begin_worker(warm_parent: str) -> None:
    """Set up a worker process.

    An interrupt at the terminal is for the process that owns the batch alone, which passes it
    on; between cases there is nothing to interrupt.
    """
    if hasattr(os, "setsid"):
        os.setsid()
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    borrow(warm_parent)


def run_in_worker(call: Call, case: Path) -> Outcome:
    """Run a case in a worker process, open to an interrupt while it runs."""
    signal.signal(signal.SIGINT, signal.default_int_handler)
    try:
        return call(case)
    finally:
        signal.signal(signal.SIGINT, signal.SIG_IGN)


def _died(case: Path) -> Outcome:
    message = "the process that ran the case was killed; too little memory is a common cause"
    error = {"kind": "RunError", "message": message, "exit_status": 1}
    return Outcome(str(case), "failed", 0.0, None, error)


class DaskPool(Pool):
    """A Dask cluster.

    The scheduler gives a case whose worker died to another; one that kills several failed.

    Parameters
    ----------
    call
        As for :class:`Pool`; must be picklable, and reportgen installed on the workers.
    address
        Of the scheduler.

    Raises
    ------
    InputError
        If dask.distributed is not installed, or no scheduler answers.
    """

    def __init__(self, call: Call, address: str) -> None:
        super().__init__(call)
        try:
            import distributed
        except ImportError as error:
            message = "dask.distributed is not installed"
            raise InputError(
                Problem(message, "install reportgen with its 'cluster' extra", field="--scheduler")
            ) from error
        try:
            client: Any = distributed.Client
            self._client: Any = client(address, timeout=_SCHEDULER_SECONDS, set_as_default=False)
        except (OSError, ValueError, TimeoutError) as error:
            message = f"no scheduler answers at {address!r}"
            remedy = "start one with 'dask scheduler' and give the address it prints"
            raise InputError(Problem(message, remedy, field="--scheduler")) from error
        self._distributed: Any = distributed
        self._running: dict[Any, tuple[int, Path]] = {}

    def places(self) -> int:
        """Give the workers' threads; one at least, which waits for a worker to come."""
        return max(int(sum(self._client.nthreads().values())), 1)

    def submit(self, token: int, case: Path) -> None:
        """Begin a case."""
        self._running[self._client.submit(self.call, case, pure=False)] = (token, case)

    def ended(self, seconds: float | None) -> list[tuple[int, Outcome]]:
        """Wait for cases to end; returns now and then, since workers may have come."""
        timeout = _POLL_SECONDS if seconds is None else seconds
        with contextlib.suppress(TimeoutError), self._client.as_current():
            self._distributed.wait(
                list(self._running), timeout=timeout, return_when="FIRST_COMPLETED"
            )
        result = []
        for future in [future for future in self._running if future.done()]:
            token, case = self._running.pop(future)
            finished = future.status == "finished"
            result.append((token, future.result() if finished else _died(case)))
        return result

    def interrupt(self) -> None:
        """Take back what has not begun; what runs on a worker runs on, and writes whole."""
        self._client.cancel(list(self._running))
        self._running.clear()

    def close(self) -> None:
        """Leave the cluster."""
        self._client.close()
