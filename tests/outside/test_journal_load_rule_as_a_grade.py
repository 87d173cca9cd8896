"""Source: "Rotor balance standard", Kane's Dictionary (kanesdictionary.com), read.

It puts the rule of 4·W/N at a balance quality grade of about 0.7. Tolerance is half of the
digit printed.

Obtained: read.
"""

import math

import pytest

from reportgen.criteria import residual_unbalance_by_load


def test_the_rule_corresponds_to_a_grade():
    mass, speed = 250.0, 7200.0 * math.pi / 30.0
    grade = residual_unbalance_by_load(mass, speed) / mass * speed
    assert grade * 1e3 == pytest.approx(0.7, abs=0.05, rel=0)
