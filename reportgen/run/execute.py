"""Run a template with a case through papermill, and believe only what the kernel answered.

papermill's own record calls a cell completed when its time ran out, when its kernel died, and
even when it never ran; it also takes ``SystemExit`` for a success. So each cell's end is taken
from the kernel's own reply, and the outputs are read against it.
"""

from __future__ import annotations

import json
import math
import re
import time
from collections.abc import Callable
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, Literal

import papermill  # type: ignore[import-untyped]
from nbclient.exceptions import CellTimeoutError, DeadKernelError
from nbformat import NotebookNode
from papermill.clientwrap import PapermillNotebookClient  # type: ignore[import-untyped]
from papermill.engines import NBClientEngine, papermill_engines  # type: ignore[import-untyped]

from reportgen.errors import CellError, RunError
from reportgen.run.kernels import (
    PROVISIONER,
    kernel_environment,
    kernel_manager,
    scratch_folder,
)
from reportgen.run.normalise import normalise, notebook_bytes
from reportgen.run.parameters import PARAMETER, injected_value, require_plain
from reportgen.run.template import KERNEL, Template, read_template
from reportgen.sheet.blocks import RESULTS_MIME

Progress = Callable[[int, int], None]
"""Told the number of code cells done and their number in all."""

KernelKind = Literal["warm", "plain"]
CellState = Literal["done", "failed", "not ended", "not run", "empty"]

_START_TIMEOUT = 60  # seconds for a kernel to answer; a busy computer needs some
_OUTPUT_TIMEOUT = 60  # seconds for a cell's outputs to arrive after its reply
_LONGEST_MESSAGE = 500  # characters
_ANSI = re.compile(r"\x1b\[[0-9;]*m")  # colours that a kernel puts into messages


@dataclass(frozen=True)
class CellStatus:
    """How one code cell ended.

    Parameters
    ----------
    number
        Place in the template, counted from 1 over cells of every kind; the injected case
        carries the number of the parameters cell.
    state
        ``done`` only if the kernel replied "ok", counted it in order, and sent no error.
    line
        First line of the cell.
    name, message
        Exception met; empty if none.
    """

    number: int
    state: CellState
    line: str
    name: str = ""
    message: str = ""


@dataclass(frozen=True)
class Executed:
    """A template that ran to its end.

    Parameters
    ----------
    notebook
        Normalised; ``metadata["reportgen"]`` names the template and its digest.
    results
        What the last code cell gave as results.
    cells
        Every code cell, in order.
    """

    notebook: NotebookNode
    results: dict[str, Any]
    cells: list[CellStatus]


@dataclass
class _Watch:
    """What is known of a run while it goes on, kept apart from papermill's record."""

    template: Template
    resolved: dict[str, Any]
    kind: KernelKind
    timeout: float
    progress: Progress | None
    notebook: NotebookNode | None = None
    running: int | None = None  # index of the cell that was sent and has not ended
    replies: dict[int, dict[str, Any]] = field(default_factory=dict)
    deadline: float = math.inf
    total: int = 0
    outcome: Executed | None = None

    def started(self, **_: Any) -> None:
        self.deadline = time.monotonic() + self.timeout

    def sent(self, cell_index: int, **_: Any) -> None:
        self.running = cell_index

    def ended(self, cell_index: int, execute_reply: dict[str, Any], **_: Any) -> None:
        self.running = None
        self.replies[cell_index] = execute_reply["content"]
        if self.progress is not None:
            self.progress(len(self.replies), self.total)

    def time_left(self, _: NotebookNode) -> float:
        # nbclient takes nought and less for "no limit"
        return max(self.deadline - time.monotonic(), 1e-3)


class _Engine(NBClientEngine):  # type: ignore[misc]
    """papermill's engine with a kernel of our own and our own record of what ended how."""

    @classmethod
    def execute_managed_notebook(
        cls, nb_man: Any, kernel_name: str, *, watch: _Watch, **_: Any
    ) -> None:
        notebook: NotebookNode = nb_man.nb
        watch.notebook = notebook
        watch.total = sum(1 for cell in notebook.cells if _runs(cell))
        _require_same_case(notebook, watch.resolved)
        with scratch_folder() as scratch:
            manager = kernel_manager(scratch, PROVISIONER if watch.kind == "warm" else "")
            client = PapermillNotebookClient(
                nb_man,
                km=manager,
                kernel_name=kernel_name,
                resources={"metadata": {"path": str(scratch.work)}},
                startup_timeout=_START_TIMEOUT,
                iopub_timeout=_OUTPUT_TIMEOUT,
                timeout=math.ceil(watch.timeout),
                timeout_func=watch.time_left,
                shutdown_kernel="immediate",
                on_notebook_start=watch.started,
                on_cell_execute=watch.sent,
                on_cell_executed=watch.ended,
            )
            client.execute(cleanup_kc=True, env=kernel_environment(scratch.root))
        # Judged here: papermill goes on to insert cells of its own where it sees an error.
        watch.outcome = _judge(watch)


papermill_engines.register("reportgen", _Engine)


