"""Peak of a passage, the map of peaks, and the acceleration that a limit asks for."""

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.errors import ModelError
from reportgen.rotor.onemass import IsotropicSupport, OneMassRotor, resonance_peak
from reportgen.rotor.passage import (
    AT_REST,
    ConstantAcceleration,
    PiecewiseAcceleration,
    WhirlState,
    even_times,
    passage,
    passage_peak,
)
from reportgen.rotor.passage_map import least_acceleration, peak_map

UNIT = OneMassRotor(1.0, 1.0, 0.05, 1.0)
UP = ConstantAcceleration(0.0, 2.5, 0.002)


@settings(deadline=None, max_examples=20)
@given(
    zeta=st.floats(0.0, 0.9),
    log=st.floats(-3.5, 0.5),
    start=st.floats(0.0, 3.0),
    end=st.floats(0.0, 3.0),
    bow=st.floats(0.0, 2.0),
    hold=st.floats(0.0, 20.0),
    push=st.floats(-3.0, 3.0),
)
def test_no_instant_exceeds_the_peak_and_one_reaches_it(zeta, log, start, end, bow, hold, push):
    if abs(end - start) < 0.05:
        end = start + 0.5
    sign = math.copysign(10.0**log, end - start)
    programme = ConstantAcceleration(start, end, sign, hold=hold)
    rotor = replace(UNIT, damping_ratio=zeta, bow=bow, bow_angle=2.0)
    state = WhirlState(push, 1j * push)
    peak = passage_peak(rotor, programme, state)
    sampled = passage(rotor, programme, even_times(programme, 8001), state).amplitude
    assert sampled.max() <= peak.amplitude * (1 + 1e-9)
    at_peak = passage(rotor, programme, [peak.time], state)
    assert at_peak.amplitude[0] == pytest.approx(peak.amplitude, rel=1e-9)
    assert at_peak.speed[0] == pytest.approx(peak.speed, rel=1e-9, abs=1e-12)


def test_run_up_peaks_late_coast_down_early_in_speed_and_both_below_the_steady_peak():
    up = passage_peak(UNIT, UP)
    down = passage_peak(UNIT, ConstantAcceleration(2.5, 0.0, -0.002))
    steady = resonance_peak(UNIT)
    assert down.speed < steady.speed < up.speed
    for peak in (up, down):
        assert peak.crossed
        assert peak.reason == ""
        assert peak.steady_peak == steady.amplitude
        assert peak.ratio == pytest.approx(peak.amplitude / steady.amplitude)
        assert 0.5 < peak.ratio < 1.0


def test_very_slow_passage_reaches_the_steady_peak():
    peak = passage_peak(UNIT, replace(UP, acceleration=1e-8))
    assert peak.ratio == pytest.approx(1.0, abs=1e-6)


@pytest.mark.parametrize(
    ("start", "end", "a"), [(0.0, 0.9, 0.01), (2.5, 1.2, -0.01), (1.2, 3.0, 0.01)]
)
def test_a_programme_that_never_reaches_the_critical_is_no_passage(start, end, a):
    peak = passage_peak(UNIT, ConstantAcceleration(start, end, a))
    assert not peak.crossed
    assert "not within the programme's" in peak.reason


def test_a_programme_that_ends_before_the_peak_says_so_and_a_hold_finds_it():
    cut = ConstantAcceleration(0.0, 1.02, 0.01)
    peak = passage_peak(UNIT, cut)
    assert not peak.crossed
    assert "end of the programme" in peak.reason
    held = passage_peak(UNIT, replace(cut, hold=200.0))
    assert held.amplitude > peak.amplitude


def test_heavy_damping_has_no_critical_to_pass():
    peak = passage_peak(replace(UNIT, damping_ratio=0.8), UP)
    assert not peak.crossed
    assert peak.steady_peak is None
    assert peak.ratio is None
    assert "no critical speed" in peak.reason


def test_passage_faster_than_the_whirl_can_follow_keeps_the_start_amplitude():
    peak = passage_peak(UNIT, ConstantAcceleration(1.6, 0.0, -5.0))
    assert peak.crossed
    assert "at the start" in peak.reason


def test_only_the_criticals_in_range_count():
    rotor = replace(UNIT, damping_ratio=0.01, support=IsotropicSupport(2.0, 0.02, 0.5))
    peak = passage_peak(rotor, ConstantAcceleration(0.0, 1.6, 0.002))
    assert peak.crossed
    assert "outside the programme" in peak.reason


def test_undamped_dwell_on_the_critical_peaks_at_its_end():
    rotor = replace(UNIT, damping_ratio=0.0)
    dwell = PiecewiseAcceleration([(0.0, 0.5), (10.0, 1.0), (40.0, 1.0)])
    peak = passage_peak(rotor, dwell, AT_REST)
    assert peak.time == pytest.approx(40.0)
    assert not peak.crossed


def test_no_excitation_is_refused():
    with pytest.raises(ModelError, match="neither unbalance nor bow"):
        passage_peak(replace(UNIT, eccentricity=0.0), UP)


