"""A whole run of a demo, and a batch, against plain papermill and nbconvert on the same template.

Ratios within one run; the plain side has neither PDF nor signature.
"""

from __future__ import annotations

import json
import os
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

ROOT = Path(__file__).resolve().parents[2]
TEMPLATE = ROOT / "templates" / "one-mass-whirl.ipynb"
CASE = ROOT / "cases" / "booster-fan.yaml"
ENVIRONMENT = {**os.environ, "OPENBLAS_NUM_THREADS": "1", "OMP_NUM_THREADS": "1"}


def shell(*words: object, home: Path) -> None:
    subprocess.run(
        [sys.executable, "-m", *map(str, words)],
        check=True,
        capture_output=True,
        env={**ENVIRONMENT, "REPORTGEN_HOME": str(home)},
    )


@pytest.fixture
def ours(tmp_path: Path) -> Callable[..., None]:
    def run(*words: object) -> None:
        done = subprocess.run(
            [sys.executable, "-m", "reportgen.cli", "run", *map(str, words)],
            capture_output=True,
            env={**ENVIRONMENT, "REPORTGEN_HOME": str(tmp_path)},
            check=False,
        )
        assert done.returncode in (0, 3), done.stderr

    return run


@pytest.fixture
def plain(ours: Callable[..., None], tmp_path: Path) -> Callable[[], None]:
    """Give one papermill run with the resolved case, and its conversion to HTML."""
    ours(CASE, "-o", tmp_path / "first")
    (inputs,) = (tmp_path / "first").glob("*/data/inputs.json")
    (tmp_path / "parameters.yaml").write_text(
        json.dumps({"case": json.loads(inputs.read_bytes())}), encoding="utf-8"
    )
    made = tmp_path / "plain.ipynb"

    def run() -> None:
        words = (TEMPLATE, made, "-f", tmp_path / "parameters.yaml", "--no-progress-bar")
        shell("papermill", *words, home=tmp_path)
        shell("nbconvert", "--to", "html", made, home=tmp_path)

    return run


def seconds(call: Callable[[], object]) -> float:
    start = time.perf_counter()
    call()
    return time.perf_counter() - start


def test_one_case_against_plain_papermill_and_nbconvert(
    benchmark: Any, ours: Callable[..., None], plain: Callable[[], None], tmp_path: Path
) -> None:
    runs = iter(range(100))
    best = min(seconds(plain) for _ in range(3))

    def whole() -> None:
        ours(CASE, "--fresh", "-o", tmp_path / f"out-{next(runs)}")

    benchmark.pedantic(whole, rounds=3)
    benchmark.extra_info["plain over ours"] = best / benchmark.stats["min"]


def test_32_cases_on_two_processes(
    benchmark: Any, ours: Callable[..., None], plain: Callable[[], None], tmp_path: Path
) -> None:
    (tmp_path / "booster-fan.yaml").write_bytes(CASE.read_bytes())
    masses = ", ".join(f"{400 + n} lb" for n in range(32))
    (tmp_path / "family.yaml").write_text(
        "reportgen: 1\nfamily: Many wheels\ncase: booster-fan.yaml\nnumber: CAL-0460\n"
        f"grid: {{rotor.mass: [{masses}]}}\n",
        encoding="utf-8",
    )
    words = (tmp_path / "family.yaml", "-j", 2, "-o", tmp_path / "out")
    benchmark.pedantic(lambda: ours(*words), rounds=1)
    one = min(seconds(plain) for _ in range(3))
    benchmark.extra_info["plain loop of 32, extrapolated, over ours"] = (
        32 * one / benchmark.stats["min"]
    )
    benchmark.extra_info["rerun without a change, s"] = seconds(lambda: ours(*words))
