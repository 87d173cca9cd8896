"""Rotor on a drive of limited power, against equations and balances made here from the sources.

Sources: Sommerfeld (1902) and Kononenko (1969) for the coupled equations and the steady balance of
drive and whirl (common knowledge, written out from Lagrange's equations); the integrators Radau
and DOP853 of scipy as a general-purpose library. Nothing here is computed by the code under test
but what is compared.

Obtained: equations from memory, computed by a general-purpose library.
"""

from __future__ import annotations

import numpy as np
import pytest
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

from reportgen.rotor.onemass_model import OneMassRotor
from reportgen.rotor.transient import Phase, TorqueCurve, run_up, torque_run
from reportgen.rotor.transient.coupled import ANGLE, SPEED, CoupledRotor
from reportgen.rotor.transient.stepper import Leg, Track, run_leg

M, K, ZETA, E, J = 25.0, 2.5e5, 0.02, 4e-4, 0.15
C = 2.0 * ZETA * np.sqrt(K * M)
TORQUE = 1.2


def rotor(zeta: float = ZETA) -> OneMassRotor:
    return OneMassRotor(M, K, zeta, E)


def fixed_frame(c: float, torque: float):  # type: ignore[no-untyped-def]
    """Lagrange's equations in real x, y, θ in the frame at rest, solved as a 3 × 3 system."""

    def rates(_: float, s: np.ndarray) -> np.ndarray:
        x, y, a, vx, vy, w = s
        sin, cos = np.sin(a), np.cos(a)
        mass = np.array(
            [
                [M, 0.0, -M * E * sin],
                [0.0, M, M * E * cos],
                [-M * E * sin, M * E * cos, J + M * E**2],
            ]
        )
        force = np.array(
            [
                -K * x - c * vx + M * E * w**2 * cos,
                -K * y - c * vy + M * E * w**2 * sin,
                torque,
            ]
        )
        return np.concatenate([[vx, vy, w], np.linalg.solve(mass, force)])

    return rates


@pytest.mark.parametrize("method", ["Radau", "DOP853"])
def test_run_up_agrees_with_a_general_integrator_in_the_frame_at_rest(method: str) -> None:
    run = run_up(rotor(), J, TorqueCurve.constant(TORQUE, 0.0, 200.0), None, 130.0)
    tight = 1e-9 if method == "DOP853" else 1e-7
    # Compared up to some turns past the passage.
    end = run.peak.time * 1.1
    at = run.time[run.time <= end]
    done = solve_ivp(
        fixed_frame(C, TORQUE), (0.0, end), np.zeros(6), method=method, t_eval=at,
        rtol=tight, atol=tight * np.array([E, E, 1.0, 100 * E, 100 * E, 100.0]),
    )  # fmt: skip
    assert done.success
    ours = run.displacement[: at.size]
    theirs = done.y[0] + 1j * done.y[1]
    assert np.abs(ours - theirs).max() < (1e-5 if method == "DOP853" else 2e-3) * np.abs(ours).max()
    np.testing.assert_allclose(run.speed[: at.size], done.y[5], atol=1e-3 * 100.0)


def test_undamped_coupled_rotor_keeps_its_energy_to_1e_8() -> None:
    # No damping, no torque but the start: whirl and speed exchange energy near the critical.
    undamped = rotor(0.0)
    push = Phase(99.0, TorqueCurve.constant(0.8, 0.0, 99.5))
    run = torque_run(undamped, J, [push], 60.0, rtol=1e-11)
    assert run.audit.dissipated == 0.0
    given = run.audit.drive
    assert run.audit.stored_end - run.audit.stored_start == pytest.approx(given, rel=1e-8)


def test_free_undamped_motion_keeps_energy_and_angular_momentum_to_1e_8() -> None:
    """Free of torque, the energy (written out here) and the moment of momentum stay.

    The moment about the axis is J θ̇ + m Im(z̄_G ż_G) of the whole, the spring being central.
    """
    coupled = CoupledRotor(rotor(0.0), J)
    first = coupled.start(97.0)
    track = Track()
    track.add(0.0, first, first)
    leg = Leg(lambda _: 0.0, lambda _: 0.0, 1e9, 10.0, 6.0)
    # Disturb the steady whirl so that it beats.
    track.state[0][0] *= 1.1
    run_leg(coupled, leg, track, 1e-11)
    states = np.array(track.state)
    turning = np.exp(1j * states[:, ANGLE].real)
    z, v, w = states[:, 0] * turning, states[:, 1] * turning, states[:, SPEED].real
    centre, moving = z + E * turning, v + 1j * w * E * turning
    energy = 0.5 * M * np.abs(moving) ** 2 + 0.5 * K * np.abs(z) ** 2 + 0.5 * J * w**2
    moment = J * w + M * (centre.conj() * moving).imag
    assert np.ptp(w) > 0.05
    assert np.ptp(energy) < 1e-8 * energy[0]
    assert np.ptp(moment) < 1e-8 * abs(moment[0])


def test_stall_is_where_drive_power_equals_whirl_dissipation() -> None:
    torque = 0.45

    def amplitude(w: float) -> float:
        r = w / np.sqrt(K / M)
        return E * r**2 / np.sqrt((1 - r**2) ** 2 + (2 * ZETA * r) ** 2)

    hang = brentq(lambda w: torque * w - C * (w * amplitude(w)) ** 2, 50.0, 99.9)
    assert (
        torque < C * 100.0 * (E / (2 * ZETA)) ** 2
    )  # the whirl can take more than the drive gives
    run = run_up(rotor(), J, TorqueCurve.constant(torque, 0.0, 200.0), None, 150.0)
    assert run.outcome == "captured"
    assert run.hang_speed == pytest.approx(hang, rel=1e-4)
    assert run.hang_state is not None
    assert run.hang_state.speed == pytest.approx(hang, rel=1e-9)
    assert abs(run.displacement[-1]) == pytest.approx(amplitude(hang), rel=0.01)