def test_endless_undamped_ringing_is_refused_with_what_to_change():
    rotor = replace(UNIT, damping_ratio=0.0)
    with pytest.raises(ModelError, match="shorten the dwell"):
        passage_peak(rotor, ConstantAcceleration(0.0, 1.9, 0.1, hold=1e9))


@pytest.mark.parametrize("sign", [1.0, -1.0])
@pytest.mark.parametrize("size", [1e-8, 1e-5, 1e-3, 0.05])
def test_map_holds_the_peaks_found_one_by_one(sign, size):
    zetas = [0.0, 1e-3, 0.03, 0.2, 0.6]
    found = peak_map(zetas, [sign * size])[:, 0]
    for zeta, value in zip(zetas, found, strict=True):
        beyond = 1.5 / math.sqrt(1 - 2 * zeta**2) + 8 * math.sqrt(size) + 0.5
        ends = (0.0, beyond) if sign > 0 else (beyond, 0.0)
        one = passage_peak(
            replace(UNIT, damping_ratio=zeta), ConstantAcceleration(*ends, sign * size)
        )
        assert value == pytest.approx(one.amplitude, rel=1e-6)


def test_map_falls_with_damping_and_scales_with_the_natural_frequency():
    zetas, accelerations = np.linspace(0.0, 0.3, 7), np.geomspace(1e-5, 1e-2, 5)
    found = peak_map(zetas, accelerations)
    assert found.shape == (7, 5)
    assert np.all(np.diff(found, axis=0) < 0.0)
    assert np.all(np.diff(found[0]) < 0.0)
    scaled = peak_map(zetas, accelerations * 170.0**2, natural_frequency=170.0)
    assert scaled == pytest.approx(found, rel=1e-9)


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (([0.8], [1e-3]), "damping ratios from 0 to 0.7"),
        (([0.1], [1e-12]), "map covers"),
        (([0.1], [0.5]), "map covers"),
        (([0.1], [-0.2]), "map covers"),
        (([0.1], [1e-3, -1e-3]), "not both signs"),
        (([[0.1]], [1e-3]), "one-dimensional"),
        (([0.1], [math.nan]), "finite"),
        (([0.1], [1e-3], 1.0, 1.5), "must lie below"),
        (([0.1], [-1e-3], 1.0, 0.5), "must lie above"),
        (([0.1], [1e-3], 0.0), "natural frequency"),
    ],
)
def test_map_refuses_what_it_does_not_cover(arguments, words):
    with pytest.raises(ModelError, match=words):
        peak_map(*arguments)


@pytest.mark.parametrize(("start", "end"), [(0.0, 2.5), (2.5, 0.0)])
def test_least_acceleration_is_where_the_peak_meets_the_limit(start, end):
    found = least_acceleration(UNIT, 6.0, start, end)
    assert found.exists
    assert found.peak.amplitude == pytest.approx(6.0, rel=1e-6)
    assert math.copysign(1.0, found.acceleration) == math.copysign(1.0, end - start)
    for factor, below in ((1.05, True), (2.0, True), (0.95, False)):
        ramp = ConstantAcceleration(start, end, factor * found.acceleration, hold=10.0)
        assert (passage_peak(UNIT, ramp).amplitude < 6.0) is below


def test_least_acceleration_inverts_the_map():
    found = least_acceleration(UNIT, 6.0, 0.0, 2.5)
    assert peak_map(0.05, found.acceleration)[0, 0] == pytest.approx(6.0, rel=1e-5)


def test_a_limit_above_the_steady_peak_asks_for_no_acceleration():
    found = least_acceleration(UNIT, 11.0, 0.0, 2.5)
    assert found.acceleration == 0.0
    assert "every slower acceleration" in found.reason


def test_a_limit_just_above_the_steady_peak_counts_the_overshoot_of_a_slow_passage():
    limit = 10.02
    assert resonance_peak(UNIT).amplitude < limit
    found = least_acceleration(UNIT, limit, 0.0, 2.5)
    assert found.peak.amplitude == pytest.approx(limit, rel=1e-6)
    slower = ConstantAcceleration(0.0, 2.5, 0.8 * found.acceleration)
    assert passage_peak(UNIT, slower).amplitude > limit


def test_a_limit_that_no_acceleration_meets_is_told():
    found = least_acceleration(UNIT, 1.2, 0.0, 2.5)
    assert not found.exists
    assert found.acceleration is None
    assert "exceeds the limit" in found.reason


def test_least_acceleration_refuses_what_is_no_passage():
    with pytest.raises(ModelError, match="this is no passage"):
        least_acceleration(UNIT, 5.0, 0.0, 0.9)
    with pytest.raises(ModelError, match="no critical speed"):
        least_acceleration(replace(UNIT, damping_ratio=0.9), 5.0, 0.0, 2.0)
    with pytest.raises(ModelError, match="limit"):
        least_acceleration(UNIT, 0.0, 0.0, 2.0)
