import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.criteria import (
    GRADES,
    PlaneUnbalance,
    allocate,
    balance_grade,
    balance_grade_in_planes,
    permissible_eccentricity,
    permissible_unbalance,
    residual_at_bearings,
)
from reportgen.errors import ModelError

places = st.floats(-5.0, 5.0)


def test_an_unbalance_is_judged_against_its_grade():
    speed = 157.0
    whole = permissible_unbalance(6.3e-3, 60.0, speed)
    assert balance_grade(whole, 6.3e-3, 60.0, speed).verdict == "meets"
    assert balance_grade(1.001 * whole, 6.3e-3, 60.0, speed).verdict == "does not meet"
    assert balance_grade(whole / 4, 6.3e-3, 60.0, speed).margin == pytest.approx(0.75)


def test_the_grade_is_told():
    assert balance_grade(1e-6, 6.3e-3, 60.0, 157.0).how.endswith("G6.3")
    assert "G4100" in balance_grade(1e-6, 4.1, 60.0, 157.0).reason
    assert "0.3 to 0.7" in whole_in_planes(0.5)[0].how
    assert "brought to that bound" not in whole_in_planes(0.5)[0].how
    assert "brought to that bound" in whole_in_planes(0.05)[0].how
    assert "0.3 to 1.3" in whole_in_planes(1.2)[0].how


def whole_in_planes(centre):
    return balance_grade_in_planes(None, allocate(1.0, 0.0, 1.0, centre), 0.0, 1.0)


@pytest.mark.parametrize("grade", [0.3e-3, 4.1])
def test_a_grade_outside_the_series_is_not_assessed(grade):
    outcome = balance_grade(1e-6, grade, 60.0, 157.0)
    assert outcome.verdict == "not assessed"
    assert "G0.4 to G4000" in outcome.reason
    with pytest.raises(ModelError, match=r"G0\.4 to G4000"):
        permissible_eccentricity(grade, 157.0)


def test_both_ends_of_the_series_are_within_it():
    assert permissible_eccentricity(GRADES[0], 1.0) == 0.4e-3
    assert permissible_eccentricity(GRADES[-1], 1.0) == 4.0


def test_what_is_not_known_is_not_assessed():
    assert balance_grade(None, 6.3e-3, 60.0, 157.0).verdict == "not assessed"
    assert "mass" in balance_grade(1e-6, 6.3e-3, None, 157.0).reason
    assert "speed" in balance_grade(1e-6, 6.3e-3, 60.0, None).reason


@pytest.mark.parametrize("bad", [math.nan, math.inf, -1.0])
def test_no_number_is_refused(bad):
    good = (1e-6, 6.3e-3, 60.0, 157.0)
    for place in range(4):
        with pytest.raises(ModelError):
            balance_grade(*good[:place], bad, *good[place + 1 :])


def test_between_bearings_the_nearer_plane_takes_more_within_the_bounds():
    near_a = allocate(1.0, 0.0, 1.0, 0.05)
    assert (near_a.at_a, near_a.at_b, near_a.limited) == (0.7, 0.3, True)
    middle = allocate(1.0, 0.0, 2.0, 1.0)
    assert (middle.at_a, middle.at_b, middle.limited) == (0.5, 0.5, False)


def test_overhung_the_bounds_are_wider():
    rotor = allocate(1.0, 0.0, 1.0, 1.2)
    assert rotor.overhung
    assert (rotor.at_a, rotor.at_b) == (pytest.approx(0.3), pytest.approx(1.2))
    far = allocate(1.0, 0.0, 1.0, 2.0)
    assert (far.at_a, far.at_b, far.limited) == (1.0, 1.3, True)


@settings(deadline=None, max_examples=40)
@given(places, places, places)
def test_the_split_does_not_depend_on_the_direction_of_the_axis(a, b, z):
    if abs(a - b) < 1e-3:
        return
    one, other = allocate(1.0, a, b, z), allocate(1.0, -b, -a, -z)
    assert one.at_a == pytest.approx(other.at_b)
    assert one.at_b == pytest.approx(other.at_a)


@settings(deadline=None, max_examples=40)
@given(
    st.lists(st.builds(PlaneUnbalance, places, st.floats(0, 1), st.floats(-7, 7)), max_size=4),
    places,
    places,
)
def test_unbalances_carried_to_the_bearings_keep_their_sum_and_their_moment(planes, a, b):
    if abs(a - b) < 1e-2:
        return
    at_a, at_b = residual_at_bearings(planes, a, b)
    vectors = [p.amount * complex(math.cos(p.angle), math.sin(p.angle)) for p in planes]
    moment = sum(u * p.position for u, p in zip(vectors, planes, strict=True))
    assert at_a + at_b == pytest.approx(sum(vectors), abs=1e-9)
    assert at_a * a + at_b * b == pytest.approx(moment, abs=1e-9)


def test_planes_are_judged_one_by_one():
    allocation = allocate(100e-6, 0.0, 1.0, 0.5)
    planes = [PlaneUnbalance(0.0, 60e-6), PlaneUnbalance(1.0, 20e-6, math.pi)]
    a, b = balance_grade_in_planes(planes, allocation, 0.0, 1.0)
    assert (a.verdict, b.verdict) == ("does not meet", "meets")
    unknown = balance_grade_in_planes(None, allocation, 0.0, 1.0)
    assert [o.verdict for o in unknown] == ["not assessed", "not assessed"]
    assert unknown[0].limit == pytest.approx(50e-6)


def test_bearings_in_one_plane_are_refused():
    with pytest.raises(ModelError, match="coincide"):
        allocate(1.0, 1.0, 1.0, 0.5)
    with pytest.raises(ModelError, match="coincide"):
        residual_at_bearings([], 1.0, 1.0)
