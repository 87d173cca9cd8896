import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.criteria import (
    MACHINE_TYPES,
    analysis_unbalance,
    grade_unbalance,
    permissible_unbalance,
    residual_at_bearings,
    residual_unbalance,
    residual_unbalance_by_load,
)
from reportgen.criteria.balance import GRADES
from reportgen.errors import ModelError

RPM = math.pi / 30.0


def test_a_plane_is_judged_by_its_journal_load():
    permissible = residual_unbalance_by_load(200.0, 8000 * RPM)
    assert residual_unbalance(permissible, 200.0, 8000 * RPM).verdict == "meets"
    assert residual_unbalance(1.01 * permissible, 200.0, 8000 * RPM).verdict == "does not meet"
    assert residual_unbalance(None, 200.0, 8000 * RPM).limit == permissible
    assert residual_unbalance(1e-6, None, 8000 * RPM).verdict == "not assessed"


def test_above_25000_r_min_the_eccentricity_stays():
    fast = [residual_unbalance_by_load(10.0, n * RPM) for n in (25000, 40000)]
    assert fast[0] == pytest.approx(fast[1])
    assert residual_unbalance_by_load(10.0, 24000 * RPM) > fast[0]


def test_each_shape_is_excited_where_it_moves_most():
    loads, speed = (100.0, 300.0), 9000 * RPM
    of_a, of_b = (2.0 * residual_unbalance_by_load(w, speed) for w in loads)
    (middle,) = analysis_unbalance("translatory", loads, speed, multiple=2.0)
    assert middle.amount == pytest.approx(of_a + of_b)
    a, b = analysis_unbalance("conical", loads, speed, multiple=2.0)
    assert (a.amount, b.amount) == (pytest.approx(of_a), pytest.approx(of_b))
    assert abs(b.angle - a.angle) == pytest.approx(math.pi)
    (hung,) = analysis_unbalance("overhung", loads, speed, multiple=2.0, overhung_mass=50.0)
    assert hung.amount == pytest.approx(2.0 * residual_unbalance_by_load(50.0, speed))


def test_an_overhung_mode_needs_its_mass_and_a_shape_its_name():
    with pytest.raises(ModelError, match="overhung mass"):
        analysis_unbalance("overhung", (1.0, 1.0), 100.0, multiple=2.0)
    with pytest.raises(ModelError, match="bouncing"):
        analysis_unbalance("bouncing", (1.0, 1.0), 100.0, multiple=2.0)


@settings(deadline=None, max_examples=30)
@given(st.floats(0.4e-3, 4.0), st.floats(1.0, 1e4), st.floats(10.0, 3000.0), st.floats(0.3, 0.7))
def test_a_grade_is_placed_as_a_whole_or_as_a_couple(grade, mass, speed, z):
    whole = permissible_unbalance(grade, mass, speed)
    one, other = (
        residual_at_bearings(
            list(grade_unbalance(grade, mass, speed, 0.0, 1.0, z, opposed=opposed)), 0.0, 1.0
        )
        for opposed in (False, True)
    )
    assert abs(sum(one)) == pytest.approx(whole)
    assert [abs(u) for u in one] == pytest.approx([abs(u) for u in other])
    assert abs(sum(other)) == pytest.approx(abs(1 - 2 * z) * whole, abs=1e-9 * whole)


@pytest.mark.parametrize("bad", [math.nan, math.inf, 0.0, -1.0])
def test_no_number_is_refused(bad):
    for call in (
        lambda: residual_unbalance_by_load(bad, 100.0),
        lambda: residual_unbalance_by_load(1.0, bad),
        lambda: residual_unbalance(1.0, 1.0, bad),
        lambda: analysis_unbalance("conical", (1.0, bad), 100.0, multiple=2.0),
        lambda: analysis_unbalance("conical", (1.0, 1.0), 100.0, multiple=bad),
    ):
        with pytest.raises(ModelError):
            call()


def test_each_grade_of_the_series_guides_some_machine():
    assert sorted(t.grade for t in MACHINE_TYPES) == pytest.approx(sorted(GRADES))
