"""Exact passage: invariants, limits, joined pieces, and refusals."""

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.errors import ModelError
from reportgen.rotor.onemass import IsotropicSupport, OneMassRotor, response
from reportgen.rotor.passage import (
    AT_REST,
    ConstantAcceleration,
    PiecewiseAcceleration,
    WhirlState,
    even_times,
    passage,
)
from reportgen.rotor.passage_integrated import passage_integrated

ROTOR = OneMassRotor(62.0, 1.9e6, 0.03, 2e-5, bow=1e-5, bow_angle=0.7)
UP = ConstantAcceleration(10.0, 420.0, 300.0, start_time=2.0, start_angle=0.3)

zetas = st.floats(0.0, 1.5)
scaled = st.floats(1e-4, 3.0)


def unit_passage(zeta, a, points=60, **more):
    rotor = OneMassRotor(1.0, 1.0, zeta, 1.0, **more)
    programme = ConstantAcceleration(0.2, 2.2, a)
    return passage(rotor, programme, even_times(programme, points)).displacement


@settings(deadline=None, max_examples=40)
@given(zeta=zetas, a=scaled, factor=st.floats(0.01, 100.0))
def test_displacement_is_linear_in_the_eccentricity(zeta, a, factor):
    programme = ConstantAcceleration(0.2, 2.2, a)
    times = even_times(programme, 40)
    rotors = [OneMassRotor(1.0, 1.0, zeta, e) for e in (1.0, factor)]
    one, other = (passage(rotor, programme, times).displacement for rotor in rotors)
    assert np.abs(other - factor * one).max() < 1e-10 * factor * np.abs(one).max()


@settings(deadline=None, max_examples=40)
@given(zeta=zetas, a=scaled, mass=st.floats(0.1, 1e4), omega_n=st.floats(1.0, 1e4))
def test_passages_of_like_damping_and_scaled_acceleration_are_similar(zeta, a, mass, omega_n):
    rotor = OneMassRotor(mass, mass * omega_n**2, zeta, 3e-5)
    programme = ConstantAcceleration(0.2 * omega_n, 2.2 * omega_n, a * omega_n**2)
    found = passage(rotor, programme, even_times(programme, 60)).displacement / 3e-5
    expected = unit_passage(zeta, a)
    assert np.abs(found - expected).max() < 1e-8 * np.abs(expected).max()


@settings(deadline=None, max_examples=40)
@given(zeta=zetas, a=scaled, turn=st.floats(-6.0, 6.0))
def test_turning_the_start_turns_the_whole_motion(zeta, a, turn):
    rotor = OneMassRotor(1.0, 1.0, zeta, 1.0, bow=0.4, bow_angle=1.0)
    programme = ConstantAcceleration(2.2, 0.2, -a)
    times = even_times(programme, 40)
    straight = passage(rotor, programme, times).displacement
    turned = passage(rotor, replace(programme, start_angle=turn), times).displacement
    expected = straight * np.exp(1j * turn)
    assert np.abs(turned - expected).max() < 1e-9 * np.abs(expected).max()


@settings(deadline=None, max_examples=25)
@given(zeta=st.floats(0.0, 1.2), a=st.floats(0.003, 0.5), cut=st.floats(0.05, 0.95))
def test_a_cut_in_a_ramp_changes_nothing(zeta, a, cut):
    rotor = OneMassRotor(1.0, 1.0, zeta, 1.0, bow=0.4, bow_angle=1.0)
    whole = ConstantAcceleration(0.1, 2.5, a)
    end = whole.end_time
    parts = PiecewiseAcceleration([(0.0, 0.1), (cut * end, 0.1 + a * cut * end), (end, 2.5)])
    times = even_times(whole, 50)
    one, other = (passage(rotor, p, times).displacement for p in (whole, parts))
    assert np.abs(one - other).max() < 1e-9 * np.abs(one).max()


@pytest.mark.parametrize("a", [1e-9, -1e-9, 1e-7, 1e-3, 1.0, 1e3, -1e3, 1e7])
@pytest.mark.parametrize("zeta", [0.0, 1e-3, 0.7, 1.0, 5.0])
def test_nothing_overflows_however_slow_or_fast(zeta, a):
    speeds = (0.3, 3.0) if a > 0 else (3.0, 0.3)
    programme = ConstantAcceleration(*speeds, a)
    found = passage(OneMassRotor(1.0, 1.0, zeta, 1.0), programme, even_times(programme, 501))
    assert np.all(np.isfinite(found.displacement))
    assert np.all(np.isfinite(found.velocity))
    bound = 2.0 + 1.5 / math.sqrt(abs(a)) if zeta < 0.5 else 4.0
    assert found.amplitude.max() < bound


