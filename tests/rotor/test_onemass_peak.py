"""Peaks and amplification factor against the response itself, and where there is none."""

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.errors import ModelError
from reportgen.rotor.onemass import (
    IsotropicSupport,
    OneMassRotor,
    amplification_factor,
    resonance_peak,
    resonance_peaks,
    response,
    small_damping_amplification,
)

UNIT = OneMassRotor(1.0, 1.0, 0.1, 1.0)

bowed = st.builds(
    lambda zeta, bow, angle: OneMassRotor(1.0, 1.0, zeta, 1.0, bow=bow, bow_angle=angle),
    st.floats(0.005, 1.0),
    st.floats(0.05, 3.0),
    st.floats(-3.1, 3.1),
)
supported = st.builds(
    lambda zeta, k, c, m: OneMassRotor(1.0, 1.0, zeta, 1.0, support=IsotropicSupport(k, c, m)),
    st.floats(0.005, 0.6),
    st.floats(0.2, 10.0),
    st.floats(0.01, 10.0),
    st.floats(0.0, 2.0),
)


@settings(deadline=None, max_examples=40)
@given(rotor=bowed | supported)
def test_every_maximum_of_a_dense_sweep_is_a_peak_and_no_other(rotor):
    speeds = np.geomspace(0.02, 60.0, 40001)
    sweep = np.abs(response(rotor, speeds))
    inner = sweep[1:-1]
    # A hump lower than the rounding of its neighbours is none.
    tops = np.flatnonzero((inner > sweep[:-2]) & (inner >= sweep[2:])) + 1
    peaks = [peak for peak in resonance_peaks(rotor) if 0.021 < peak.speed < 58.0]
    assert len(peaks) == len(tops)
    for peak, top in zip(peaks, tops, strict=True):
        assert peak.speed == pytest.approx(speeds[top], rel=5e-4)
        assert peak.amplitude >= sweep[top] * (1 - 1e-12)
        assert peak.amplitude == pytest.approx(sweep[top], rel=1e-3)


@settings(deadline=None, max_examples=40)
@given(rotor=bowed | supported)
def test_half_power_points_have_half_the_power_and_nothing_between(rotor):
    found = amplification_factor(rotor)
    if not found.exists:
        assert found.reason
        assert found.factor is None
        return
    level = resonance_peak(rotor).amplitude / math.sqrt(2.0)
    ends = np.abs(response(rotor, [found.lower, found.upper]))
    assert ends == pytest.approx([level, level], rel=1e-9)
    inside = np.abs(response(rotor, np.linspace(found.lower, found.upper, 500)[1:-1]))
    assert inside.min() > level * (1 - 1e-9)
    width = found.upper - found.lower
    assert found.factor == pytest.approx(found.critical_speed / width, rel=1e-12)


@pytest.mark.parametrize("zeta", [1e-6, 1e-4, 0.01])
def test_factor_tends_to_its_small_damping_form(zeta):
    factor = amplification_factor(replace(UNIT, damping_ratio=zeta)).factor
    # 1/(2ζ) is left by about 4ζ²; rounding of 1/ζ adds to it.
    assert factor == pytest.approx(small_damping_amplification(zeta), rel=5 * zeta**2 + 1e-9)


@pytest.mark.parametrize("zeta", [math.sqrt(0.5), 0.8, 3.0])
def test_heavy_damping_has_no_peak_and_says_why(zeta):
    rotor = replace(UNIT, damping_ratio=zeta)
    peak = resonance_peak(rotor)
    assert (peak.exists, peak.speed, peak.amplitude, peak.phase) == (False, None, None, None)
    assert "1/√2" in peak.reason
    assert amplification_factor(rotor).reason == peak.reason
    assert resonance_peaks(rotor) == ()


def test_without_damping_the_peak_is_unbounded_at_the_critical():
    peak = resonance_peak(replace(UNIT, damping_ratio=0.0))
    assert peak.exists
    assert peak.speed == pytest.approx(1.0)
    assert math.isinf(peak.amplitude)
    assert "without damping" in peak.reason
    assert not amplification_factor(replace(UNIT, damping_ratio=0.0)).exists


def test_undamped_flexible_support_has_two_unbounded_criticals():
    rotor = replace(UNIT, damping_ratio=0.0, support=IsotropicSupport(2.0, 0.0, 0.5))
    peaks = resonance_peaks(rotor)
    # (1 − x)(2 − x/2) = x: x² − 7x + 4 = 0.
    expected = [math.sqrt((7 - math.sqrt(33)) / 2), math.sqrt((7 + math.sqrt(33)) / 2)]
    assert [peak.speed for peak in peaks] == pytest.approx(expected, rel=1e-12)
    assert all(math.isinf(peak.amplitude) for peak in peaks)


def test_upper_half_power_point_is_missing_where_the_response_stays_high():
    found = amplification_factor(replace(UNIT, damping_ratio=0.45))
    assert not found.exists
    assert found.lower is not None
    assert found.upper is None
    assert "above the peak" in found.reason


def test_phase_at_the_peak_is_that_of_the_response():
    peak = resonance_peak(UNIT)
    assert peak.phase == pytest.approx(-np.angle(complex(response(UNIT, peak.speed))), rel=1e-12)


def test_no_excitation_is_refused():
    for function in (resonance_peak, resonance_peaks, amplification_factor):
        with pytest.raises(ModelError, match="neither unbalance nor bow"):
            function(replace(UNIT, eccentricity=0.0))


@pytest.mark.parametrize("zeta", [0.0, -1.0, 0.9])
def test_small_damping_form_is_refused_where_it_has_no_meaning(zeta):
    with pytest.raises(ModelError, match="damping ratio"):
        small_damping_amplification(zeta)