def execute(
    template: Path,
    resolved: dict[str, Any],
    *,
    kernel: KernelKind = "warm",
    timeout: float = 600,
    progress: Progress | None = None,
) -> Executed:
    """Run a template with a case and prove that every cell ran to its end, in order.

    Parameters
    ----------
    template
        The notebook.
    resolved
        The resolved case; plain JSON data.
    kernel
        ``warm`` forks a kernel from a process that has done its imports, where the system
        can; ``plain`` starts a new interpreter.
    timeout
        Seconds that all cells together may take.
    progress
        Called after each code cell.

    Returns
    -------
    Executed
        The normalised notebook, its results, and how each cell ended.

    Raises
    ------
    InputError
        If the template is not fit to run.
    CellError
        If a cell failed, did not end in time, lost its kernel, never ran, or gave no results.
    RunError
        If the case is not plain data or no kernel could be started.
    """
    ready = read_template(template)
    require_plain(resolved)
    watch = _Watch(ready, resolved, kernel, timeout, progress)
    try:
        papermill.execute_notebook(
            ready.notebook,
            None,
            parameters={PARAMETER: resolved},
            engine_name="reportgen",
            kernel_name=KERNEL,
            language="python",
            progress_bar=False,
            watch=watch,
        )
    except CellTimeoutError as error:
        raise _stopped(watch, "TimeoutError", f"not ended after {timeout:g} s") from error
    except DeadKernelError as error:
        message = "the kernel process died; too little memory is a common cause"
        raise _stopped(watch, "dead kernel", message) from error
    except RuntimeError as error:
        if watch.replies or watch.running is not None:
            raise
        raise RunError(f"{ready.name}: no kernel could be started: {error}") from error
    assert watch.outcome is not None
    return watch.outcome


def _runs(cell: NotebookNode) -> bool:
    return cell.cell_type == "code" and bool(cell.source.strip())


def _require_same_case(notebook: NotebookNode, resolved: dict[str, Any]) -> None:
    """Read the injected cell back as data before the kernel sees it."""
    tagged = [
        cell for cell in notebook.cells if "injected-parameters" in cell.metadata.get("tags", [])
    ]
    if len(tagged) != 1 or injected_value(tagged[0].source) != resolved:
        raise RunError("the injected case differs from the case that was read")


def _judge(watch: _Watch) -> Executed:
    cells = _statuses(watch)
    for status in cells:
        if status.state not in ("done", "empty"):
            raise _error(watch, status, status.name or status.state, status.message)
    results = _results(watch, cells)
    assert watch.notebook is not None
    return Executed(_finished(watch, watch.notebook), results, cells)


def _finished(watch: _Watch, notebook: NotebookNode) -> NotebookNode:
    result = normalise(notebook)
    template = {"name": watch.template.name, "sha512": watch.template.digest}
    result.metadata["reportgen"] = {"format": 1, "template": template}
    return result


def _statuses(watch: _Watch) -> list[CellStatus]:
    """Read how each code cell ended from the kernel's replies and the cell's own outputs."""
    assert watch.notebook is not None
    result = []
    injected = 0
    count = 0
    for index, cell in enumerate(watch.notebook.cells):
        injected += "injected-parameters" in cell.metadata.get("tags", [])
        if cell.cell_type == "code":
            count += _runs(cell)
            result.append(_status(watch, cell, index, count, index + 1 - injected))
    return result


def _status(watch: _Watch, cell: NotebookNode, index: int, count: int, number: int) -> CellStatus:
    line = next((line.strip() for line in cell.source.splitlines() if line.strip()), "")
    reply = watch.replies.get(index)
    errors = [output for output in cell.outputs if output.output_type == "error"]
    if not _runs(cell):
        return CellStatus(number, "empty", line)
    if reply is None:
        state: CellState = "not ended" if index == watch.running else "not run"
        skipped = "skip-execution" in cell.metadata.get("tags", [])
        reason = "tagged 'skip-execution'" if skipped else "the cell never ran"
        return CellStatus(number, state, line, "", reason)
    if reply["status"] != "ok" or errors:
        name = reply.get("ename") or (errors[0].ename if errors else reply["status"])
        message = reply.get("evalue") or (errors[0].evalue if errors else "")
        return CellStatus(number, "failed", line, name, message)
    if reply.get("execution_count") != count or cell.execution_count != count:
        message = f"counted {cell.execution_count} by the kernel, expected {count}"
        return CellStatus(number, "failed", line, "run out of order", message)
    return CellStatus(number, "done", line)


def _results(watch: _Watch, cells: list[CellStatus]) -> dict[str, Any]:
    """Take the results from the last code cell; they must be there once and nowhere else."""
    assert watch.notebook is not None
    code = [cell for cell in watch.notebook.cells if _runs(cell)]
    last = [status for status in cells if status.state == "done"][-1]
    found = [
        (cell, output.data[RESULTS_MIME])
        for cell in code
        for output in cell.outputs
        if RESULTS_MIME in output.get("data", {})
    ]
    if not found:
        raise _error(watch, last, "no results", "the last code cell must give the results")
    if len(found) > 1:
        raise _error(watch, last, "results twice", f"the results were given {len(found)} times")
    cell, value = found[0]
    if cell is not code[-1]:
        raise _error(watch, last, "no results", "the results came before the last code cell")
    try:
        results = json.loads(json.dumps(value, allow_nan=False))
    except ValueError as error:
        raise _error(watch, last, "results not finite", str(error)) from error
    if not isinstance(results, dict):
        raise _error(watch, last, "no results", "the results are not a JSON object")
    return results


def _stopped(watch: _Watch, name: str, message: str) -> CellError:
    """Name the cell that was running when the time ran out or the kernel died."""
    cells = _statuses(watch)
    status = next(
        (cell for cell in cells if cell.state == "not ended"),
        next((cell for cell in cells if cell.state != "done"), cells[-1]),
    )
    return _error(watch, status, name, message)


def _error(watch: _Watch, status: CellStatus, name: str, message: str) -> CellError:
    assert watch.notebook is not None
    message = _ANSI.sub("", message).strip()
    if len(message) > _LONGEST_MESSAGE:
        message = message[: _LONGEST_MESSAGE - 1] + "…"
    partial = notebook_bytes(_finished(watch, watch.notebook))
    return CellError(watch.template.name, status.number, status.line, name, message, partial)
