import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.criteria import (
    AmplificationMargin,
    Critical,
    FlatMargin,
    half_power_bands_overlap,
    project_source,
    required_margin,
    separation_margins,
)
from reportgen.errors import ModelError

RPM = math.pi / 30.0
SPEC = project_source("Specification 7", "4.2")
FLAT = FlatMargin(0.20, 0.20, SPEC)
BY_FACTOR = AmplificationMargin()

factors = st.floats(0.01, 1e6)
speeds = st.floats(10.0, 4000.0)


def judge(criticals, rule, minimum=900 * RPM, maximum=1500 * RPM, **options):
    return separation_margins(criticals, minimum, maximum, rule, **options)


def one(speed, factor, rule, **options):
    (outcome,) = judge([(speed * RPM, factor)], rule, **options)
    return outcome


@settings(deadline=None, max_examples=60)
@given(factors, factors, st.sampled_from(["below", "above", "within"]))
def test_a_larger_amplification_factor_never_needs_a_smaller_margin(one_af, other_af, side):
    low, high = sorted((one_af, other_af))
    assert required_margin(low, side) <= required_margin(high, side)


@pytest.mark.parametrize("factor", [0.3, 1.0, 1.5, 1.5 + 1e-12, 2.4999])
def test_no_margin_is_needed_below_2_5_and_the_pole_at_1_5_is_never_met(factor):
    assert required_margin(factor, "below") == 0.0
    assert required_margin(factor, "above") == 0.0


def test_the_margin_is_capped():
    assert required_margin(1e9, "below") == 0.16
    assert required_margin(1e9, "above") == 0.26


@pytest.mark.parametrize("factor", [0.0, -3.0, math.nan, math.inf])
def test_an_impossible_amplification_factor_is_refused(factor):
    with pytest.raises(ModelError, match="amplification factor"):
        one(700, factor, BY_FACTOR)


@pytest.mark.parametrize(
    ("critical", "verdict", "kept"),
    [
        (700, "meets", 200 / 900),
        (720, "meets", 0.2),
        (721, "does not meet", 179 / 900),
        (1799, "does not meet", 299 / 1500),
        (1800, "meets", 0.2),
        (1900, "meets", 400 / 1500),
    ],
)
def test_a_flat_margin_is_a_share_of_the_nearer_end_of_the_range(critical, verdict, kept):
    outcome = one(critical, None, FLAT)
    assert outcome.verdict == verdict
    assert outcome.value == pytest.approx(kept)
    assert outcome.limit == pytest.approx(0.2)
    assert (outcome.basis, outcome.source, outcome.clause) == ("project", "Specification 7", "4.2")


@pytest.mark.parametrize("critical", [900, 1200, 1500])
@pytest.mark.parametrize("factor", [2.5, 8.0, None])
@pytest.mark.parametrize("rule", [FLAT, BY_FACTOR, FlatMargin(0.0, 0.0, SPEC)])
def test_a_critical_within_the_range_ends_included_does_not_meet(critical, factor, rule):
    outcome = one(critical, factor, rule)
    assert outcome.verdict == "does not meet"
    assert outcome.value == 0.0
    assert "within the operating range" in outcome.reason


def test_running_exactly_on_a_critical_of_a_machine_of_one_speed_does_not_meet():
    (outcome,) = separation_margins([(1480 * RPM, 9.0)], 1480 * RPM, 1480 * RPM, BY_FACTOR)
    assert outcome.verdict == "does not meet"
    assert outcome.margin == -1.0


def test_a_critically_damped_speed_within_the_range_meets_only_the_rule_that_says_so():
    assert one(1200, 2.0, BY_FACTOR).verdict == "meets"
    assert one(1200, 2.0, FLAT).verdict == "does not meet"
    assert one(1200, 2.0, FlatMargin(0.2, 0.2, SPEC, critically_damped=2.5)).verdict == "meets"


def test_the_margin_by_amplification_factor_is_judged_on_each_side():
    below, above = judge([(700 * RPM, 4.0), (1700 * RPM, 4.0)], BY_FACTOR)
    assert below.limit == pytest.approx(0.17 * 0.6)
    assert above.limit == pytest.approx(0.10 + 0.17 * 0.6)
    assert (below.verdict, above.verdict) == ("meets", "does not meet")
    assert above.basis == "from memory"
    assert "edition you hold" in above.caution


def test_a_critical_between_maximum_continuous_and_trip_speed_does_not_meet():
    rule = FlatMargin(0.05, 0.05, SPEC)
    assert one(1600, 9.0, rule).verdict == "meets"
    assert one(1600, 9.0, rule, trip=1650 * RPM).verdict == "does not meet"
    assert one(1650, 9.0, rule, trip=1650 * RPM).verdict == "does not meet"
    assert one(1660, 9.0, rule, trip=1650 * RPM).verdict == "meets"
    assert one(1600, 2.0, BY_FACTOR, trip=1650 * RPM).verdict == "meets"


