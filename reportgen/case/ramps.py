"""Runs from one speed to another at constant angular acceleration."""

from __future__ import annotations

import math

from reportgen.case.common import problem
from reportgen.case.given import Given

MOST_TURNS = 1e7


def require_ramp(from_: Given, to: Given, acceleration: Given) -> None:
    """Refuse a ramp that does not get to its end, or whose number of turns no shaft makes."""
    start, end, rate = float(from_), float(to), float(acceleration)
    if start == end:
        raise problem("the passage ends at the speed it starts from", "give another speed", "to")
    if rate == 0:
        found = "the acceleration is zero: the passage never ends"
        raise problem(found, "give the acceleration, negative for a coast-down", "acceleration")
    if (end > start) != (rate > 0):
        way = "rises" if end > start else "falls"
        found = f"the speed {way} from {from_.as_given} to {to.as_given} but the "
        found += f"acceleration is {acceleration.as_given}"
        remedy = f"give {'a positive' if end > start else 'a negative'} acceleration"
        raise problem(found, remedy, "acceleration")
    turns = abs((end**2 - start**2) / (2 * rate)) / (2 * math.pi)
    if turns < 1:
        found = f"the passage is over after {turns:.2g} of a turn"
        raise problem(found, "give an acceleration that a drive can reach", "acceleration")
    if turns > MOST_TURNS:
        found = f"the passage takes {turns:.2g} turns"
        raise problem(found, "judge so slow a passage by the steady response", "acceleration")
