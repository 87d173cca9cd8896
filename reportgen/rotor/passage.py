"""Passing the critical speed with the one-mass rotor, in closed form.

The equation, with the unbalance at the angle θ and the bow b turning with the shaft, is

    m z̈ + c ż + k (z − b e^{iθ}) = m e (θ̇² − i θ̈) e^{iθ},

on flexible supports joined by theirs. `passage` gives the motion at instants, `passage_peak` the
highest amplitude on the way, `reportgen.rotor.passage_map` both over many dampings and
accelerations at once.
"""

from reportgen.rotor.passage_exact import AT_REST, Passage, WhirlState, passage
from reportgen.rotor.passage_peak import PassagePeak, passage_peak
from reportgen.rotor.passage_programme import (
    ConstantAcceleration,
    PiecewiseAcceleration,
    Programme,
    Segment,
    even_times,
    speed_range,
)

__all__ = [
    "AT_REST",
    "ConstantAcceleration",
    "Passage",
    "PassagePeak",
    "PiecewiseAcceleration",
    "Programme",
    "Segment",
    "WhirlState",
    "even_times",
    "passage",
    "passage_peak",
    "speed_range",
]
