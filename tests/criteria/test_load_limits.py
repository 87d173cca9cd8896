import math

import pytest

from reportgen.criteria import bearing_load, bearing_load_share, project_source, shaft_stress
from reportgen.errors import ModelError

SPEC = project_source("Data sheet 12")


def load(static, dynamic, allowable, **options):
    return bearing_load(static, dynamic, allowable, source=SPEC, **options)


def part(dynamic, static, allowed=0.5):
    return bearing_load_share(dynamic, static, allowed=allowed, source=SPEC)


def stress(whirl, sag, allowable, **options):
    return shaft_stress(whirl, sag, allowable, source=SPEC, **options)


def test_a_bearing_carries_static_load_and_rotating_force_together():
    outcome = load(300.0, 200.0, 600.0)
    assert (outcome.value, outcome.verdict, outcome.margin) == (
        500.0,
        "meets",
        pytest.approx(1 / 6),
    )
    assert load(300.0, 200.0, 600.0, allowed=0.8).verdict == "does not meet"


def test_a_rotating_force_is_judged_as_a_share_of_the_static_load():
    assert part(140.0, 300.0).verdict == "meets"
    assert part(160.0, 300.0).verdict == "does not meet"
    assert part(160.0, 300.0).reason == ""
    assert "void" in part(301.0, 300.0).reason
    assert part(1.0, 0.0).verdict == "not assessed"


def test_how_a_load_is_limited_is_told():
    assert load(1.0, 1.0, 9.0, allowed=0.8).how.startswith("80 % of the allowable load")
    assert part(1.0, 9.0).how == "50 % of the static load"
    assert stress(1.0, 1.0, 9.0, concentration=2.5).how.startswith("stated allowable, against 2.5")


def test_stresses_add_and_concentrate():
    outcome = stress(20e6, 10e6, 70e6, concentration=2.0)
    assert (outcome.value, outcome.verdict) == (60e6, "meets")
    assert stress(20e6, 10e6, 70e6).value == 30e6
    assert stress(20e6, 10e6, 70e6, concentration=2.5).verdict == "does not meet"


@pytest.mark.parametrize(
    ("judge", "good"), [(load, (1.0, 2.0, 9.0)), (part, (1.0, 9.0)), (stress, (1.0, 2.0, 9.0))]
)
def test_missing_data_is_not_assessed_and_no_number_is_refused(judge, good):
    for place in range(len(good)):
        rest = good[:place], good[place + 1 :]
        outcome = judge(*rest[0], None, *rest[1])
        assert outcome.verdict == "not assessed"
        assert outcome.reason
        for bad in (math.nan, math.inf, -1.0):
            with pytest.raises(ModelError):
                judge(*rest[0], bad, *rest[1])


def test_shares_and_factors_outside_their_range_are_refused():
    with pytest.raises(ModelError):
        load(1.0, 1.0, 9.0, allowed=1.1)
    with pytest.raises(ModelError):
        part(1.0, 1.0, 0.0)
    with pytest.raises(ModelError, match="1 or above"):
        stress(1.0, 1.0, 9.0, concentration=0.9)
