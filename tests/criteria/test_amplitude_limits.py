import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.criteria import (
    amplitude_at_speed,
    convert_amplitude,
    project_source,
    running_vibration,
    running_vibration_limit,
)
from reportgen.errors import ModelError

SPEC = project_source("Specification 7")
MEASURES = ["0-peak", "peak-to-peak", "r.m.s."]


def judge(amplitude, limit, measure="0-peak", limit_measure="peak-to-peak", harmonic=True):
    return amplitude_at_speed(
        amplitude,
        limit,
        measure=measure,
        limit_measure=limit_measure,
        harmonic=harmonic,
        source=SPEC,
    )


def test_an_amplitude_is_judged_in_the_measure_of_its_limit():
    outcome = judge(28e-6, 60e-6)
    assert outcome.value == pytest.approx(56e-6)
    assert (outcome.verdict, outcome.measure) == ("meets", "peak-to-peak")
    assert outcome.margin == pytest.approx(4 / 60)
    assert outcome.share_used == pytest.approx(56 / 60)
    assert judge(31e-6, 60e-6).verdict == "does not meet"


def test_measures_are_not_mixed_where_the_motion_is_not_harmonic():
    with pytest.raises(ModelError, match="0-peak is compared with one stated peak-to-peak"):
        judge(28e-6, 60e-6, harmonic=False)
    assert judge(28e-6, 60e-6, "0-peak", "0-peak", harmonic=False).verdict == "meets"


def test_an_amplitude_of_no_measure_is_refused():
    with pytest.raises(ModelError, match="'none'"):
        convert_amplitude(1.0, "none", "0-peak", harmonic=True)


def test_what_is_not_known_is_not_assessed():
    unknown = judge(None, 60e-6)
    assert (unknown.verdict, unknown.limit, unknown.margin) == ("not assessed", 60e-6, None)
    assert judge(28e-6, None).verdict == "not assessed"
    assert running_vibration(None, 100.0, measure="0-peak", harmonic=True).verdict == "not assessed"


@pytest.mark.parametrize("bad", [math.nan, math.inf, -1.0])
def test_no_number_is_refused(bad):
    with pytest.raises(ModelError):
        judge(bad, 60e-6)
    with pytest.raises(ModelError):
        judge(28e-6, bad)
    with pytest.raises(ModelError):
        running_vibration_limit(bad)


@settings(deadline=None, max_examples=40)
@given(st.floats(0, 1e3), st.sampled_from(MEASURES), st.sampled_from(MEASURES))
def test_conversion_and_back_changes_nothing(amplitude, given_as, wanted):
    there = convert_amplitude(amplitude, given_as, wanted, harmonic=True)
    assert convert_amplitude(there, wanted, given_as, harmonic=True) == pytest.approx(amplitude)


@settings(deadline=None, max_examples=40)
@given(st.floats(1.0, 1e4), st.floats(1.0, 1e4))
def test_the_running_limit_never_grows_with_speed(one, other):
    slow, fast = sorted((one, other))
    assert running_vibration_limit(slow) >= running_vibration_limit(fast)
