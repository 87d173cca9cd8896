import dataclasses
import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.criteria import Limit, project_limit, project_source
from reportgen.errors import ModelError

SPEC = project_source("Specification 7", "4.2", "2024")
sizes = st.floats(1e-9, 1e9)
numbers = st.one_of(st.just(0.0), sizes, sizes.map(lambda size: -size))


def limit(sense):
    return Limit("Something", sense, "ratio", SPEC, "as stated", r"x \le y", "none")


@pytest.mark.parametrize(
    ("sense", "value", "bound", "margin", "used"),
    [
        ("at most", 75.0, 100.0, 0.25, 0.75),
        ("at most", 150.0, 100.0, -0.5, 1.5),
        ("at least", 150.0, 100.0, 0.5, 2 / 3),
        ("at least", 50.0, 100.0, -0.5, 2.0),
        ("at most", 100.0, 100.0, 0.0, 1.0),
    ],
)
def test_margin_and_share_used(sense, value, bound, margin, used):
    outcome = limit(sense).judge(value, bound)
    assert outcome.margin == pytest.approx(margin)
    assert outcome.share_used == pytest.approx(used)
    assert outcome.verdict == ("meets" if margin >= 0 else "does not meet")


def test_a_difference_of_rounding_is_none():
    speed = 1000.0 * math.pi / 30.0
    back = speed * 30.0 / math.pi * math.pi / 30.0
    for sense in ("at most", "at least"):
        for factor in (1 - 1e-12, 1 + 1e-12):
            outcome = limit(sense).judge(back * factor, speed)
            assert (outcome.verdict, outcome.margin) == ("meets", 0.0)
            assert (
                limit(sense).judge(back * factor, speed, strictly=True).verdict == "does not meet"
            )


def test_a_limit_of_zero_has_a_verdict_and_no_share():
    outcome = limit("at most").judge(0.5, 0.0)
    assert (outcome.verdict, outcome.margin, outcome.share_used) == ("does not meet", None, None)
    assert limit("at most").judge(0.0, 0.0).verdict == "meets"
    assert limit("at least").judge(0.5, 0.0).verdict == "meets"


def test_a_share_too_large_for_a_number_is_left_out():
    outcome = limit("at most").judge(1e9, 5e-324)
    assert (outcome.verdict, outcome.margin, outcome.share_used) == ("does not meet", None, None)


def test_what_is_not_there_meets_its_limit_without_a_number():
    outcome = limit("at least").met_for_want_of("there is none")
    assert (outcome.verdict, outcome.value, outcome.limit, outcome.margin) == (
        "meets",
        None,
        None,
        None,
    )
    assert outcome.reason == "there is none"


def test_an_outcome_carries_its_source_and_cannot_be_altered():
    outcome = limit("at most").judge(1.0, 2.0)
    cited = outcome.source, outcome.clause, outcome.edition, outcome.basis
    assert cited == ("Specification 7", "4.2", "2024", "project")
    assert outcome.caution == ""
    with pytest.raises(dataclasses.FrozenInstanceError):
        outcome.verdict = "meets"


@pytest.mark.parametrize("bad", [math.nan, math.inf, -math.inf])
def test_no_number_is_refused(bad):
    for judge in (limit("at most").judge, limit("at least").judge):
        with pytest.raises(ModelError, match="no number"):
            judge(bad, 1.0)
        with pytest.raises(ModelError, match="no number"):
            judge(1.0, bad)
    with pytest.raises(ModelError):
        limit("at most").not_assessed("why", value=bad)
    with pytest.raises(ModelError):
        limit("at most").not_assessed("why", limit=bad)


@settings(deadline=None, max_examples=100)
@given(numbers, numbers, st.sampled_from(["at most", "at least"]), st.floats(1e-3, 1e3))
def test_the_verdict_follows_the_sign_of_the_margin_in_any_unit(value, bound, sense, unit):
    outcome = limit(sense).judge(value, bound)
    if outcome.margin is not None:
        assert outcome.verdict == ("meets" if outcome.margin >= 0 else "does not meet")
    if outcome.margin is not None and abs(outcome.margin) > 1e-6:
        other = limit(sense).judge(value * unit, bound * unit)
        assert other.verdict == outcome.verdict
        assert other.margin == pytest.approx(outcome.margin)
    if outcome.share_used is not None and bound > 0 and value > 0 and outcome.margin:
        assert (outcome.share_used <= 1) == (outcome.verdict == "meets")


def project(value, bound, **options):
    stated = {"sense": "at most", "quantity": "force", "source": SPEC, "title": "Bearing force"}
    return project_limit(value, bound, **(stated | options))


def test_a_project_limits_any_result():
    assert project(2900.0, 3000.0).verdict == "meets"
    assert project(2900.0, 3000.0, sense="at least").verdict == "does not meet"
    assert project(-5.0, -3.0).verdict == "meets"
    assert project(None, 3000.0, absent="there is no peak").reason == "there is no peak"
    assert project(2900.0, None).verdict == "not assessed"


def test_a_project_limit_mixes_no_amplitude_measures():
    with pytest.raises(ModelError):
        project(1.0, 3.0, measure="0-peak", limit_measure="peak-to-peak")
    with pytest.raises(ModelError):
        project(1.0, 3.0, measure="0-peak", harmonic=True)
    both = {"measure": "0-peak", "limit_measure": "peak-to-peak", "harmonic": True}
    assert project(1.0, 1.5, **both).verdict == "does not meet"


def test_a_project_limit_of_no_sense_is_refused():
    with pytest.raises(ModelError, match="about"):
        project(1.0, 2.0, sense="about")
    with pytest.raises(ModelError):
        project(math.nan, 2.0)
    with pytest.raises(ModelError):
        project(None, math.inf)
