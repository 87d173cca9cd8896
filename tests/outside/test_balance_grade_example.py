"""Source: ISO 1940-1 (now ISO 21940-11), the annex's example of a turbine rotor; from memory.

3600 kg, 3000 r/min, G2.5 on the bearing planes 1500 mm and 900 mm from the mass centre.
Tolerances are half of the last digit printed.

Obtained: from memory.
"""

import math

import pytest

from reportgen.criteria import allocate, permissible_unbalance

G_MM = 1e-6
SPEED = 3000.0 * math.pi / 30.0


def test_permissible_unbalance_of_the_whole_rotor():
    whole = permissible_unbalance(2.5e-3, 3600.0, SPEED)
    assert whole / G_MM == pytest.approx(28.6e3, abs=0.05e3, rel=0)


def test_split_between_the_bearing_planes():
    whole = permissible_unbalance(2.5e-3, 3600.0, SPEED)
    split = allocate(whole, 0.0, 2.400, 1.500)
    assert split.at_a / G_MM == pytest.approx(10.7e3, abs=0.05e3, rel=0)
    assert split.at_b / G_MM == pytest.approx(17.9e3, abs=0.05e3, rel=0)
    assert not split.limited
