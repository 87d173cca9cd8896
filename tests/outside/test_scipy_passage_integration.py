"""Exact passage against the equations of motion integrated by SciPy.

Source: computed by SciPy's DOP853 (rtol 1e-10) from x and y written out apart, real, with the
eccentric mass's own acceleration: m ẍ + c ẋ + k (x − b cos) = m e (θ̇² cos θ + θ̈ sin θ), and so on.

Obtained: computed by a general-purpose library.
"""

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from reportgen.rotor.onemass import IsotropicSupport, OneMassRotor
from reportgen.rotor.passage import (
    AT_REST,
    ConstantAcceleration,
    PiecewiseAcceleration,
    WhirlState,
    even_times,
    passage,
    passage_peak,
)

M, K, E, B, BETA = 62.0, 1.9e6, 2e-5, 1e-5, 0.7


def integrated(zeta, start_speed, acceleration, times, state, bow=B):
    c = 2.0 * zeta * np.sqrt(K * M)

    def rates(t, q):
        x, y, u, v = q
        speed, angle = start_speed + acceleration * t, (start_speed + acceleration * t / 2) * t
        cos, sin = np.cos(angle), np.sin(angle)
        fx = M * E * (speed**2 * cos + acceleration * sin) + K * bow * np.cos(angle + BETA)
        fy = M * E * (speed**2 * sin - acceleration * cos) + K * bow * np.sin(angle + BETA)
        return [u, v, (fx - c * u - K * x) / M, (fy - c * v - K * y) / M]

    found = solve_ivp(
        rates, (0, times[-1]), state, method="DOP853", t_eval=times, rtol=1e-10, atol=1e-16
    )
    return found.y[0] + 1j * found.y[1]


@pytest.mark.parametrize("zeta", [0.0, 0.004, 0.08, 0.6, 1.0, 1.4])
@pytest.mark.parametrize(("w0", "w1", "a"), [(0, 400, 150), (0, 500, 4000), (420, 0, -120)])
def test_passage_from_rest_is_the_integrated_motion(zeta, w0, w1, a):
    rotor = OneMassRotor(M, K, zeta, E, bow=B, bow_angle=BETA)
    programme = ConstantAcceleration(w0, w1, a)
    times = even_times(programme, 600)
    exact = passage(rotor, programme, times, AT_REST).displacement
    expected = integrated(zeta, w0, a, times, [0.0] * 4)
    # Errors of the integration add up over some 150 turns.
    assert np.abs(exact - expected).max() < 2e-8 * np.abs(expected).max()


def test_velocity_is_the_slope_of_the_displacement():
    rotor = OneMassRotor(M, K, 0.03, E, bow=B, bow_angle=BETA)
    programme = ConstantAcceleration(0, 400, 300)
    times = even_times(programme, 50)[1:-1]
    step = 1e-5
    around = [passage(rotor, programme, times + n * step).displacement for n in (-2, -1, 1, 2)]
    slope = (around[0] - 8 * around[1] + 8 * around[2] - around[3]) / (12 * step)
    velocity = passage(rotor, programme, times).velocity
    # Fourth-order difference: (ωh)⁴/30 of the velocity, and roundings over h.
    assert np.abs(slope - velocity).max() < 1e-9 * np.abs(velocity).max()


def test_dwell_at_an_undamped_critical_grows_as_integrated():
    rotor = OneMassRotor(M, K, 0.0, E)
    critical = rotor.natural_frequency
    programme = PiecewiseAcceleration([(0.0, critical), (1.0, critical)])
    times = even_times(programme, 200)
    exact = passage(rotor, programme, times, AT_REST).displacement
    expected = integrated(0.0, critical, 0.0, times, [0.0] * 4, bow=0.0)
    assert np.abs(exact - expected).max() < 1e-8 * np.abs(expected).max()
    # Growth e Ω t/2 (any textbook on resonance from rest), less than one cycle's share.
    assert abs(expected[-1]) == pytest.approx(E * critical / 2, rel=0.01)


def test_flexible_support_passage_is_the_integrated_motion():
    own = IsotropicSupport(3e6, 900.0, 8.0)
    rotor = OneMassRotor(M, K, 0.02, E, support=own)
    programme = ConstantAcceleration(20, 320, 200)
    times = even_times(programme, 400)
    c = rotor.damping

    def rates(t, q):
        z, v, y, u = q
        speed, angle = 20 + 200 * t, (20 + 100 * t) * t
        force = M * E * (speed**2 - 200j) * np.exp(1j * angle)
        return np.array(
            [
                v,
                (force - c * v - K * (z - y)) / M,
                u,
                (K * (z - y) - own.stiffness * y - own.damping * u) / own.mass,
            ]
        )

    start = np.array([1e-5j, 2e-3, 3e-6, 1e-3j])
    found = solve_ivp(
        rates, (0, times[-1]), start, method="DOP853", t_eval=times, rtol=1e-10, atol=1e-16
    )
    exact = passage(rotor, programme, times, WhirlState(*start)).displacement
    assert np.abs(exact - found.y[0]).max() < 2e-8 * np.abs(exact).max()


@pytest.mark.parametrize("zeta", [0.0, 0.02, 0.2])
@pytest.mark.parametrize(("w0", "w1", "a"), [(0, 500, 300), (500, 0, -300), (0, 500, 3000)])
def test_peak_is_that_of_a_densely_sampled_integration(zeta, w0, w1, a):
    rotor = OneMassRotor(M, K, zeta, E, bow=B, bow_angle=BETA)
    programme = ConstantAcceleration(w0, w1, a)
    times = even_times(programme, 8001)
    dense = np.abs(integrated(zeta, w0, a, times, [0.0] * 4))
    peak = passage_peak(rotor, programme, AT_REST)
    # The step is at most 1/20 of the fastest beat: (2π/20·1/2)²/2 of the beating part at most.
    assert dense.max() <= peak.amplitude * (1 + 1e-7)
    assert dense.max() == pytest.approx(peak.amplitude, rel=2e-3)
    assert peak.time == pytest.approx(times[dense.argmax()], abs=3 * (times[1] - times[0]))
