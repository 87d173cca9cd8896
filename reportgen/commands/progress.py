"""What a batch tells while it runs: a bar on a terminal, nothing elsewhere."""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from reportgen.run.batch import State


@contextmanager
def batch_progress(count: int) -> Iterator[Callable[[State], None]]:
    """Show which cases run, how many are done, failed and left."""
    if not sys.stderr.isatty() or count < 2:
        yield lambda _: None
        return
    from rich.console import Console
    from rich.progress import BarColumn, MofNCompleteColumn, Progress, TextColumn
    from rich.progress import TimeRemainingColumn as Left

    columns = (BarColumn(), MofNCompleteColumn(), Left(), TextColumn("{task.description}"))
    with Progress(*columns, console=Console(stderr=True), transient=True) as bar:
        task = bar.add_task("starting", total=count)

        def tell(state: State) -> None:
            running = ", ".join(path.stem for path in state.running[:4]) or "ending"
            more = f" and {len(state.running) - 4} more" if len(state.running) > 4 else ""
            failed = f", {state.failed} failed" if state.failed else ""
            bar.update(
                task,
                completed=state.done + state.failed,
                description=f"running {running}{more}{failed}, {state.left} to begin",
            )

        yield tell