@pytest.mark.parametrize("sign", [1.0, -1.0])
def test_slow_passage_tends_to_the_steady_whirl(sign):
    rotor = replace(ROTOR, damping_ratio=0.1)
    speeds = (20.0, 400.0) if sign > 0 else (400.0, 20.0)
    gaps = []
    for a in (2.0, 0.2):
        programme = ConstantAcceleration(*speeds, sign * a)
        found = passage(rotor, programme, even_times(programme, 300))
        steady = response(rotor, found.speed) * np.exp(1j * found.angle)
        gaps.append(np.abs(found.displacement - steady).max())
    # First order in the acceleration.
    assert gaps[0] / gaps[1] == pytest.approx(10.0, rel=0.05)


def test_dwell_in_the_steady_state_stays_there():
    programme = PiecewiseAcceleration([(0.0, 150.0), (1.0, 150.0), (3.0, 150.0)])
    found = passage(ROTOR, programme, even_times(programme, 100))
    steady = response(ROTOR, found.speed) * np.exp(1j * found.angle)
    assert found.displacement == pytest.approx(steady, rel=1e-11)


def test_hold_after_a_ramp_settles_to_the_steady_whirl():
    programme = replace(UP, hold=8.0)
    found = passage(ROTOR, programme, [programme.end_time])
    # e^{−ζωₙt} over 8 s is 6e-19.
    assert found.amplitude[0] == pytest.approx(abs(complex(response(ROTOR, 420.0))), rel=1e-9)
    assert found.speed[0] == 420.0


def test_given_state_is_where_the_motion_starts():
    start = WhirlState(1e-5 + 2e-5j, 3e-3 - 1e-3j)
    found = passage(ROTOR, UP, [UP.start_time], start)
    assert complex(found.displacement[0]) == pytest.approx(start.displacement, rel=1e-11)
    assert complex(found.velocity[0]) == pytest.approx(start.velocity, rel=1e-11)
    assert found.angle[0] == 0.3


def test_steady_start_continues_the_steady_whirl():
    found = passage(ROTOR, UP, [UP.start_time])
    expected = complex(response(ROTOR, 10.0)) * np.exp(0.3j)
    assert complex(found.displacement[0]) == pytest.approx(expected, rel=1e-10)
    assert complex(found.velocity[0]) == pytest.approx(10.0j * expected, rel=1e-10)


@pytest.mark.parametrize(
    "support",
    [
        None,
        IsotropicSupport(3e6, 200.0, 5.0),
        IsotropicSupport(3e6, 5000.0, 0.0),
        IsotropicSupport(3e6, 0.0, 0.0),
        IsotropicSupport(3e6, 0.0, 5.0),
    ],
)
def test_both_ways_to_the_motion_agree_on_every_kind_of_support(support):
    rotor = replace(ROTOR, support=support, damping_ratio=0.01)
    programme = PiecewiseAcceleration(
        [(0.0, 10.0), (0.5, 150.0), (0.7, 150.0), (1.2, 400.0), (1.7, 50.0)], start_angle=0.4
    )
    times = even_times(programme, 300)
    exact, stepped = passage(rotor, programme, times), passage_integrated(rotor, programme, times)
    size = exact.amplitude.max()
    assert np.abs(exact.displacement - stepped.displacement).max() < 2e-8 * size
    assert np.abs(exact.velocity - stepped.velocity).max() < 2e-8 * np.abs(exact.velocity).max()
    assert stepped.speed == pytest.approx(exact.speed)
    assert stepped.angle == pytest.approx(exact.angle)


