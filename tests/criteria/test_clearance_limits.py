import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.criteria import clearance_share, contact
from reportgen.errors import ModelError

lengths = st.floats(0.0, 1e-3)


def test_every_part_takes_its_share_of_the_clearance():
    outcome = clearance_share(150e-6, 400e-6, sag=60e-6, runout=10e-6, bow=20e-6)
    assert outcome.value == pytest.approx(240e-6)
    assert outcome.limit == pytest.approx(300e-6)
    assert (outcome.verdict, outcome.margin) == ("meets", pytest.approx(0.2))
    assert clearance_share(220e-6, 400e-6, sag=60e-6, bow=30e-6).verdict == "does not meet"


def test_what_is_counted_is_told():
    assert "peak + sag (no runout, no bow)" in clearance_share(1e-6, 4e-4, sag=6e-5).how
    assert clearance_share(1e-6, 4e-4, sag=6e-5, runout=1e-6, bow=1e-6).how.endswith("runout + bow")


@pytest.mark.parametrize("part", ["sag", "runout", "bow"])
def test_a_part_that_is_not_known_is_not_taken_for_zero(part):
    for judge in (clearance_share, contact):
        outcome = judge(150e-6, 400e-6, **{part: None})
        assert outcome.verdict == "not assessed"
        assert part in outcome.reason


def test_a_clearance_or_peak_not_known_is_not_assessed():
    assert clearance_share(150e-6, None).verdict == "not assessed"
    assert clearance_share(None, 400e-6).verdict == "not assessed"
    assert clearance_share(None, 400e-6).limit == pytest.approx(300e-6)
    assert clearance_share(150e-6, None).value == pytest.approx(150e-6)
    assert contact(None, 400e-6).limit == 400e-6


def test_a_touch_voids_the_linear_result_and_says_so():
    assert "void" in clearance_share(400e-6, 400e-6).reason
    assert clearance_share(350e-6, 400e-6).reason == ""
    assert contact(400e-6, 400e-6).verdict == "does not meet"
    assert "void" in contact(400e-6, 400e-6).reason
    assert contact(399e-6, 400e-6).reason == ""
    assert contact(399e-6, 400e-6).verdict == "meets"


def test_a_peak_to_peak_amplitude_is_halved_only_where_the_motion_is_harmonic():
    outcome = clearance_share(300e-6, 400e-6, measure="peak-to-peak", harmonic=True)
    assert outcome.value == pytest.approx(150e-6)
    with pytest.raises(ModelError):
        clearance_share(300e-6, 400e-6, measure="peak-to-peak")


@pytest.mark.parametrize("allowed", [0.0, 75.0, -0.1, math.nan])
def test_a_share_that_is_none_is_refused(allowed):
    with pytest.raises(ModelError):
        clearance_share(1e-6, 1e-3, allowed=allowed)


@pytest.mark.parametrize("bad", [-1e-6, math.nan, math.inf])
def test_a_length_that_is_none_is_refused(bad):
    for name in ("sag", "runout", "bow"):
        with pytest.raises(ModelError):
            clearance_share(1e-6, 1e-3, **{name: bad})
    with pytest.raises(ModelError):
        clearance_share(bad, 1e-3)
    with pytest.raises(ModelError):
        contact(1e-6, 0.0)


@settings(deadline=None, max_examples=60)
@given(lengths, lengths, lengths, st.floats(1e-6, 1e-2), st.floats(0.01, 1.0))
def test_contact_never_meets_the_share(peak, sag, bow, clearance, allowed):
    touching = contact(peak, clearance, sag=sag, bow=bow)
    share = clearance_share(peak, clearance, sag=sag, bow=bow, allowed=allowed)
    if touching.margin < -1e-8:
        assert share.verdict == "does not meet"
    for outcome in (touching, share):
        if outcome.margin:
            assert outcome.verdict == ("meets" if outcome.margin > 0 else "does not meet")
