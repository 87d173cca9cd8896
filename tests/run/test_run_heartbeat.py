"""A long calculation shows that it goes on; a short one says nothing."""

from __future__ import annotations

import threading

from reportgen.run.heartbeat import heartbeat


def test_a_long_calculation_tells_how_far_it_is() -> None:
    said: list[str] = []
    spoken = threading.Event()

    def say(words: str) -> None:
        said.append(words)
        if "cells" in words:
            spoken.set()

    with heartbeat(say, every=0.01) as progress:
        progress(3, 17)
        assert spoken.wait(10)
    assert "still calculating: 3 of 17 cells done, 0 s" in said
    count = len(said)
    spoken.clear()
    assert not spoken.wait(0.05)
    assert len(said) == count


def test_a_short_calculation_is_not_spoken_of() -> None:
    said: list[str] = []
    with heartbeat(said.append, every=30.0):
        pass
    assert said == []
