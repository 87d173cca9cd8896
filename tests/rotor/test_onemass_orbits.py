"""Elliptical orbits on unlike supports, and the overhung disc with its gyroscopic moment."""

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.errors import ModelError
from reportgen.rotor.beams import area_moment, overhung_flexibility
from reportgen.rotor.onemass import IsotropicSupport, OneMassRotor, response
from reportgen.rotor.onemass_anisotropic import (
    AnisotropicSupport,
    backward_ranges,
    orbit_response,
    split_criticals,
)
from reportgen.rotor.onemass_overhung import (
    OverhungDisc,
    backward_criticals,
    forward_criticals,
    overhung_response,
    whirl_frequencies,
)

ROTOR = OneMassRotor(62.0, 1.9e6, 0.01, 2e-5)
UNLIKE = AnisotropicSupport(IsotropicSupport(3e6, 200.0, 5.0), IsotropicSupport(5e6, 300.0, 5.0))
SPEEDS = np.linspace(1.0, 1500.0, 3001)


def test_like_directions_give_the_circular_whirl():
    own = IsotropicSupport(3e6, 200.0, 5.0)
    rotor = replace(ROTOR, internal_damping=80.0, bow=1e-5, bow_angle=1.0)
    orbit = orbit_response(rotor, AnisotropicSupport(own, own), SPEEDS)
    expected = response(replace(rotor, support=own), SPEEDS)
    assert orbit.forward == pytest.approx(expected, rel=1e-10)
    assert np.abs(orbit.backward).max() < 1e-12 * np.abs(expected).max()
    assert np.all(orbit.sense == 1)


def test_without_internal_damping_each_direction_stands_alone():
    orbit = orbit_response(ROTOR, UNLIKE, SPEEDS)
    x = response(replace(ROTOR, support=UNLIKE.horizontal), SPEEDS)
    y = -1j * response(replace(ROTOR, support=UNLIKE.vertical), SPEEDS)
    assert orbit.horizontal == pytest.approx(x, rel=1e-10)
    assert orbit.vertical == pytest.approx(y, rel=1e-10)


def test_axes_inclination_and_sense_are_those_of_the_traced_orbit():
    orbit = orbit_response(ROTOR, UNLIKE, [100.0, 142.0, 200.0])
    turn = np.exp(1j * np.linspace(0.0, 2.0 * np.pi, 20001))
    z = orbit.forward[:, None] * turn + orbit.backward[:, None] / turn
    size = np.abs(z)
    assert size.max(axis=1) == pytest.approx(orbit.semi_major, rel=1e-7)
    assert size.min(axis=1) == pytest.approx(orbit.semi_minor, rel=1e-5, abs=1e-12)
    long = z[np.arange(3), size.argmax(axis=1)]
    assert np.exp(2j * np.angle(long)) == pytest.approx(np.exp(2j * orbit.inclination), abs=2e-3)
    area = np.sum(np.imag(np.conj(z[:, :-1]) * np.diff(z, axis=1)), axis=1)
    assert np.array_equal(np.sign(area), orbit.sense)


def test_whirl_runs_backward_between_the_split_criticals():
    criticals = split_criticals(ROTOR, UNLIKE)
    low, high = criticals.horizontal[0], criticals.vertical[0]
    ranges = backward_ranges(ROTOR, UNLIKE)
    assert len(ranges) == 1
    # Damping narrows the range a little on either side.
    assert low < ranges[0][0] < ranges[0][1] < high
    sense = orbit_response(ROTOR, UNLIKE, SPEEDS).sense
    low, high = ranges[0]
    inside = (low < SPEEDS) & (high > SPEEDS)
    assert np.array_equal(sense == -1, inside)
    heights = [peak.speed for peak in criticals.horizontal_peaks]
    assert heights[0] == pytest.approx(criticals.horizontal[0], rel=2e-3)


def test_undamped_backward_ranges_end_at_the_criticals():
    bare = AnisotropicSupport(IsotropicSupport(3e6), IsotropicSupport(5e6))
    rotor = replace(ROTOR, damping_ratio=0.0)
    criticals = split_criticals(rotor, bare)
    ends = (criticals.horizontal[0], criticals.vertical[0])
    # Shaft and support in series.
    assert ends[0] == pytest.approx(math.sqrt(1 / (1 / 1.9e6 + 1 / 3e6) / 62.0), rel=1e-12)
    assert backward_ranges(rotor, bare)[0] == pytest.approx(ends, rel=1e-9)


