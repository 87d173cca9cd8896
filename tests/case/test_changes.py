"""Differences of resolved cases, and cases with parts of another."""

from __future__ import annotations

import copy
from pathlib import Path

from hypothesis import given
from hypothesis import strategies as st

from reportgen.case import read_case
from reportgen.case.changes import changes, path_of, value_at, with_value

CASES = Path(__file__).parents[2] / "cases"
VALUES = st.recursive(
    st.none() | st.integers() | st.text(max_size=3),
    lambda inner: (
        st.lists(inner, max_size=3)
        | st.dictionaries(st.sampled_from(["a", "b", "from_", "d_e"]), inner, max_size=3)
    ),
    max_leaves=12,
)
TREES = st.dictionaries(st.sampled_from(["rotor", "speeds", "x_y"]), VALUES, max_size=3)


@given(TREES, TREES)
def test_taking_over_every_change_makes_the_other_case(old, new):
    whole = {**dict.fromkeys(new), **old}  # a key that is absent is one that is empty
    wanted = {**dict.fromkeys(old), **new}
    before = copy.deepcopy(whole)
    made = whole
    for change in changes(whole, wanted):
        assert change.before != change.after
        assert value_at(wanted, change.place) == change.after
        made = with_value(made, change.place, change.after)
    assert changes(made, wanted) == []
    assert whole == before  # nothing is changed in place


@given(TREES)
def test_a_case_does_not_differ_from_itself(tree):
    assert changes(tree, copy.deepcopy(tree)) == []


def test_places_are_printed_as_errors_print_them():
    old = read_case(CASES / "booster-fan.yaml")
    paths = {path for path, *_ in old.givens()}
    new = old.resolved()
    places = [
        ("passages", 1, "from_"),
        ("speeds", "maximum_continuous"),
        ("rotor", "damping", "logarithmic_decrement"),
    ]
    for place in places:
        assert path_of(place) in paths
        given_there = value_at(new, place)
        new = with_value(new, place, {**given_there, "si": given_there["si"] + 1.0})
    found = changes(old.resolved(), new)
    assert {c.place for c in found} == set(places)
    assert all(c.counts for c in found)


def test_sources_status_tolerances_and_documents_do_not_count():
    old = read_case(CASES / "booster-fan.yaml").resolved()
    mass = value_at(old, ("rotor", "mass"))
    new = with_value(old, ("rotor", "mass"), {**mass, "source": "x", "tolerance": None})
    new = with_value(new, ("document", "title"), "another")
    new = with_value(new, ("criteria", 0, "clause"), "7")
    assert [c.counts for c in changes(old, new)] == [False, False, False]
    turned = with_value(old, ("machine", "orientation"), "vertical")
    assert [c.counts for c in changes(old, turned)] == [True]
