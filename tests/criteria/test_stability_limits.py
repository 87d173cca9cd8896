import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.criteria import anticipated_cross_coupling, log_decrement, speed_above_threshold
from reportgen.errors import ModelError

above_zero = st.floats(1e-3, 1e3)


@pytest.mark.parametrize(
    ("decrement", "verdict"), [(0.2, "meets"), (0.1, "meets"), (0.09, "does not meet")]
)
def test_the_decrement_is_judged_with_the_applied_cross_coupling(decrement, verdict):
    assert log_decrement(decrement, cross_coupling=2e6).verdict == verdict


def test_a_decrement_without_a_word_on_cross_coupling_is_not_assessed():
    outcome = log_decrement(0.5, cross_coupling=None)
    assert (outcome.verdict, outcome.value) == ("not assessed", 0.5)
    assert "cross-coupling" in outcome.reason
    assert log_decrement(None, cross_coupling=1e6).verdict == "not assessed"


def test_what_a_decrement_means_is_said_beside_it():
    assert "unstable" in log_decrement(-0.01, cross_coupling=1e6).reason
    assert "no cross-coupling acts" in log_decrement(0.2, cross_coupling=0.0).reason
    assert log_decrement(0.2, cross_coupling=1.0).reason == ""


def test_how_the_threshold_is_found_is_told():
    outcome = speed_above_threshold(240.0, 200.0, margin=0.2)
    assert outcome.how == "20 % above the highest speed reached"
    assert "1.2" in outcome.how_latex


def test_the_threshold_keeps_its_margin_from_the_highest_speed():
    assert speed_above_threshold(240.0, 200.0, margin=0.2).verdict == "meets"
    assert speed_above_threshold(239.0, 200.0, margin=0.2).verdict == "does not meet"
    assert speed_above_threshold(200.0, 200.0).verdict == "does not meet"
    outcome = speed_above_threshold(None, 200.0, absent="no internal damping is stated")
    assert (outcome.verdict, outcome.reason) == ("not assessed", "no internal damping is stated")


@pytest.mark.parametrize("bad", [math.nan, math.inf])
def test_no_number_is_refused(bad):
    for call in (
        lambda: log_decrement(bad, cross_coupling=1.0),
        lambda: log_decrement(0.2, cross_coupling=bad),
        lambda: log_decrement(0.2, cross_coupling=1.0, required=bad),
        lambda: speed_above_threshold(bad, 200.0),
        lambda: speed_above_threshold(240.0, bad),
        lambda: speed_above_threshold(240.0, 200.0, margin=bad),
        lambda: anticipated_cross_coupling(bad, 1.0, 1.0, 1.0),
    ):
        with pytest.raises(ModelError):
            call()


@pytest.mark.parametrize("place", [1, 2, 3])
def test_a_stage_of_no_size_or_speed_is_refused(place):
    stage = [1e6, 1000.0, 0.4, 0.02]
    stage[place] = 0.0
    with pytest.raises(ModelError):
        anticipated_cross_coupling(*stage)


@settings(deadline=None, max_examples=40)
@given(above_zero, above_zero, above_zero, above_zero, above_zero, above_zero)
def test_the_cross_coupling_depends_on_power_and_speed_by_the_torque_only(p, w, d, h, ratio, k):
    one = anticipated_cross_coupling(p, w, d, h, density_ratio=ratio)
    other = anticipated_cross_coupling(k * p, k * w, d, h, density_ratio=ratio)
    assert one == pytest.approx(other)
    more = anticipated_cross_coupling(k * p, w, d, h, density_ratio=ratio)
    assert more == pytest.approx(k * one)
