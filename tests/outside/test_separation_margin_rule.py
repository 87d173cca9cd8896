"""Source: API 617 (7th and 8th edition), separation margin by amplification factor, from memory.

What the rule as remembered must have of itself: the margin below the range starts from nothing
at AF = 2.5, and both caps, 16 % and 26 %, are reached at one factor, AF = 18.5, where
17·(1 − 1/17) is 16 exactly. Values between are worked in exact fractions by Python's library.

Obtained: from memory.
"""

from fractions import Fraction

import pytest

from reportgen.criteria import required_margin


def by_fractions(factor):
    return Fraction(17, 100) * (1 - 1 / (factor - Fraction(3, 2)))


@pytest.mark.parametrize("factor", [Fraction(5, 2), Fraction(7, 2), Fraction(8), Fraction(37, 2)])
def test_values_up_to_the_cap(factor):
    below, above = by_fractions(factor), Fraction(1, 10) + by_fractions(factor)
    assert required_margin(float(factor), "below") == pytest.approx(float(below), abs=1e-15)
    assert required_margin(float(factor), "above") == pytest.approx(float(above), abs=1e-15)


def test_both_caps_are_reached_at_one_factor():
    assert by_fractions(Fraction(37, 2)) == Fraction(16, 100)
    for beyond in (18.5, 18.6, 100.0):
        assert required_margin(beyond, "below") == pytest.approx(0.16, abs=1e-15)
        assert required_margin(beyond, "above") == pytest.approx(0.26, abs=1e-15)
