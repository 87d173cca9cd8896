"""A sign of life from a long calculation: how far it is, every few seconds."""

from __future__ import annotations

import threading
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager

_EVERY = 10.0  # seconds


@contextmanager
def heartbeat(
    say: Callable[[str], None], every: float = _EVERY
) -> Iterator[Callable[[int, int], None]]:
    """Say every few seconds how many cells are done, for as long as the block runs.

    Parameters
    ----------
    say
        Told in words; called from another thread.
    every
        Seconds between; a block that ends sooner is never spoken of.

    Yields
    ------
    callable
        To be told the number of cells done and their number in all.
    """
    start, ended = time.monotonic(), threading.Event()
    cells = [0, 0]

    def told(done: int, total: int) -> None:
        cells[:] = done, total

    def beat() -> None:
        while not ended.wait(every):
            of = f"{cells[0]} of {cells[1]} cells done, " if cells[1] else ""
            say(f"still calculating: {of}{time.monotonic() - start:.0f} s")

    thread = threading.Thread(target=beat, daemon=True)
    thread.start()
    try:
        yield told
    finally:
        ended.set()
        thread.join()
