import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.criteria import (
    Zones,
    casing_velocity,
    casing_velocity_zones,
    harmonic_velocity,
    shaft_vibration,
    shaft_vibration_zones,
)
from reportgen.errors import ModelError

RPM = math.pi / 30.0


def shaft(amplitude, revolutions, boundary="A/B", measure="peak-to-peak", harmonic=False):
    return shaft_vibration(
        amplitude, revolutions * RPM, boundary=boundary, measure=measure, harmonic=harmonic
    )


def casing(velocity, revolutions=3000.0, **options):
    stated = {"group": 2, "support": "rigid", "boundary": "B/C"}
    return casing_velocity(velocity, revolutions * RPM, **(stated | options))


def test_a_zone_holds_its_upper_end():
    zones = Zones(1.0, 2.0, 3.0)
    assert [zones.zone(v) for v in (0.0, 1.0, 1.5, 2.0, 2.5, 3.0, 3.5)] == list("AABBCCD")


def test_a_boundary_that_is_none_is_refused():
    with pytest.raises(ModelError, match="B/D"):
        shaft(1e-6, 3000, "B/D")
    with pytest.raises(ModelError, match="B/D"):
        casing(1e-3, boundary="B/D")


def test_the_shaft_is_judged_at_the_boundary_and_its_zone_is_told():
    outcome = shaft(100e-6, 3600)
    assert outcome.limit == pytest.approx(80e-6)
    assert (outcome.verdict, outcome.reason, outcome.measure) == (
        "does not meet",
        "zone B",
        "peak-to-peak",
    )
    assert shaft(100e-6, 3600, "B/C").verdict == "meets"
    assert shaft(50e-6, 3600, "A/B", "0-peak", harmonic=True).value == pytest.approx(100e-6)


@pytest.mark.parametrize("revolutions", [999.0, 30001.0])
def test_a_speed_beyond_the_zones_of_shaft_vibration_is_not_assessed(revolutions):
    outcome = shaft(1e-9, revolutions)
    assert (outcome.verdict, outcome.limit) == ("not assessed", None)
    assert "1000 to 30000 r/min" in outcome.reason
    with pytest.raises(ModelError):
        shaft_vibration_zones(revolutions * RPM)


@pytest.mark.parametrize("revolutions", [1000.0, 30000.0])
def test_both_ends_of_the_range_are_within_it(revolutions):
    assert shaft(1e-9, revolutions).verdict == "meets"


def test_a_casing_is_judged_by_group_and_support():
    assert casing(3.0e-3).verdict == "does not meet"
    assert casing(3.0e-3).reason == "zone C"
    assert casing(3.0e-3, support="flexible").verdict == "meets"
    assert casing(3.0e-3, group=1).verdict == "meets"


@pytest.mark.parametrize("revolutions", [119.0, 30001.0])
def test_a_speed_beyond_the_zones_of_casing_velocity_is_not_assessed(revolutions):
    assert casing(1e-6, revolutions).verdict == "not assessed"


@pytest.mark.parametrize("revolutions", [120.0, 30000.0])
def test_both_ends_of_the_casing_range_are_within_it(revolutions):
    assert casing(1e-6, revolutions).verdict == "meets"


def test_a_peak_velocity_is_turned_to_rms_only_where_the_motion_is_harmonic():
    velocity = harmonic_velocity(10e-6, 314.0)
    assert casing(velocity, measure="0-peak", harmonic=True).value == pytest.approx(
        3.14e-3 / math.sqrt(2)
    )
    with pytest.raises(ModelError):
        casing(velocity, measure="0-peak")


def test_a_group_or_support_that_is_none_is_refused():
    for options in ({"group": 3}, {"support": "soft"}):
        with pytest.raises(ModelError, match="machine group"):
            casing(1e-3, **options)


def test_what_is_not_known_is_not_assessed():
    assert shaft(None, 3000).verdict == "not assessed"
    assert casing(None).verdict == "not assessed"
    assert casing(None).limit == 2.8e-3


@pytest.mark.parametrize("bad", [math.nan, math.inf, -1e-3])
def test_no_number_is_refused(bad):
    for call in (
        lambda: shaft(bad, 3000),
        lambda: shaft(1e-6, bad),
        lambda: casing(bad),
        lambda: casing(1e-3, bad),
        lambda: harmonic_velocity(bad, 1.0),
        lambda: harmonic_velocity(1.0, bad),
    ):
        with pytest.raises(ModelError):
            call()


@settings(deadline=None, max_examples=40)
@given(st.floats(1000.0, 30000.0), st.floats(1000.0, 30000.0))
def test_zones_of_the_shaft_rise_in_order_and_never_grow_with_speed(one, other):
    slow, fast = (shaft_vibration_zones(n * RPM) for n in sorted((one, other)))
    assert slow.a < slow.b < slow.c
    assert all(s >= f for s, f in zip(slow, fast, strict=True))


def test_a_flexible_support_never_has_a_lower_limit():
    for group in (1, 2):
        rigid, flexible = (casing_velocity_zones(group, s) for s in ("rigid", "flexible"))
        assert all(r <= f for r, f in zip(rigid, flexible, strict=True))
