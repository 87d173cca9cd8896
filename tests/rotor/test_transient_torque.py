"""The one-mass rotor under a drive's torque: passes, stalls, audits, refusals."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.errors import ModelError
from reportgen.rotor.onemass_model import IsotropicSupport, OneMassRotor
from reportgen.rotor.onemass_response import response
from reportgen.rotor.passage import ConstantAcceleration, passage, passage_peak
from reportgen.rotor.transient import (
    DriveMargin,
    Phase,
    TorqueCurve,
    coast_down,
    least_drive_torque,
    overspeed_trip,
    run_up,
    steady_states,
    torque_run,
    whirl_torque,
)
from reportgen.rotor.transient.coupled import CoupledRotor

# An invented fan: critical near 100 rad/s.
FAN = OneMassRotor(mass=60.0, stiffness=6.0e5, damping_ratio=0.03, eccentricity=3e-4)
INERTIA = 0.6
LOAD = TorqueCurve([0.0, 100.0, 200.0], [0.05, 0.2, 0.6], "load torque")


def drive(torque: float) -> TorqueCurve:
    return TorqueCurve([0.0, 60.0, 200.0], [torque, 0.95 * torque, 0.8 * torque], "drive torque")


def test_enough_torque_passes_and_says_where_the_peak_is() -> None:
    run = run_up(FAN, INERTIA, drive(6.0), LOAD, 160.0)
    assert run.outcome == "reached"
    assert run.crossed
    assert run.reason == ""
    assert run.critical_speed is not None
    assert run.speed[-1] == pytest.approx(160.0, rel=1e-12)
    # On a run-up the peak comes after the critical speed.
    assert run.peak.speed > run.critical_speed
    assert run.crossing_time is not None
    assert run.peak.time > run.crossing_time
    assert run.audit.mismatch < 1e-9


def test_too_little_torque_stalls_where_the_steady_energy_balance_says() -> None:
    run = run_up(FAN, INERTIA, drive(0.9), LOAD, 160.0)
    assert run.outcome == "captured"
    assert not run.crossed
    assert run.hang_speed is not None
    assert run.hang_state is not None
    assert run.hang_speed == pytest.approx(run.hang_state.speed, rel=1e-4)
    hang = run.hang_state.speed
    torque = drive(0.9).at(hang) - LOAD.at(hang)
    # Power of the drive beyond the load = dissipation of the steady whirl, by the closed form.
    whirl = FAN.damping * hang * abs(complex(response(FAN, hang))) ** 2
    assert float(torque) == pytest.approx(whirl, rel=1e-9)
    assert "stalled" in run.reason
    assert f"{hang:.6g}" in run.reason


@pytest.fixture(scope="module")
def margin() -> DriveMargin:
    return least_drive_torque(FAN, INERTIA, drive(0.9), LOAD, 160.0, tolerance=0.02)


def test_least_torque_lies_between_its_two_runs_and_below_the_quasi_static_one(
    margin: DriveMargin,
) -> None:
    assert margin.stall is not None
    assert margin.stall.outcome == "captured"
    assert margin.passed.outcome == "reached"
    assert margin.load_factor < margin.stalls_at < margin.least_factor
    assert margin.least_factor <= margin.quasi_static_factor * 1.02
    assert margin.least_factor - margin.stalls_at <= 0.02 * margin.least_factor
    assert margin.margin < 0.0


def test_no_steady_state_is_left_above_the_quasi_static_torque(margin: DriveMargin) -> None:
    top = margin.quasi_static_factor
    ends = (1.0, 160.0)
    assert steady_states(FAN, INERTIA, drive(0.9), LOAD, *ends, factor=1.001 * top) == ()
    states = steady_states(FAN, INERTIA, drive(0.9), LOAD, *ends, factor=0.98 * top)
    assert [state.stable for state in states] == [True, False]


def test_very_large_inertia_and_torque_give_the_closed_form_of_constant_acceleration() -> None:
    inertia = 6e6
    alpha = 20.0
    run = run_up(FAN, inertia, TorqueCurve.constant(alpha * inertia, 0.0, 200.0), None, 160.0)
    assert run.time[-1] == pytest.approx(8.0, rel=1e-9)
    exact = passage(FAN, ConstantAcceleration(0.0, 161.0, alpha), run.time)
    top = exact.amplitude.max()
    np.testing.assert_allclose(run.displacement, exact.displacement, atol=2e-6 * top)
    peak = passage_peak(FAN, ConstantAcceleration(0.0, 160.0, alpha))
    assert run.peak.amplitude == pytest.approx(peak.amplitude, rel=2e-6)
    assert run.peak.time == pytest.approx(peak.time, rel=1e-4)


@pytest.mark.parametrize(
    "support",
    [
        None,
        IsotropicSupport(2e6),
        IsotropicSupport(2e6, 900.0),
        IsotropicSupport(2e6, 900.0, 12.0),
    ],
    ids=["rigid", "spring", "spring and damper", "with mass"],
)
def test_supports_bow_and_internal_damping_keep_the_energy_balance(
    support: IsotropicSupport | None,
) -> None:
    rotor = replace(FAN, support=support, bow=1e-4, bow_angle=2.0)
    if support is not None and support.damping > 0.0:
        rotor = replace(rotor, internal_damping=30.0)
    up = run_up(rotor, INERTIA, drive(7.0), LOAD, 150.0)
    assert up.crossed
    assert up.audit.mismatch < 1e-9
    assert up.audit.dissipated > 0.0


def test_support_without_mass_is_the_limit_of_a_light_one() -> None:
    runs = [
        run_up(replace(FAN, support=IsotropicSupport(2e6, 900.0, mass)), INERTIA, drive(7.0),
               None, 150.0)
        for mass in (0.0, 0.5)
    ]  # fmt: skip
    assert runs[0].peak.amplitude == pytest.approx(runs[1].peak.amplitude, rel=2e-3)


def test_coast_down_peaks_below_the_critical_speed_and_trip_goes_through_both_ways() -> None:
    drag = TorqueCurve([0.0, 260.0], [0.8, 2.0], "drag")
    down = coast_down(FAN, INERTIA, drag, 160.0, 20.0)
    assert down.crossed
    assert down.critical_speed is not None
    assert down.peak.speed < down.critical_speed
    assert down.audit.drive == 0.0
    trip = overspeed_trip(FAN, INERTIA, TorqueCurve.constant(5.0, 0, 260), drag, 120.0, 200.0, 20.0)
    assert trip.speed.max() == pytest.approx(200.0, rel=1e-12)
    assert trip.speed[-1] == pytest.approx(20.0, rel=1e-12)
    assert trip.crossed
    assert trip.audit.mismatch < 1e-9


def test_time_above_a_limit_shrinks_with_the_limit_and_ends_at_the_peak() -> None:
    run = run_up(FAN, INERTIA, drive(6.0), None, 160.0)
    top = run.peak.amplitude
    above = [run.time_above(share * top) for share in (0.2, 0.5, 0.9, 1.001)]
    assert above == sorted(above, reverse=True)
    assert above[-1] == 0.0
    dense = np.linspace(run.time[0], run.time[-1], 400_001)
    amplitude = np.interp(dense, run.fine_time, run.fine_amplitude)
    share = np.count_nonzero(amplitude > 0.5 * top) / dense.size
    assert above[1] == pytest.approx(share * run.time[-1], rel=1e-3)


def test_tolerance_of_the_integration_does_not_show_in_the_peak() -> None:
    rough = run_up(FAN, INERTIA, drive(6.0), LOAD, 160.0, rtol=1e-8)
    fine = run_up(FAN, INERTIA, drive(6.0), LOAD, 160.0, rtol=1e-11)
    assert rough.peak.amplitude == pytest.approx(fine.peak.amplitude, rel=2e-5)


def test_run_that_never_meets_the_critical_is_no_passage() -> None:
    run = run_up(FAN, INERTIA, drive(6.0), LOAD, 80.0)
    assert run.outcome == "reached"
    assert not run.crossed
    assert run.crossing_time is None
    assert "no passage" in run.reason


def test_creeping_run_given_up_in_time_says_so() -> None:
    run = run_up(FAN, INERTIA, drive(6.0), LOAD, 160.0, longest=2.0)
    assert run.outcome == "out of time"
    assert not run.crossed
    assert "not reached" in run.reason


@settings(max_examples=8, deadline=None)
@given(zeta=st.floats(0.01, 0.1), e=st.floats(1e-5, 1e-3), torque=st.floats(4.0, 40.0))
def test_energy_is_accounted_for_whatever_the_rotor(zeta: float, e: float, torque: float) -> None:
    rotor = replace(FAN, damping_ratio=zeta, eccentricity=e)
    run = run_up(rotor, 0.3, TorqueCurve.constant(torque, 0.0, 130.0), None, 130.0)
    assert run.audit.mismatch < 1e-8


@settings(max_examples=25, deadline=None)
@given(
    speed=st.floats(1.0, 400.0),
    bow=st.floats(0.0, 1e-3),
    stiffness=st.floats(1e5, 1e8),
    mass=st.sampled_from([0.0, 3.0, 40.0]),
)
def test_steady_whirl_is_a_state_of_rest_of_the_coupled_equations(
    speed: float, bow: float, stiffness: float, mass: float
) -> None:
    rotor = replace(
        FAN, bow=bow, bow_angle=1.0, support=IsotropicSupport(stiffness, 500.0, mass),
        internal_damping=20.0,
    )  # fmt: skip
    coupled = CoupledRotor(rotor, INERTIA)
    torque = float(whirl_torque(coupled, np.array([speed]))[0])
    state = coupled.start(speed)
    rates = coupled.rates(lambda _: torque, lambda _: 0.0)(0.0, state)
    size = coupled.scale()
    motions = coupled.motions
    moved = np.abs(rates[:motions]) / (size[:motions] + np.abs(state[:motions]))
    # Rounding against the largest rate in the equations, k/m or k_s/m_s.
    fastest = max(100.0, speed, stiffness / max(mass, 1.0) / speed, stiffness / 520.0)
    assert moved.max() < 1e-9 * fastest
    assert abs(rates[motions].real) < 1e-8 * (abs(torque) + rotor.stiffness * 1e-6) / INERTIA


def test_curve_that_crosses_the_load_below_the_critical_is_named_before_the_run() -> None:
    weak = TorqueCurve([0.0, 40.0, 80.0, 200.0], [3.0, 1.5, 0.1, 0.05], "drive torque")
    with pytest.raises(
        ModelError, match=r"does not exceed the load torque at 7\d\.\d+ rad/s, below"
    ):
        run_up(FAN, INERTIA, weak, LOAD, 160.0)


@pytest.mark.parametrize(
    ("act", "message"),
    [
        (lambda: run_up(FAN, INERTIA, drive(6.0), None, 220.0), "covers 0 to 200 rad/s"),
        (lambda: run_up(FAN, INERTIA, drive(6.0), None, 0.0), "raise the target"),
        (lambda: coast_down(FAN, INERTIA, LOAD, 100.0, 120.0), "lower the end speed"),
        (lambda: run_up(FAN, 1e6, drive(6.0), LOAD, 160.0), "turns"),
        (
            lambda: run_up(
                replace(FAN, support=IsotropicSupport(2e6, 900.0, 1e-3)),
                INERTIA,
                drive(6.0),
                LOAD,
                160.0,
            ),
            "leave out its mass",
        ),
        (lambda: run_up(FAN, 0.0, drive(6.0), LOAD, 160.0), "moment of inertia"),
        (lambda: run_up(FAN, INERTIA, drive(6.0), LOAD, 160.0, rtol=1e-2), "rtol"),
        (lambda: torque_run(FAN, INERTIA, []), "at least one phase"),
        (lambda: torque_run(FAN, INERTIA, [Phase(0.0, drive(6.0))]), "nothing would change"),
        (
            lambda: coast_down(FAN, INERTIA, TorqueCurve([0, 200], [0.0, 1.0]), 160.0),
            "no torque slows the rotor further at 0 rad/s",
        ),
        (
            lambda: overspeed_trip(FAN, INERTIA, drive(6.0), LOAD, 160.0, 150.0),
            "must lie above the start",
        ),
        (lambda: least_drive_torque(FAN, INERTIA, drive(6.0), LOAD, 60.0), "nothing to pass"),
        (
            lambda: least_drive_torque(
                FAN, INERTIA, TorqueCurve([0, 200], [5.0, -0.5]), LOAD, 199.0
            ),
            "no factor on it",
        ),
        (lambda: TorqueCurve([0.0, 5.0, 3.0], [1, 1, 1]), "row 3 at 3 rad/s does not come after"),
        (lambda: TorqueCurve([0.0, 5.0, 5.0], [1, 1, 1]), "row 3 at 5 rad/s does not come after"),
        (lambda: TorqueCurve([0.0, 5.0], [1, math.nan]), "row 2 is not finite"),
        (lambda: TorqueCurve([0.0], [1]), "two or more"),
        (lambda: TorqueCurve([0.0, 1.0], ["a", "b"]), "not real numbers"),
        (lambda: LOAD.at(201.0), "covers 0 to 200 rad/s"),
    ],
)
def test_what_cannot_be_run_is_refused_with_what_would_do(act, message: str) -> None:  # type: ignore[no-untyped-def]
    with pytest.raises(ModelError, match=message):
        act()
