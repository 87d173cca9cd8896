"""Source: a sampled sine, measured with NumPy (standard deviation, range, largest value).

Obtained: computed by a general-purpose library.
"""

import numpy as np
import pytest

from reportgen.criteria import convert_amplitude

SAMPLES = 37e-6 * np.sin(2.0 * np.pi * np.arange(4096) / 4096)
MEASURED = {
    "0-peak": np.max(np.abs(SAMPLES)),
    "peak-to-peak": np.ptp(SAMPLES),
    "r.m.s.": np.std(SAMPLES),
}


@pytest.mark.parametrize("given", MEASURED)
@pytest.mark.parametrize("wanted", MEASURED)
def test_every_measure_from_every_other(given, wanted):
    found = convert_amplitude(float(MEASURED[given]), given, wanted, harmonic=True)
    assert found == pytest.approx(MEASURED[wanted], rel=1e-12)