def test_an_unknown_factor_costs_no_verdict_that_does_not_depend_on_it():
    assert one(1700, None, BY_FACTOR).verdict == "not assessed"
    assert "not known" in one(1700, None, BY_FACTOR).reason
    assert one(1900, None, BY_FACTOR).verdict == "meets"
    assert one(1700, None, BY_FACTOR, conservative=True).verdict == "does not meet"


def test_criticals_closer_than_their_half_power_bands_have_no_factor_to_judge_by():
    near, far = Critical(700.0, 5.0), Critical(740.0, 12.0)
    assert half_power_bands_overlap(near, far)
    assert not half_power_bands_overlap(near, Critical(900.0, 12.0))
    pair = [(820 * RPM, 8.0), (850 * RPM, 8.0)]
    first, second = judge(pair, BY_FACTOR)
    assert first.verdict == second.verdict == "not assessed"
    assert "half-power bands" in first.reason
    assert [o.verdict for o in judge(pair, BY_FACTOR, conservative=True)] == ["does not meet"] * 2
    assert [o.verdict for o in judge(pair, FLAT)] == ["does not meet"] * 2


def test_overlapping_criticals_beyond_the_largest_margin_meet():
    pair = [(2000 * RPM, 8.0), (2020 * RPM, 8.0)]
    assert [o.verdict for o in judge(pair, BY_FACTOR)] == ["meets", "meets"]


def test_overlapping_criticals_in_the_range_do_not_meet_unless_their_factors_would_excuse_them():
    sharp = [(1200 * RPM, 8.0), (1220 * RPM, 8.0)]
    damped = [(1200 * RPM, 2.0), (1220 * RPM, 2.0)]
    assert [o.verdict for o in judge(sharp, BY_FACTOR)] == ["does not meet"] * 2
    assert "critically damped" not in judge(sharp, BY_FACTOR)[0].reason
    assert [o.verdict for o in judge(damped, BY_FACTOR)] == ["not assessed"] * 2


def test_no_critical_is_a_finding_only_where_one_was_looked_for():
    (nothing,) = judge([], BY_FACTOR)
    assert nothing.verdict == "not assessed"
    below, above = judge([], BY_FACTOR, searched=(0.0, 3000 * RPM))
    assert (below.verdict, above.verdict) == ("meets", "meets")
    below, above = judge([], BY_FACTOR, searched=(0.0, 1600 * RPM))
    assert (below.verdict, above.verdict) == ("meets", "not assessed")


def test_a_search_that_stops_short_is_named_beside_the_criticals_found():
    outcomes = judge([(700 * RPM, 9.0)], BY_FACTOR, searched=(0.0, 1600 * RPM))
    assert [o.verdict for o in outcomes] == ["meets", "not assessed"]
    assert len(judge([(700 * RPM, 9.0)], BY_FACTOR, searched=(0.0, 3000 * RPM))) == 1


def test_a_search_must_reach_far_enough_on_both_sides():
    assert [o.verdict for o in judge([], BY_FACTOR, searched=(757 * RPM, None))] == ["not assessed"]
    (below,) = judge([], BY_FACTOR, searched=(750 * RPM, None))
    assert (below.verdict, below.value) == ("meets", pytest.approx(150 / 900))
    assert "from 750 r/min up" in below.reason
    below, above = judge([], FLAT, searched=(720 * RPM, 1800 * RPM))
    assert (below.verdict, above.verdict) == ("meets", "meets")
    assert "from 720 r/min to 1800 r/min" in above.reason
    _, above = judge([], FLAT, searched=(0.0, 1900 * RPM), trip=2000 * RPM)
    assert above.verdict == "not assessed"
    assert above.limit == pytest.approx(500 / 1500)
    assert judge([], FLAT, searched=(0.0, 2000 * RPM), trip=2000 * RPM)[1].verdict == "meets"


def test_a_method_that_knows_all_criticals_may_find_none():
    (nothing,) = judge([], BY_FACTOR, searched=(0.0, None))
    assert (nothing.verdict, nothing.value, nothing.limit) == ("meets", None, None)
    assert "no critical speed" in nothing.reason
    assert len(judge([(700 * RPM, 9.0)], BY_FACTOR, searched=(0.0, None))) == 1


@pytest.mark.parametrize("span", [(-1.0, 9.0), (9.0, 1.0), (0.0, 0.0), (math.nan, 1.0)])
def test_a_search_that_is_none_is_refused(span):
    with pytest.raises(ModelError):
        judge([], BY_FACTOR, searched=span)


