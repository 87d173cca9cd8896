"""Source: API 617 (7th edition), anticipated cross-coupling in US units, from memory.

With power in hp, speed in r/min and lengths in inches, 63·B·hp·(ρ_d/ρ_s)/(D·H·N) is the
cross-coupled stiffness in 1000 lbf/in. Units are turned by pint; 63 is a rounded 63.025, hence
the tolerance of half of its last digit.

Obtained: from memory.
"""

import math

import pint
import pytest

from reportgen.criteria import anticipated_cross_coupling

UNITS = pint.UnitRegistry()


def test_the_constant_of_the_us_form():
    power, speed, diameter, width, ratio = 3500.0, 9800.0, 17.5, 0.9, 1.4
    inch = UNITS.Quantity(1.0, "inch").to("m").magnitude
    found = anticipated_cross_coupling(
        UNITS.Quantity(power, "horsepower").to("W").magnitude,
        speed * math.pi / 30.0,
        diameter * inch,
        width * inch,
        density_ratio=ratio,
    )
    printed = 63.0 * 3.0 * power * ratio / (diameter * width * speed)
    in_us = UNITS.Quantity(found, "N/m").to("lbf/inch").magnitude / 1e3
    assert in_us == pytest.approx(printed, rel=0.5 / 63.0)
