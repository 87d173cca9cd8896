"""Exact passage against integration at equal accuracy, in one run.

Run: pytest tests/bench/bench_passage.py -o python_files='bench_*.py' -s

Each ratio is also asserted here, where a slow machine slows both sides alike.
"""

import time

import numpy as np
import pytest

from reportgen.rotor.onemass import OneMassRotor
from reportgen.rotor.passage import ConstantAcceleration, even_times, passage
from reportgen.rotor.passage_integrated import passage_integrated
from reportgen.rotor.passage_map import peak_map

ROTOR = OneMassRotor(62.0, 1.9e6, 0.02, 2e-5)
PROGRAMME = ConstantAcceleration(0.0, 400.0, 25.0)
INSTANTS = even_times(PROGRAMME, 10_000)


def best(function, rounds):
    times = []
    for _ in range(rounds):
        start = time.perf_counter()
        function()
        times.append(time.perf_counter() - start)
    return min(times)


def plain_integration(rtol=1e-9):
    """DOP853 on the bare complex equation of motion, as lean as it can be written.

    rtol 1e-9 is the loosest decade that keeps 1e-8 of the peak over this run.
    """
    from cmath import exp

    from scipy.integrate import solve_ivp

    w2, c = ROTOR.natural_frequency**2, 2.0 * ROTOR.damping_ratio * ROTOR.natural_frequency
    a, e = PROGRAMME.acceleration, ROTOR.eccentricity

    def rates(t, q):
        z, v = q
        speed = a * t
        return (v, e * (speed * speed - 1j * a) * exp(0.5j * a * t * t) - c * v - w2 * z)

    return solve_ivp(
        rates,
        (0.0, INSTANTS[-1]),
        np.zeros(2, dtype=complex),
        method="DOP853",
        t_eval=INSTANTS,
        rtol=rtol,
        atol=rtol * e,
    ).y[0]


def test_both_sides_reach_the_stated_accuracy():
    exact = passage(ROTOR, PROGRAMME, INSTANTS).displacement
    reference = plain_integration(1e-12)
    size = np.abs(reference).max()
    assert np.abs(exact - reference).max() < 1e-8 * size
    assert np.abs(plain_integration() - reference).max() < 1e-8 * size
    assert np.abs(plain_integration(1e-8) - reference).max() > 1e-8 * size


def test_exact_passage_at_ten_thousand_instants(benchmark):
    integration = best(plain_integration, 3)
    benchmark(passage, ROTOR, PROGRAMME, INSTANTS)
    ratio = integration / benchmark.stats.stats.min
    benchmark.extra_info["times faster than DOP853 at 1e-8"] = round(ratio, 1)
    print(f"\nDOP853 {integration:.3f} s, ratio {ratio:.0f}")
    assert ratio >= 100.0


def test_integrated_passage(benchmark):
    benchmark.pedantic(passage_integrated, (ROTOR, PROGRAMME, INSTANTS), rounds=3)


@pytest.mark.parametrize("sign", [1.0, -1.0])
def test_map_of_forty_thousand_peaks(benchmark, sign):
    scaled = PROGRAMME.acceleration / ROTOR.natural_frequency**2
    zetas = np.linspace(0.0, 0.2, 200)
    accelerations = sign * scaled * np.geomspace(0.03, 30.0, 200)
    integration = best(plain_integration, 3)
    benchmark.pedantic(peak_map, (zetas, accelerations), rounds=3)
    ratio = 40.0 * integration / benchmark.stats.stats.min
    benchmark.extra_info["forty DOP853 runs over the map"] = round(ratio, 1)
    print(f"\n40 runs {40 * integration:.1f} s, ratio {ratio:.1f}")
    assert ratio > 1.0
