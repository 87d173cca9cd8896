"""Undamped peak of a passage against the leading term of Lewis.

Source: Lewis, F. M. (1932), Vibration during acceleration through a critical speed, Trans. ASME 54,
253-261: the undamped peak grows as 3.67·√q, q = f_n²/(df/dt); coefficient from memory, its last
digit taken as uncertain by one.

Obtained: from memory.
"""

import math

import pytest

from reportgen.rotor.onemass import OneMassRotor
from reportgen.rotor.passage import ConstantAcceleration, passage_peak


@pytest.mark.parametrize("acceleration", [1e-5, 1e-6, -1e-5, -1e-6])
def test_slow_undamped_passage_peaks_as_lewis_found(acceleration):
    rotor = OneMassRotor(1.0, 1.0, 0.0, 1.0)
    start, end = (0.5, 1.5) if acceleration > 0 else (1.5, 0.5)
    peak = passage_peak(rotor, ConstantAcceleration(start, end, acceleration))
    q = (1.0 / (2.0 * math.pi)) ** 2 / (abs(acceleration) / (2.0 * math.pi))
    # Next terms of the expansion are of the order of √|a|.
    assert peak.amplitude / math.sqrt(q) == pytest.approx(
        3.67, abs=0.01 + 1.5 * abs(acceleration) ** 0.5
    )
    assert peak.crossed
    # Late in the direction of travel.
    assert (peak.speed - 1.0) * acceleration > 0