def test_heavy_damping_leaves_no_backward_whirl():
    assert backward_ranges(replace(ROTOR, damping_ratio=0.3), UNLIKE) == ()


def test_internal_damping_narrows_backward_whirl():
    orbit = orbit_response(replace(ROTOR, internal_damping=2000.0), UNLIKE, SPEEDS)
    assert np.count_nonzero(orbit.sense == -1) < np.count_nonzero(
        orbit_response(ROTOR, UNLIKE, SPEEDS).sense == -1
    )
    with pytest.raises(ModelError, match="couples the two directions"):
        backward_ranges(replace(ROTOR, internal_damping=1.0), UNLIKE)


def test_two_sets_of_supports_are_refused():
    with pytest.raises(ModelError, match="give the supports once"):
        orbit_response(replace(ROTOR, support=IsotropicSupport(1e6)), UNLIKE, 1.0)


FLEXIBILITY = overhung_flexibility(2e11, area_moment(0.08), 0.6, 0.3)
discs = st.builds(
    lambda m, d, share: OverhungDisc(m, d, share * d, FLEXIBILITY, 1e-5, 1e-4),
    st.floats(1.0, 200.0),
    st.floats(0.01, 5.0),
    st.floats(0.0, 2.0),
)


@settings(deadline=None, max_examples=40)
@given(disc=discs)
def test_criticals_lie_where_the_whirl_meets_the_speed(disc):
    forward, backward = forward_criticals(disc), backward_criticals(disc)
    assert len(forward) == (1 if disc.polar_inertia >= disc.diametral_inertia else 2)
    for speed in forward:
        if speed < 1e6:
            assert np.abs(whirl_frequencies(disc, speed) / speed - 1).min() < 1e-8
    for speed in backward:
        assert np.abs(whirl_frequencies(disc, speed) / speed + 1).min() < 1e-8
    assert backward[0] <= forward[0] * (1 + 1e-12)


@settings(deadline=None, max_examples=25)
@given(disc=discs, speed=st.floats(0.0, 3000.0))
def test_turning_parts_forward_from_backward_whirl(disc, speed):
    still, turning = whirl_frequencies(disc, 0.0), whirl_frequencies(disc, speed)
    assert still == pytest.approx(-still[::-1], rel=1e-9)
    slack = 1e-9 * np.abs(still).max()
    # Backward frequencies shrink in size and forward ones grow: all four move up.
    assert np.all(turning >= still - slack)
    assert np.all(turning[:2] < 0.0)
    assert np.all(turning[2:] > 0.0)


def test_a_point_mass_at_the_end_is_the_one_mass_rotor():
    disc = OverhungDisc(40.0, 1e-9, 0.0, FLEXIBILITY, eccentricity=1e-5, damping=300.0)
    k = 1.0 / FLEXIBILITY[0, 0]
    rotor = OneMassRotor(40.0, k, 300.0 / (2 * math.sqrt(k * 40.0)), 1e-5)
    speeds = np.linspace(1.0, 1500.0, 40)
    assert overhung_response(disc, speeds)[:, 0] == pytest.approx(response(rotor, speeds), rel=1e-6)


def test_far_above_its_criticals_the_disc_turns_about_its_own_axis():
    disc = OverhungDisc(40.0, 0.5, 0.9, FLEXIBILITY, eccentricity=1e-5, skew=1e-4)
    assert overhung_response(disc, 1e6) == pytest.approx([-1e-5, -1e-4], rel=1e-4)


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ({"polar_inertia": 1.1}, "which no body has"),
        ({"skew": 0.5}, "not small"),
        ({"flexibility": [[1.0, 0.2], [0.3, 1.0]]}, "not symmetric"),
        ({"flexibility": [[1.0, 2.0], [2.0, 1.0]]}, "positive definite"),
        ({"flexibility": [1.0, 2.0]}, "2×2"),
        ({"mass": -1.0}, "mass"),
    ],
)
def test_discs_out_of_range_are_refused(change, words):
    with pytest.raises(ModelError, match=words):
        replace(OverhungDisc(40.0, 0.5, 0.9, FLEXIBILITY), **change)
