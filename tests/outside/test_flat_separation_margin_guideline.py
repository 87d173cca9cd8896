"""Source: "Stable operating speed ranges" (compressors.processengineer.info), read.

A guideline for centrifugal compressors: no lateral critical speed from 15 % below any operating
speed to 20 % above the maximum continuous speed. Checked by sorting speeds with that sentence
alone, on a grid that holds both ends.

Obtained: read.
"""

import math

import pytest

from reportgen.criteria import FlatMargin, project_source, separation_margins

RPM = math.pi / 30.0
RULE = FlatMargin(0.15, 0.20, project_source("Stable operating speed ranges"))


@pytest.mark.parametrize("revolutions", [*range(6000, 14000, 250), 6799, 6800, 6801, 11999, 12001])
def test_each_speed_falls_on_its_side_of_the_guideline(revolutions):
    lowest, highest = 8000, 10000
    (outcome,) = separation_margins([(revolutions * RPM, None)], lowest * RPM, highest * RPM, RULE)
    forbidden = 85 * lowest < 100 * revolutions < 120 * highest
    assert outcome.verdict == ("does not meet" if forbidden else "meets")