@pytest.mark.parametrize(
    ("critical", "factor", "rule", "words", "formula"),
    [
        (700, 4.0, BY_FACTOR, "17·(1 − 1/(AF − 1.5)) % with AF = 4, at most 16 %", "16"),
        (2000, 4.0, BY_FACTOR, "10 + 17·(1 − 1/(AF − 1.5)) % with AF = 4, at most 26 %", "10 + 17"),
        (1600, 2.0, BY_FACTOR, "none for an amplification factor below 2.5 (AF = 2)", ""),
        (1600, 2.5, BY_FACTOR, "with AF = 2.5", "26"),
        (1700, None, BY_FACTOR, "by amplification factor, at most 26 %", "26"),
        (1700, 9.0, FLAT, "20 %, as stated", ""),
        (
            1700,
            2.4,
            FlatMargin(0.2, 0.2, SPEC, critically_damped=2.5),
            "none for an amplification factor below 2.5 (AF = 2.4)",
            "",
        ),
    ],
)
def test_how_a_margin_is_found_is_told(critical, factor, rule, words, formula):
    outcome = one(critical, factor, rule)
    assert outcome.how.startswith(words) or words in outcome.how
    assert formula in outcome.how_latex
    assert bool(outcome.how_latex) == bool(formula)
    assert ("10 + " in outcome.how) == ("10 + " in words or "AF = 2.5" in words)


def test_where_a_critical_lies_is_told():
    assert "1650 r/min lies between" in one(1650, 9.0, FLAT, trip=1650 * RPM).reason
    assert one(1660, 9.0, FlatMargin(0.1, 0.1, SPEC), trip=1650 * RPM).reason == ""
    assert "12345 r/min" in separation_margins([(12345 * RPM, 9.0)], 9e2, 2e3, FLAT)[0].reason
    assert one(700, 9.0, FLAT).reason == ""
    assert "minimum operating speed" in one(700, 9.0, FLAT).how
    assert "maximum continuous speed" in one(2000, 9.0, FLAT).how


def test_a_factor_at_the_bound_is_not_critically_damped():
    rule = FlatMargin(0.2, 0.2, SPEC, critically_damped=3.0)
    assert one(1200, 3.0, rule).verdict == "does not meet"
    assert one(1200, 2.99, rule).verdict == "meets"
    assert one(1600, None, rule).verdict == "not assessed"


def test_each_side_of_a_flat_rule_has_its_own_margin():
    rule = FlatMargin(0.10, 0.30, SPEC)
    below, above = judge([(800 * RPM, 9.0), (1900 * RPM, 9.0)], rule)
    assert (below.verdict, above.verdict) == ("meets", "does not meet")
    assert one(1200, 9.0, rule).limit == pytest.approx(0.30)


@pytest.mark.parametrize("bad", [-0.1, math.nan])
def test_a_flat_margin_that_is_none_is_refused(bad):
    for options in ((bad, 0.2), (0.2, bad)):
        with pytest.raises(ModelError):
            FlatMargin(*options, SPEC)
    with pytest.raises(ModelError):
        FlatMargin(0.2, 0.2, SPEC, critically_damped=bad)


def test_criticals_are_named_in_the_order_of_speed_unless_they_have_names():
    outcomes = judge([(1900 * RPM, 9.0), Critical(500 * RPM, 9.0, "first bending")], BY_FACTOR)
    assert outcomes[0].title == "Separation margin, first bending"
    assert outcomes[1].title == "Separation margin, critical speed 2"


@pytest.mark.parametrize(
    ("minimum", "maximum", "trip"), [(2.0, 1.0, None), (1.0, 2.0, 1.5), (0.0, 1.0, None)]
)
def test_speeds_out_of_order_are_refused(minimum, maximum, trip):
    with pytest.raises(ModelError):
        separation_margins([], minimum, maximum, FLAT, trip=trip)


@settings(deadline=None, max_examples=80)
@given(
    st.lists(st.tuples(speeds, st.one_of(st.none(), factors)), max_size=4),
    speeds,
    speeds,
    st.floats(0.1, 10.0),
    st.sampled_from([FLAT, BY_FACTOR]),
)
def test_verdicts_follow_the_sign_of_the_margin_and_not_the_scale_of_speed(
    criticals, one_end, other_end, scale, rule
):
    low, high = sorted((one_end, other_end))
    outcomes = separation_margins(criticals, low, high, rule)
    for outcome in outcomes:
        if outcome.margin:
            assert outcome.verdict == ("meets" if outcome.margin > 0 else "does not meet")
        assert (outcome.verdict == "not assessed") <= bool(outcome.reason)
    scaled = separation_margins(
        [(s * scale, f) for s, f in criticals], low * scale, high * scale, rule
    )
    for outcome, other in zip(outcomes, scaled, strict=True):
        if outcome.margin is None or abs(outcome.margin) > 1e-6:
            assert outcome.verdict == other.verdict
