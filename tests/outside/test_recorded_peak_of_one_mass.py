"""Source: the one-mass rotor (Föppl 1895, Jeffcott 1919); half-power speeds by SciPy's root finder.

The response e·r²/√((1−r²)² + (2ζr)²) peaks at r = 1/√(1−2ζ²). Its half-power speeds are found by
brentq on the closed form, to 1e-12; the record holds readings at even steps h of speed. Between
readings the reader draws straight lines, so that a half-power speed is off by h²·|A″/A′|/8 at
most. There, |A″/A′| is near 1/(2ζω) for a light damping, the band 2ζω wide, and the factor off by
(h/ζω)²/16; twice that is allowed for the heavier dampings. The parabola at the top is off by
less: the curve is lopsided by the order of ζ only.

Obtained: closed form, computed by a general-purpose library.
"""

import numpy as np
import pytest
from scipy.optimize import brentq

from reportgen.criteria.peaks import Record, recorded_peaks


def amplitude(r, zeta):
    return r**2 / np.sqrt((1 - r**2) ** 2 + (2 * zeta * r) ** 2)


@pytest.mark.parametrize("zeta", [0.02, 0.05, 0.1, 0.2])
def test_speed_and_amplification_factor(zeta):
    critical, step = 250.0, 0.25
    speed = np.arange(50.0, 900.0, step)
    lag = np.arctan2(2 * zeta * speed / critical, 1 - (speed / critical) ** 2)
    (peak,) = recorded_peaks(Record(speed, amplitude(speed / critical, zeta), lag))
    top = 1 / np.sqrt(1 - 2 * zeta**2)
    level = amplitude(top, zeta) / np.sqrt(2)
    ends = [
        brentq(lambda r: amplitude(r, zeta) - level, *bracket, xtol=1e-12)
        for bracket in ((0.1, top), (top, 3.6))
    ]
    tolerance = (step / (zeta * critical)) ** 2 / 8.0
    assert peak.speed == pytest.approx(critical * top, rel=tolerance)
    assert peak.amplitude == pytest.approx(amplitude(top, zeta), rel=tolerance)
    assert peak.amplification == pytest.approx(top / (ends[1] - ends[0]), rel=tolerance)
    turn = [np.arctan2(2 * zeta * r, 1 - r**2) for r in ends]
    assert peak.turn == pytest.approx(turn[1] - turn[0], abs=tolerance)
