"""Source: "Centrifugal compressor vibration" (inspection-for-industry.com) on API 617, read.

The article states the limit as √(12000/N) mil or 1.0 mil peak-to-peak, whichever is less. Its
own example of 18 000 r/min prints 0.87 for a root that is 0.816, and is not used. The roots here
are exact: 12000/48000 = 1/4.

Obtained: read.
"""

import math

import pint
import pytest

from reportgen.criteria import running_vibration_limit

MIL = pint.UnitRegistry().Quantity(1e-3, "inch").to("m").magnitude


@pytest.mark.parametrize(
    ("revolutions", "mils"), [(1500.0, 1.0), (12000.0, 1.0), (27000.0, 2.0 / 3.0), (48000.0, 0.5)]
)
def test_the_limit_in_mils(revolutions, mils):
    limit = running_vibration_limit(revolutions * math.pi / 30.0)
    assert limit / MIL == pytest.approx(mils, rel=1e-12)
