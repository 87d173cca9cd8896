"""Source: Energy-Tech magazine (energy-tech.com, article 18389, page 4 of 6), read.

The article on rotor balance compares the rules for a compressor rotor of 1000 lb between
bearings that carry 500 lb each, at 15 000 r/min: 0.13 oz·in in each plane by 4·W/N, 1.0 oz·in in
all by grade G2.5, half of it in each plane. Units are turned by pint. Tolerances are half of
the last digit printed.

Obtained: read.
"""

import math

import pint
import pytest

from reportgen.criteria import allocate, permissible_unbalance, residual_unbalance_by_load

UNITS = pint.UnitRegistry()
SPEED = 15000.0 * math.pi / 30.0


def kilograms(pounds):
    return UNITS.Quantity(pounds, "lb").to("kg").magnitude


def ounce_inches(unbalance):
    return UNITS.Quantity(unbalance, "kg*m").to("oz*inch").magnitude


def test_by_journal_load():
    assert ounce_inches(residual_unbalance_by_load(kilograms(500.0), SPEED)) == pytest.approx(
        0.13, abs=0.005, rel=0
    )


def test_by_grade_in_all_and_in_each_plane():
    whole = permissible_unbalance(2.5e-3, kilograms(1000.0), SPEED)
    assert ounce_inches(whole) == pytest.approx(1.0, abs=0.05, rel=0)
    split = allocate(whole, 0.0, 1.0, 0.5)
    assert ounce_inches(split.at_a) == pytest.approx(0.5, abs=0.05, rel=0)
    assert ounce_inches(split.at_b) == pytest.approx(0.5, abs=0.05, rel=0)