def test_internal_damping_is_integrated_and_feeds_whirl_past_its_onset():
    rotor = replace(ROTOR, internal_damping=ROTOR.damping)
    with pytest.raises(ModelError, match="does not cover internal damping"):
        passage(rotor, UP, [3.0])
    below, beyond = (
        PiecewiseAcceleration([(0.0, speed), (2.0, speed)]) for speed in (300.0, 400.0)
    )
    # Onset at twice the critical speed, 350.1 rad/s.
    ends = [
        passage_integrated(rotor, p, [0.0, 2.0], WhirlState(1e-3, 0.175j)).amplitude[1]
        for p in (below, beyond)
    ]
    assert ends[0] < 1e-3 < ends[1]


@pytest.mark.parametrize(
    ("values", "words"),
    [
        ((0.0, 100.0, 0.0), "acceleration is 0"),
        ((0.0, 100.0, -5.0), "does not lead from 0 to 100"),
        ((100.0, 100.0, 5.0), "does not lead"),
        ((-1.0, 100.0, 5.0), "start speed"),
        ((0.0, math.inf, 5.0), "end speed"),
        ((0.0, 100.0, math.nan), "acceleration is nan"),
        ((0.0, 100.0, 5.0, math.nan), "start time"),
        ((0.0, 100.0, 5.0, 0.0, math.inf), "start angle"),
        ((0.0, 100.0, 5.0, 0.0, 0.0, -1.0), "hold"),
    ],
)
def test_ramps_out_of_range_are_refused(values, words):
    with pytest.raises(ModelError, match=words):
        ConstantAcceleration(*values)


@pytest.mark.parametrize(
    ("pairs", "words"),
    [
        ([(0.0, 1.0)], "two or more pairs"),
        ([(0.0, 1.0, 2.0)] * 2, "two or more pairs"),
        ([(0.0, 1.0), (0.0, 2.0)], "breakpoint 2 at 0 s does not come after breakpoint 1"),
        ([(0.0, 1.0), (2.0, 2.0), (1.0, 3.0)], "breakpoint 3 at 1 s"),
        ([(0.0, 1.0), (1.0, -2.0)], "speed of breakpoint 2"),
        ([(0.0, 1.0), (math.nan, 2.0)], "time of breakpoint 2"),
        ([("now", 1.0), (1.0, 2.0)], "pairs of time"),
    ],
)
def test_breakpoints_out_of_order_are_refused_by_number(pairs, words):
    with pytest.raises(ModelError, match=words):
        PiecewiseAcceleration(pairs)


def test_instants_outside_the_programme_are_refused():
    for times, words in (([1.9], "from 2 to"), ([9.0], "from 2 to"), ([math.nan], "not finite")):
        with pytest.raises(ModelError, match=words):
            passage(ROTOR, UP, times)
    with pytest.raises(ModelError, match="one-dimensional"):
        passage(ROTOR, UP, [[3.0]])
    with pytest.raises(ModelError, match="2 or more"):
        even_times(UP, 1)


def test_accelerations_beyond_the_method_are_refused():
    slow = ConstantAcceleration(0.5, 2.0, 1e-11)
    with pytest.raises(ModelError, match="steady response is the answer"):
        passage(OneMassRotor(1.0, 1.0, 0.1, 1.0), slow, [0.0])
    fast = ConstantAcceleration(0.5, 2.0, 1e9)
    with pytest.raises(ModelError, match="check its unit"):
        passage(OneMassRotor(1.0, 1.0, 0.1, 1.0), fast, [0.0])


def test_steady_start_on_an_undamped_critical_is_refused():
    rotor = OneMassRotor(1.0, 1.0, 0.0, 1.0)
    ramp = ConstantAcceleration(1.0, 2.0, 0.1)
    with pytest.raises(ModelError, match="no steady whirl"):
        passage(rotor, ramp, [1.0])
    assert passage(rotor, ramp, [10.0], AT_REST).amplitude[0] > 1.0


def test_integration_refuses_what_would_take_hours_or_is_out_of_order():
    long = ConstantAcceleration(100.0, 400.0, 1e-3)
    with pytest.raises(ModelError, match="turns and free cycles"):
        passage_integrated(ROTOR, long, [1.0])
    with pytest.raises(ModelError, match="increasing"):
        passage_integrated(ROTOR, UP, [3.0, 2.5])
    with pytest.raises(ModelError, match="rtol"):
        passage_integrated(ROTOR, UP, [2.5], rtol=0.1)


def test_state_that_is_not_finite_is_refused():
    with pytest.raises(ModelError, match="start velocity"):
        WhirlState(0.0, complex(math.nan, 0.0))
