"""Speed of the station model; ratios within one run.

Run with one thread: OPENBLAS_NUM_THREADS=1 OMP_NUM_THREADS=1
pytest tests/bench/bench_stations.py -o python_files='bench_*.py' -s

The dense references time numpy.linalg.solve at each speed with the matrix formed from
ready M, C, K, and scipy.linalg.eig on the companion matrix at a few speeds, scaled to all.
"""

from __future__ import annotations

import time
import tracemalloc

import numpy as np
import pytest
import scipy.linalg

from reportgen.rotor.stations import (
    Bearing,
    Constant,
    Disc,
    Material,
    Model,
    Rotor,
    Section,
    Unbalance,
    assemble,
    campbell,
    dense_eigenvalues,
    dense_matrices,
    unbalance_response,
)

STEEL = Material(7850.0, 2.06e11)
STIFFNESS = [[8e7, 2e7], [-3e7, 6e7]]
DAMPING = [[2e5, 1e4], [1e4, 1.5e5]]


def machine(stations: int) -> Model:
    sections = tuple(
        Section(2.4 / (stations - 1), 0.12 + 0.03 * np.sin(i), STEEL) for i in range(stations - 1)
    )
    step = max(1, stations // 12)
    discs = tuple(Disc(i, 20.0, 0.4, 0.25) for i in range(stations // 4, 3 * stations // 4, step))
    bearing = Constant(STIFFNESS, DAMPING)
    ends = (stations // 15, stations - 1 - stations // 15)
    return assemble(Rotor(sections, discs, bearings=tuple(Bearing(i, bearing) for i in ends)))


def best(run, rounds: int = 3) -> float:  # type: ignore[no-untyped-def]
    times = []
    for _ in range(rounds):
        start = time.perf_counter()
        run()
        times.append(time.perf_counter() - start)
    return min(times)


def test_response_of_60_stations_at_1000_speeds(benchmark) -> None:  # type: ignore[no-untyped-def]
    model, speeds = machine(60), np.linspace(10, 1500, 1000)
    case = [Unbalance(20, 1e-4), Unbalance(40, 1e-4, 1.0)]
    d = dense_matrices(model, 1.0)
    plain = dense_matrices(model, 0.0)
    gyroscopic = d.damping - plain.damping
    r = unbalance_response(model, speeds, case)

    def dense() -> np.ndarray:
        out = np.empty((1000, d.mass.shape[0]), dtype=complex)
        force = np.zeros(d.mass.shape[0], dtype=complex)
        for s, w in enumerate(speeds):
            force[0 : 4 * 60 : 4] = r.load[:, 0, s]
            force[2 : 4 * 60 : 4] = -1j * r.load[:, 0, s]
            z = plain.stiffness - w**2 * d.mass + 1j * w * (plain.damping + w * gyroscopic)
            out[s] = np.linalg.solve(z, force)
        return out

    reference = dense()
    assert np.abs(r.x.T - reference[:, 0 : 4 * 60 : 4]).max() < 1e-8 * np.abs(reference).max()
    slow = best(dense, 2)
    benchmark(unbalance_response, model, speeds, case)
    fast = benchmark.stats.stats.min
    tracemalloc.start()
    unbalance_response(model, speeds, case)
    peak = tracemalloc.get_traced_memory()[1] / 1e6
    tracemalloc.stop()
    benchmark.extra_info.update(dense_s=slow, ratio=slow / fast, peak_megabytes=peak)
    print(
        f"\nresponse {fast:.4f} s, dense {slow:.3f} s, ratio {slow / fast:.1f}, peak {peak:.0f} MB"
    )


def test_campbell_of_12_modes_at_60_speeds(benchmark) -> None:  # type: ignore[no-untyped-def]
    model, speeds = machine(60), np.linspace(10, 1500, 60)
    chart = campbell(model, speeds, 12)
    slow = 0.0
    for s in (0, 29, 59):
        d = dense_matrices(model, speeds[s])
        n = d.mass.shape[0]
        companion = np.block(
            [
                [np.zeros((n, n)), np.eye(n)],
                [-np.linalg.solve(d.mass, d.stiffness), -np.linalg.solve(d.mass, d.damping)],
            ]
        )
        start = time.perf_counter()
        scipy.linalg.eig(companion)
        slow += time.perf_counter() - start
        exact = dense_eigenvalues(d)
        mine = chart.exponents[chart.present[:, s], s]
        assert max(np.abs(exact - lam).min() / abs(lam) for lam in mine) < 1e-8
    slow *= 20
    benchmark.pedantic(campbell, (model, speeds, 12), rounds=3)
    fast = benchmark.stats.stats.min
    benchmark.extra_info.update(dense_s=slow, ratio=slow / fast)
    print(f"\ncampbell {fast:.3f} s, dense {slow:.1f} s (3 of 60 timed), ratio {slow / fast:.0f}")


@pytest.mark.parametrize("stations", [30, 60, 120, 240])
def test_response_time_is_linear_in_stations(benchmark, stations: int) -> None:  # type: ignore[no-untyped-def]
    model, speeds = machine(stations), np.linspace(10, 1500, 1000)
    benchmark(unbalance_response, model, speeds, [Unbalance(stations // 2, 1e-4)])
    per = benchmark.stats.stats.min / stations * 1e3
    benchmark.extra_info.update(milliseconds_per_station=per)
    print(f"\n{stations} stations: {benchmark.stats.stats.min:.4f} s, {per:.3f} ms per station")


@pytest.mark.parametrize("stations", [30, 60, 120, 240])
def test_campbell_time_is_linear_in_stations(benchmark, stations: int) -> None:  # type: ignore[no-untyped-def]
    model, speeds = machine(stations), np.linspace(10, 1500, 60)
    benchmark.pedantic(campbell, (model, speeds, 12), rounds=2)
    print(f"\n{stations} stations: campbell {benchmark.stats.stats.min:.3f} s")
