"""Tolerance studies: arrays against a loop over single rotors, and processes for the stations.

Run with ``pytest tests/bench/bench_study.py -o python_files='bench_*.py' -s``. The loop is timed
on some rotors and extrapolated to as many as the arrays hold; both stand in what is printed.
"""

from __future__ import annotations

import time
from concurrent.futures import ProcessPoolExecutor
from multiprocessing import get_context
from pathlib import Path

import numpy as np
import pytest

from reportgen.assess.one_mass_rotor import rotor_of
from reportgen.case import from_resolved, read_case
from reportgen.rotor import onemass, passage
from reportgen.study.evaluate import Model
from reportgen.study.inputs import case_with, values_of, varied_of
from reportgen.study.sampling import design

CASES = Path(__file__).parents[2] / "cases"
SAMPLES, LOOPED = 100_000, 300
STATIONS = "../tests/study/rotor-by-stations.yaml"
RATES: dict[int, float] = {}


def drawn(name: str, samples: int) -> tuple[Model, np.ndarray]:
    case = read_case(CASES / name)
    varied = varied_of(case)
    unit = design("random", 1 << (samples - 1).bit_length(), len(varied), 1).A[:samples]
    return Model.of(case.resolved(), [v.place for v in varied]), values_of(varied, unit)


def critical_and_amplitude(case) -> None:
    """Call the scalar functions that a study of running speeds needs, and nothing else."""
    rotor = rotor_of(case)
    onemass.resonance_peak(rotor)
    onemass.amplification_factor(rotor)
    for speed in case.speeds.stated().values():
        onemass.response(rotor, speed)


def with_passages(case) -> None:
    """Call the same, and each passage."""
    critical_and_amplitude(case)
    rotor = rotor_of(case)
    for one in case.passages:
        ramp = passage.ConstantAcceleration(float(one.from_), float(one.to),
                                            float(one.acceleration))  # fmt: skip
        passage.passage_peak(rotor, ramp)


@pytest.mark.parametrize(
    ("name", "scalar"),
    [("circulating-pump.yaml", critical_and_amplitude), ("exhauster.yaml", with_passages)],
)
def test_arrays_against_a_loop_over_single_rotors(benchmark, name, scalar, capsys):
    model, values = drawn(name, SAMPLES)
    assert model.at_once
    # reading the values into a case is not part of the loop that is timed
    cases = [
        from_resolved(case_with(model.resolved, model.places, list(row))) for row in values[:LOOPED]
    ]
    start = time.perf_counter()
    for case in cases:
        scalar(case)
    loop = (time.perf_counter() - start) / LOOPED * SAMPLES
    found = benchmark.pedantic(lambda: model.outcomes(values), rounds=3, warmup_rounds=1)
    assert found.margin.shape[1] == SAMPLES
    share = benchmark.stats.stats.median / loop
    benchmark.extra_info["loop, extrapolated (s)"] = round(loop, 1)
    benchmark.extra_info["share of the loop"] = round(share, 5)
    with capsys.disabled():
        print(
            f"\n{name}: {SAMPLES} rotors in {benchmark.stats.stats.median:.3f} s; a loop over "
            f"{LOOPED}, extrapolated: {loop:.0f} s; {100 * share:.2f} % of it"
        )


def processes(count):
    return ProcessPoolExecutor(count, mp_context=get_context("spawn"))


@pytest.mark.parametrize("workers", [1, 2])
def test_stations_on_processes(benchmark, workers, capsys):
    """The station model on one and two processes, each warm before it is timed."""
    model, values = drawn(STATIONS, 512)
    assert not model.at_once
    with processes(workers) as pool:
        model.outcomes(values[:64], pool.map)
        benchmark.pedantic(lambda: model.outcomes(values, pool.map), rounds=3)
    rate = len(values) / benchmark.stats.stats.median
    RATES[workers] = rate
    words = f"stations, {workers} workers: {rate:.0f} samples/s"
    if len(RATES) == 2:
        words += f"; efficiency on two {RATES[2] / (2 * RATES[1]):.0%}"
    with capsys.disabled():
        print(f"\n{words}")
