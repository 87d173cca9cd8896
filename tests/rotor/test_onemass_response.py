"""Steady response of the one-mass rotor: invariants, supports, and refusals."""

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.errors import ModelError
from reportgen.rotor.onemass import (
    IsotropicSupport,
    OneMassRotor,
    bearing_force,
    magnification,
    phase_lag,
    response,
    static_sag,
    support_response,
)

PLAIN = OneMassRotor(62.0, 1.9e6, 0.03, 2e-5)
SOFT = replace(PLAIN, support=IsotropicSupport(3e6, 900.0, 8.0), bow=1e-5, bow_angle=0.7)
SPEEDS = np.linspace(0.0, 900.0, 181)

rotors = st.builds(
    OneMassRotor,
    mass=st.floats(0.1, 1e4),
    stiffness=st.floats(1e3, 1e9),
    damping_ratio=st.floats(1e-4, 2.0),
    eccentricity=st.floats(1e-7, 1e-3),
    bow=st.floats(0.0, 1e-3),
    bow_angle=st.floats(-3.0, 3.0),
)


@settings(deadline=None, max_examples=40)
@given(rotor=rotors, factor=st.floats(0.01, 100.0), r=st.floats(0.0, 5.0))
def test_response_is_linear_in_unbalance_and_bow(rotor, factor, r):
    speed = r * rotor.natural_frequency
    scaled = replace(rotor, eccentricity=factor * rotor.eccentricity, bow=factor * rotor.bow)
    expected = factor * complex(response(rotor, speed))
    assert complex(response(scaled, speed)) == pytest.approx(expected, rel=1e-12)


@settings(deadline=None, max_examples=40)
@given(rotor=rotors, factor=st.floats(0.01, 100.0), r=st.floats(0.0, 5.0))
def test_magnification_depends_on_speed_ratio_and_damping_alone(rotor, factor, r):
    rotor = replace(rotor, bow=0.0)
    other = replace(rotor, mass=factor * rotor.mass, eccentricity=3.0 * rotor.eccentricity)
    first = float(magnification(rotor, r * rotor.natural_frequency))
    assert float(magnification(other, r * other.natural_frequency)) == pytest.approx(
        first, rel=1e-10, abs=1e-300
    )


def test_forces_balance_the_disc_and_the_support():
    disc, ends = response(SOFT, SPEEDS), support_response(SOFT, SPEEDS)
    forces = bearing_force(SOFT, SPEEDS)
    m, e, own = SOFT.mass, SOFT.eccentricity, SOFT.support
    drag = 1j * SOFT.damping * SPEEDS * disc
    scale = np.abs(forces.shaft) + 1.0
    # Mass centre: m Ω² (z + e) is what shaft and damping pull; support: shaft − ground = inertia.
    assert np.abs(m * SPEEDS**2 * (disc + e) - forces.shaft - drag).max() < 1e-10 * scale.max()
    through = forces.ground - drag
    assert np.abs(forces.shaft - through + own.mass * SPEEDS**2 * ends).max() < 1e-10 * scale.max()


def test_stiff_support_tends_to_rigid_supports():
    stiff = replace(PLAIN, support=IsotropicSupport(1e6 * PLAIN.stiffness, 0.0, 1.0))
    assert response(stiff, SPEEDS) == pytest.approx(response(PLAIN, SPEEDS), rel=1e-4)


def test_internal_damping_changes_no_synchronous_response():
    assert np.array_equal(
        response(replace(PLAIN, internal_damping=500.0), SPEEDS), response(PLAIN, SPEEDS)
    )


def test_at_standstill_a_bow_is_all_there_is():
    bowed = replace(PLAIN, bow=3e-5, bow_angle=1.0)
    assert complex(response(bowed, 0.0)) == pytest.approx(bowed.bow_vector)
    assert abs(complex(bearing_force(bowed, 0.0).shaft)) == pytest.approx(0.0, abs=1e-12)


def test_undamped_phase_is_zero_below_and_half_a_turn_above():
    rotor = replace(PLAIN, damping_ratio=0.0)
    lags = phase_lag(rotor, np.array([0.5, 2.0]) * rotor.natural_frequency)
    assert lags == pytest.approx([0.0, math.pi])


def test_phase_with_bow_along_the_unbalance_equals_the_angle_of_the_response():
    lags = phase_lag(SOFT, SPEEDS)
    assert np.exp(-1j * lags) == pytest.approx(np.exp(1j * np.angle(response(SOFT, SPEEDS))))
    assert lags.min() > -math.pi


def test_sag_on_a_flexible_support_adds_the_support():
    own = IsotropicSupport(2e6, 0.0, 10.0)
    added = static_sag(replace(PLAIN, support=own)) - static_sag(PLAIN)
    assert added == pytest.approx(72.0 * 9.80665 / 2e6, rel=1e-12)


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ({"mass": 0.0}, "mass is 0 kg"),
        ({"mass": math.nan}, "mass is nan"),
        ({"stiffness": -1.0}, "stiffness is -1 N/m"),
        ({"damping_ratio": -0.1}, "damping ratio"),
        ({"eccentricity": math.inf}, "eccentricity is inf"),
        ({"bow": -1e-6}, "bow is"),
        ({"bow_angle": "east"}, "bow angle is 'east'"),
        ({"internal_damping": -1.0}, "internal damping"),
    ],
)
def test_rotor_out_of_range_is_refused_by_name(change, words):
    with pytest.raises(ModelError, match=words):
        replace(PLAIN, **change)


@pytest.mark.parametrize(
    ("stiffness", "damping", "mass", "words"),
    [(0.0, 0.0, 0.0, "stiffness"), (1.0, -1.0, 0.0, "damping"), (1.0, 0.0, -1.0, "mass")],
)
def test_support_out_of_range_is_refused_by_name(stiffness, damping, mass, words):
    with pytest.raises(ModelError, match=f"support {words}"):
        IsotropicSupport(stiffness, damping, mass)


@pytest.mark.parametrize(("speed", "words"), [(-1.0, "-1 rad/s"), (math.nan, "not finite")])
def test_speeds_out_of_range_are_refused(speed, words):
    with pytest.raises(ModelError, match=words):
        response(PLAIN, [10.0, speed])


def test_undamped_resonance_is_refused_by_its_speed():
    rotor = OneMassRotor(1.0, 1.0, 0.0, 1e-5)
    for function in (response, phase_lag, magnification, bearing_force):
        with pytest.raises(ModelError, match="at 1 rad/s the undamped response has no bound"):
            function(rotor, [0.5, 1.0])


def test_questions_without_meaning_are_refused():
    with pytest.raises(ModelError, match="eccentricity is 0"):
        magnification(replace(PLAIN, eccentricity=0.0), 1.0)
    with pytest.raises(ModelError, match="no phase"):
        phase_lag(replace(PLAIN, eccentricity=0.0), 1.0)
    with pytest.raises(ModelError, match="gravity"):
        static_sag(PLAIN, -9.8)
