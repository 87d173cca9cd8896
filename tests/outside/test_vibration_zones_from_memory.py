"""Source: ISO 7919-3:2009 and ISO 10816-3:2009 (both now in ISO 20816-3), from memory.

The values were written down for this test from memory of the standards' charts and tables, not
read: they guard against a slip of the pen, not of memory. Tolerances are half of the last digit.

Obtained: from memory.
"""

import math

import pytest

from reportgen.criteria import casing_velocity_zones, shaft_vibration_zones


@pytest.mark.parametrize(
    ("revolutions", "microns"),
    [(1000.0, (152, 285, 417)), (3000.0, (88, 164, 241)), (10000.0, (48, 90, 132))],
)
def test_zones_of_relative_shaft_vibration(revolutions, microns):
    zones = shaft_vibration_zones(revolutions * math.pi / 30.0)
    assert [end * 1e6 for end in zones] == pytest.approx(microns, abs=0.5, rel=0)


@pytest.mark.parametrize(
    ("group", "support", "speeds"),
    [
        (1, "rigid", (2.3, 4.5, 7.1)),
        (1, "flexible", (3.5, 7.1, 11.0)),
        (2, "rigid", (1.4, 2.8, 4.5)),
        (2, "flexible", (2.3, 4.5, 7.1)),
    ],
)
def test_zones_of_casing_velocity(group, support, speeds):
    zones = casing_velocity_zones(group, support)
    assert [end * 1e3 for end in zones] == pytest.approx(speeds, abs=0.05, rel=0)
