"""Speed of a passage of 60 stations; ratios within one run.

Run with one thread: OPENBLAS_NUM_THREADS=1 OMP_NUM_THREADS=1
pytest tests/bench/bench_station_passage.py -o python_files='bench_*.py' -s

The reference steps the whole rotor by the rule of constant average acceleration, with the
sparse factor of the effective matrix made again only where the speed has moved by 0.2 %.
"""

from __future__ import annotations

import math
import time

import numpy as np
import scipy.sparse as sp
from scipy.sparse.linalg import splu

from reportgen.rotor import passage
from reportgen.rotor import stations as mechanics
from reportgen.rotor.stations import Bearing, Constant, Disc, Material, Rotor, Section, Unbalance
from reportgen.rotor.transient.programme import Prescribed
from reportgen.rotor.transient.station_run import station_run

STATIONS, MIDDLE = 60, 30
STEEL = Material(7850.0, 2.05e11, 0.29)
ENDS = (
    Bearing(4, Constant(np.eye(2) * 5e7, np.eye(2) * 4e4)),
    Bearing(55, Constant(np.eye(2) * 5e7, np.eye(2) * 4e4)),
)
MODEL = mechanics.assemble(
    Rotor(
        tuple(Section(1.2 / (STATIONS - 1), 0.06, STEEL) for _ in range(STATIONS - 1)),
        (Disc(MIDDLE, 50.0, 0.8, 0.45),),
        bearings=ENDS,
    )
)
UNBALANCE = (Unbalance(MIDDLE, 4e-4),)
CRITICAL = 293.0
PROGRAMME = Prescribed(passage.ConstantAcceleration(0.7 * CRITICAL, 1.3 * CRITICAL, 20.0))


def reduced_peak() -> float:
    run = station_run(MODEL, PROGRAMME, UNBALANCE, None, 4, CRITICAL)
    return float(np.abs(run.displacement(MIDDLE)).max())


def whole_peak(per_cycle: int) -> float:
    """Step the whole rotor, as lean as it can be written with sparse factors."""
    span = PROGRAMME.end_time
    count = math.ceil(span * 1.3 * CRITICAL / (2 * math.pi) * per_cycle)
    h = span / count
    times = h * np.arange(count + 1)
    speed, angle = PROGRAMME.speed(times), PROGRAMME.angle(times)
    force = 4e-4 * (speed**2 - 20j) * np.exp(1j * angle)
    x, y = 4 * MODEL.node(MIDDLE), 4 * MODEL.node(MIDDLE) + 2
    w = float(speed[0])
    d = mechanics.dense_matrices(MODEL, w)
    M = sp.csr_matrix(d.mass)
    load = np.zeros(M.shape[0], dtype=complex)
    load[x], load[y] = 4e-4 * w**2, -1j * 4e-4 * w**2
    still = np.linalg.solve(d.stiffness - w**2 * d.mass + 1j * w * d.damping, load)
    q, v = still.real.copy(), (1j * w * still).real.copy()
    a = (-(w**2) * still).real.copy()
    at, top = 0.0, 0.0
    for j in range(1, count + 1):
        if abs(speed[j] - at) > 2e-3 * at:
            at = float(speed[j])
            d = mechanics.dense_matrices(MODEL, at)
            C = sp.csr_matrix(d.damping)
            solve = splu(sp.csc_matrix(d.stiffness + 2 / h * d.damping + 4 / h**2 * d.mass)).solve
        right = M @ (4 / h**2 * q + 4 / h * v + a) + C @ (2 / h * q + v)
        right[x] += force[j].real
        right[y] += force[j].imag
        new = solve(right)
        v, a, q = (
            2 / h * (new - q) - v,
            4 / h**2 * (new - q) - 4 / h * v - a,
            new,
        )
        top = max(top, math.hypot(q[x], q[y]))
    return top


def test_both_sides_reach_the_same_peak() -> None:
    reduced = reduced_peak()
    finest = whole_peak(240)
    assert abs(reduced / finest - 1) < 1e-3
    # the coarsest steps that keep 0.1 % of the peak, which the comparison of times uses
    assert abs(whole_peak(90) / finest - 1) < 1e-3


def test_a_passage_of_60_stations(benchmark) -> None:  # type: ignore[no-untyped-def]
    start = time.perf_counter()
    whole_peak(90)
    direct = time.perf_counter() - start
    benchmark(reduced_peak)
    ratio = direct / benchmark.stats.stats.min
    benchmark.extra_info["times faster than the whole rotor"] = round(ratio, 1)
    print(f"\nwhole rotor {direct:.2f} s, ratio {ratio:.0f}")
    assert ratio >= 20.0
