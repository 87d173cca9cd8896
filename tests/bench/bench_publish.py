"""Time from an executed notebook to HTML and PDF, against nbconvert's plain HTML of the same.

Ratios within one run, on the notebook of a demo case; see each benchmark's ``extra_info``.
"""

from __future__ import annotations

import itertools
import json
import os
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

import nbformat
import pytest
from nbconvert import HTMLExporter

from reportgen.publish import publish

ROOT = Path(__file__).parents[2]
OURS = """import json, sys
from pathlib import Path
from reportgen.publish import publish
place = Path(sys.argv[1])
notebook = place.read_bytes()
made = publish(json.loads(notebook), attachments={"calculation.ipynb": notebook})
place.with_suffix(".html").write_bytes(made.html)
place.with_suffix(".pdf").write_bytes(made.pdf)
"""


@pytest.fixture(scope="module", params=["circulating-pump", "booster-fan"])
def notebook(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Give the executed notebook of a demo case."""
    out = tmp_path_factory.mktemp("demo")
    case = ROOT / "cases" / f"{request.param}.yaml"
    command = [sys.executable, "-m", "reportgen.cli", "run", "--no-sign", "-o", out, case]
    assert subprocess.run(command, capture_output=True, check=False).returncode in (0, 3)
    return next(out.glob("*/data/calculation.ipynb"))


def best(call: Callable[[], object], times: int) -> float:
    """Return the shortest of some times in s: what the work takes, without what disturbs it."""
    found = []
    for _ in range(times):
        start = time.perf_counter()
        call()
        found.append(time.perf_counter() - start)
    return min(found)


def test_as_programs(benchmark: Any, notebook: Path, tmp_path: Path) -> None:
    """Both as a user starts them: a fresh process each, start-up included."""
    mine, other = tmp_path / "mine.ipynb", tmp_path / "other.ipynb"
    mine.write_bytes(notebook.read_bytes())
    other.write_bytes(notebook.read_bytes())
    environment = {**os.environ, "PYTHONWARNINGS": "ignore"}

    def run(*command: object) -> None:
        subprocess.run(list(map(str, command)), capture_output=True, check=True, env=environment)

    def ours() -> None:
        run(sys.executable, "-c", OURS, mine)

    def plain() -> None:
        run(sys.executable, "-m", "nbconvert", "--to", "html", other)

    plain()
    shortest = best(plain, 5)
    benchmark.pedantic(ours, rounds=5, warmup_rounds=1)
    benchmark.extra_info["nbconvert_html_s"] = shortest
    benchmark.extra_info["ratio"] = benchmark.stats.stats.min / shortest


def test_within_a_process(benchmark: Any, notebook: Path) -> None:
    """Both called from Python when all is imported, as in a batch: each time another report."""
    content = notebook.read_text("utf-8")
    number = notebook.parents[1].name.partition("_")[0]
    others = (content.replace(number, f"CAL-9{n:03d}") for n in itertools.count())
    plain = HTMLExporter()

    def theirs() -> None:
        plain.from_notebook_node(nbformat.reads(next(others), as_version=4))

    def ours() -> None:
        one = next(others)
        publish(json.loads(one), attachments={"calculation.ipynb": one.encode()})

    theirs()
    shortest = best(theirs, 5)
    benchmark.pedantic(ours, rounds=5, warmup_rounds=1)
    benchmark.extra_info["nbconvert_html_s"] = shortest
    benchmark.extra_info["ratio"] = benchmark.stats.stats.min / shortest
