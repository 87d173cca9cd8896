"""Source: "Understanding the ISO 10816-3 vibration severity chart" (acoem.us), read.

Its example is a motor of 150 hp at 1765 r/min that drives a pump, on a rigid base: 1.4 mm/s
r.m.s. (0.08 in/s peak) when new, 2.8 mm/s r.m.s. (0.16 in/s peak) for unrestricted operation.
Tolerances are half of the last digit printed.

Obtained: read.
"""

import pint
import pytest

from reportgen.criteria import casing_velocity_zones, convert_amplitude

UNITS = pint.UnitRegistry()


@pytest.mark.parametrize(("boundary", "rms", "peak"), [("A/B", 1.4, 0.08), ("B/C", 2.8, 0.16)])
def test_boundaries_in_both_units_and_measures(boundary, rms, peak):
    velocity = casing_velocity_zones(2, "rigid").at(boundary)
    assert velocity * 1e3 == pytest.approx(rms, abs=0.05, rel=0)
    as_peak = convert_amplitude(velocity, "r.m.s.", "0-peak", harmonic=True)
    inches = UNITS.Quantity(as_peak, "m/s").to("inch/s").magnitude
    assert inches == pytest.approx(peak, abs=0.005, rel=0)


def test_the_power_of_the_motor_lies_in_the_group():
    kilowatts = UNITS.Quantity(150.0, "horsepower").to("kW").magnitude
    assert 15.0 < kilowatts <= 300.0
