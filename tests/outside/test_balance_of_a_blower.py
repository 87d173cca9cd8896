"""Source: "Comparison of ISO, API and Navy balance specifications" (1library.net), read.

Its example 4: a blower of 1000 lb at 2000 r/min. 4·W/N gives 2 oz·in; grade G6.3, read by its
author off a chart as 0.0012 lb·in a lb, gives 19.2 oz·in in all and 9.6 oz·in in each of two
planes. Tolerances are half of the last digit printed, for the chart half of that of 0.0012.
Its example 5 is left out: the value read off the chart there is 17 % above the grade's own
formula, more than a chart excuses.

Obtained: read.
"""

import math

import pint
import pytest

from reportgen.criteria import allocate, permissible_unbalance, residual_unbalance_by_load

UNITS = pint.UnitRegistry()
SPEED = 2000.0 * math.pi / 30.0
MASS = UNITS.Quantity(1000.0, "lb").to("kg").magnitude
CHART = 0.00005 * 16.0 * 1000.0


def ounce_inches(unbalance):
    return UNITS.Quantity(unbalance, "kg*m").to("oz*inch").magnitude


def test_by_weight_and_speed():
    found = ounce_inches(residual_unbalance_by_load(MASS, SPEED))
    assert found == pytest.approx(2.0, abs=0.05, rel=0)


def test_by_grade():
    whole = permissible_unbalance(6.3e-3, MASS, SPEED)
    assert ounce_inches(whole) == pytest.approx(19.2, abs=CHART, rel=0)
    each = allocate(whole, 0.0, 1.0, 0.5).at_a
    assert ounce_inches(each) == pytest.approx(9.6, abs=CHART / 2.0, rel=0)
