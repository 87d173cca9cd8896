"""Many rotors at once are each the rotor of the scalar functions."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reportgen.rotor import onemass, passage
from reportgen.rotor.onemass_many import ManyRotors

ZETA = st.floats(1e-3, 0.99)


@given(st.lists(st.tuples(st.floats(1, 1e4), st.floats(1e4, 1e9), ZETA), min_size=1, max_size=5))
def test_peaks_factors_and_forces_are_those_of_each_rotor(values):
    mass, stiffness, zeta = map(np.array, zip(*values, strict=True))
    many = ManyRotors(mass, stiffness, zeta, 2e-5, 100.0)
    for i, (m, k, z) in enumerate(values):
        one = onemass.OneMassRotor(m, k, z, 2e-5, internal_damping=100.0)
        peak, factor = onemass.resonance_peak(one), onemass.amplification_factor(one)
        found = (many.peak_speed()[i], many.peak_amplitude()[i], many.amplification()[i])
        for there, theirs in zip(found, (peak.speed, peak.amplitude, factor.factor), strict=True):
            if theirs is None:
                assert math.isnan(there)
            else:  # a factor is a difference of near speeds
                assert there == pytest.approx(theirs, rel=1e-6)
        speed = 1.3 * one.natural_frequency
        assert many.amplitude(speed)[i] == pytest.approx(abs(onemass.response(one, speed)))
        ground = abs(onemass.bearing_force(one, speed).ground)
        assert many.ground_force(speed)[i] == pytest.approx(ground)
        assert many.sag()[i] == pytest.approx(onemass.static_sag(one))
        assert many.onset()[i] == pytest.approx(onemass.internal_damping_onset(one))


@pytest.mark.parametrize(
    ("start", "end", "rate"), [(0, 260, 3), (260, 20, -2), (0, 150, 0.5), (400, 10, -40)]
)
def test_passages_are_those_of_each_rotor(start, end, rate):
    rng = np.random.default_rng(1)
    mass, stiffness = rng.uniform(50, 200, 40), rng.uniform(1e6, 5e6, 40)
    zeta = rng.uniform(0.005, 0.4, 40)
    size, crossed = ManyRotors(mass, stiffness, zeta, 3e-5).passage(start, end, rate)
    ramp = passage.ConstantAcceleration(float(start), float(end), float(rate))
    for i in range(40):
        one = onemass.OneMassRotor(mass[i], stiffness[i], zeta[i], 3e-5)
        peak = passage.passage_peak(one, ramp)
        assert size[i] == pytest.approx(peak.amplitude, rel=2e-6)
        assert bool(crossed[i]) == peak.crossed
