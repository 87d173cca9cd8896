"""What is drawn of a record tells the truth about it."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from reportgen.assess.transient_model import in_rpm
from reportgen.assess.transient_picture import envelope, time_above, waterfall


@given(arrays(np.float64, st.integers(3, 4000), elements=st.floats(0, 1e3)))
def test_an_envelope_keeps_the_largest_and_smallest_value(size: np.ndarray) -> None:
    time = np.arange(size.size, dtype=float)
    when, kept = envelope(time, size, bins=40)
    assert kept.max() == size.max()
    assert kept.min() == size.min()
    assert np.all(np.diff(when) > 0)
    assert np.array_equal(size[when.astype(int)], kept)
    assert (when[0], when[-1]) == (0, size.size - 1)


@pytest.mark.parametrize("level", [0.2, 0.5, 0.9])
def test_the_time_above_a_limit_is_that_of_a_sine(level: float) -> None:
    time = np.linspace(0.0, 10.0, 20_001)
    size = np.sin(math.pi * time) ** 2  # ten humps
    expected = 10.0 * (1.0 - 2.0 * math.asin(math.sqrt(level)) / math.pi)
    assert time_above(time, size, level) == pytest.approx(expected, rel=1e-5)


def test_a_spectrum_finds_frequency_and_amplitude_of_a_steady_whirl() -> None:
    rate = 2.0 * math.pi * 37.0
    fall = waterfall(
        lambda t: 3e-5 * np.exp(1j * rate * t),
        lambda t: np.full(t.shape, rate),
        (0.0, 10.0),
        2.0 * math.pi * 20.0,
        rate,
    )
    assert fall is not None
    for line in fall.level:
        at = int(np.argmax(line))
        assert abs(fall.frequency[at] - rate) <= 0.5 * fall.frequency[1] * (1 + 1e-9)
        assert line[at] == pytest.approx(3e-5, rel=1e-2)  # between two lines it reads low


def test_a_record_of_a_few_cycles_has_no_spectra() -> None:
    steady = waterfall(lambda t: t + 0j, lambda t: t, (0.0, 0.2), 2.0 * math.pi * 20.0, 10.0)
    assert steady is None


def test_messages_of_the_mechanics_are_told_in_revolutions_per_minute() -> None:
    said = "from 0 to 104.71976 rad/s, at 10 and 20 rad/s, 3.1415927 rad/s²; 2.5 m/s stay"
    told = "from 0 to 1000 r/min, at 95.493 and 190.99 r/min, 30 (r/min)/s; 2.5 m/s stay"
    assert in_rpm(said) == told
