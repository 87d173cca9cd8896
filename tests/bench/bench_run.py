"""Time of a notebook in a warm and in a plain kernel, and of a batch on one and two processes.

Ratios within one run; see the ``extra_info`` of each benchmark.
"""

from __future__ import annotations

import functools
import importlib
import sys
import time
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import nbformat
import papermill
import pytest
from nbformat.v4 import new_code_cell, new_notebook

from reportgen.run.batch import run_many
from reportgen.run.cache import RunStore, run_key
from reportgen.run.environment import environment
from reportgen.run.execute import execute
from reportgen.run.warm import close_warm

WORK = """import numpy as np
import matplotlib.pyplot as plt
from scipy import special
x = np.linspace(0, 10, 2000)
figure, axes = plt.subplots()
axes.plot(x, special.jv(0, x), label=r"$\\omega_n$")
axes.legend();"""
END = """from IPython.display import display
display({"application/vnd.reportgen.results+json": {"case": case}}, raw=True)"""

JOBS = """from reportgen.run.execute import execute
def job(template, kernel, case):
    return execute(template, {"case": case.name}, kernel=kernel).results
"""


@pytest.fixture
def template(tmp_path: Path) -> Iterator[Path]:
    """Give a template with the imports and one figure of a small report."""
    cells = [new_code_cell("case = {}", metadata={"tags": ["parameters"]})]
    cells += [new_code_cell(source) for source in (WORK, END)]
    kernelspec = {"name": "python3", "display_name": "Python 3", "language": "python"}
    path = tmp_path / "small.ipynb"
    path.write_text(nbformat.writes(new_notebook(cells=cells, metadata={"kernelspec": kernelspec})))
    yield path
    close_warm()


def seconds(call: Callable[[], object], times: int) -> float:
    start = time.perf_counter()
    for _ in range(times):
        call()
    return (time.perf_counter() - start) / times


def test_one_notebook_in_a_warm_kernel(benchmark: Any, template: Path) -> None:
    """Against a plain kernel of ours, and against papermill as it comes."""
    execute(template, {})
    plain = seconds(lambda: execute(template, {}, kernel="plain"), 4)
    bare = seconds(
        lambda: papermill.execute_notebook(
            str(template), None, parameters={"case": {}}, progress_bar=False
        ),
        4,
    )
    benchmark.pedantic(lambda: execute(template, {}), rounds=10)
    warm = benchmark.stats.stats.mean
    benchmark.extra_info.update(
        warm_s=warm,
        plain_s=plain,
        papermill_s=bare,
        plain_to_warm=plain / warm,
        papermill_to_warm=bare / warm,
    )
    print(benchmark.extra_info)


def test_a_batch_on_two_processes(
    benchmark: Any, template: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Notebooks a second of two processes, start-up included: warm against plain."""
    (tmp_path / "bench_jobs.py").write_text(JOBS)
    monkeypatch.syspath_prepend(tmp_path)
    monkeypatch.delitem(sys.modules, "bench_jobs", raising=False)
    jobs = importlib.import_module("bench_jobs")
    cases = [Path(f"case-{number}") for number in range(16)]

    def batch(kernel: str) -> None:
        job = functools.partial(jobs.job, template, kernel)
        assert run_many(job, cases, 2, warm=kernel == "warm").exit_status == 0

    plain = seconds(lambda: batch("plain"), 1)
    benchmark.pedantic(lambda: batch("warm"), rounds=2)
    warm = benchmark.stats.stats.mean
    benchmark.extra_info.update(
        warm_per_s=len(cases) / warm, plain_per_s=len(cases) / plain, plain_to_warm=plain / warm
    )
    print(benchmark.extra_info)


def test_looking_up_32_runs_that_need_not_be_done(benchmark: Any, tmp_path: Path) -> None:
    """Keys and look-ups of 32 cases, as the second run of a batch would make them."""
    store = RunStore(tmp_path)
    inputs = [{"case.yaml": f"{number:0128x}"} for number in range(32)]
    versions = environment()
    for given in inputs:
        store.record(run_key(given, "t", versions=versions), {"package": "x"})

    def look_up() -> None:
        now = {**environment(), "code_sha512": versions["code_sha512"]}
        assert all(store.look_up(run_key(given, "t", versions=now)) for given in inputs)

    benchmark(look_up)
