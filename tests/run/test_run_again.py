"""Repeating archived calculations: what agrees, what differs, what is not run unasked."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from reportgen.archive.agreement import agreement
from reportgen.archive.formats import current
from reportgen.errors import VerificationError
from reportgen.package.write import write_package

RunDemo = Callable[[str], Any]


def again(package: Path, *more: object, home: Path) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-m", "reportgen.cli", "rerun", str(package), *map(str, more)],
        capture_output=True,
        text=True,
        stdin=subprocess.DEVNULL,
        env={**os.environ, "REPORTGEN_HOME": str(home)},
        check=False,
    )


def payload(package: Path) -> dict[str, bytes]:
    data = package / "data"
    return {
        path.relative_to(data).as_posix(): path.read_bytes()
        for path in data.rglob("*")
        if path.is_file()
    }


def repacked(files: dict[str, bytes], folder: Path) -> Path:
    """Pack a changed payload as its own, unsigned package."""
    info = {"External-Identifier": "CAL-0431 revision A", "Bagging-Date": "2026-03-02"}
    return write_package(folder, "CAL-0431_A", files, info)


def test_a_fresh_package_is_repeated_byte_for_byte(run_demo: RunDemo, tmp_path: Path) -> None:
    package = run_demo("exhauster").package
    before = payload(package)
    done = again(package, "--json", home=tmp_path)
    assert done.returncode == 0, done.stderr
    told = json.loads(done.stdout)
    assert told["kind"] == "identical"
    assert all(told["files"].values())
    assert len(told["results"]) >= 8
    assert payload(package) == before


def test_a_result_that_is_not_what_the_inputs_give_is_found(
    run_demo: RunDemo, tmp_path: Path
) -> None:
    files = payload(run_demo("exhauster").package)
    results = json.loads(files["results.json"])
    results["results"][0]["value"] *= 1.01
    results["criteria"][1]["verdict"] = "does not meet"
    files["results.json"] = json.dumps(results).encode()
    done = again(repacked(files, tmp_path), home=tmp_path)
    assert done.returncode == 4
    assert "differs: 2 of" in done.stdout


def test_a_template_that_came_with_the_package_is_not_run_unasked(
    run_demo: RunDemo, tmp_path: Path
) -> None:
    files = payload(run_demo("exhauster").package)
    mark = tmp_path / "ran"
    notebook = json.loads(files["template.ipynb"])
    for cell in notebook["cells"]:
        if cell["cell_type"] == "code" and "parameters" not in cell["metadata"].get("tags", []):
            cell["source"] = [f"open({str(mark)!r}, 'w').close()\n", *cell["source"]]
            break
    files["template.ipynb"] = json.dumps(notebook).encode()
    package = repacked(files, tmp_path)
    refused = again(package, home=tmp_path)
    assert refused.returncode == 2
    assert "--run-archived-template" in refused.stderr
    assert not mark.exists()
    done = again(package, "--run-archived-template", "--json", home=tmp_path)
    assert done.returncode == 0, done.stderr
    assert json.loads(done.stdout)["kind"] == "within tolerance"
    assert mark.exists()


def test_a_damaged_package_is_not_repeated(run_demo: RunDemo, tmp_path: Path) -> None:
    package = repacked(payload(run_demo("exhauster").package), tmp_path)
    (package / "data" / "case.yaml").write_text("reportgen: 1\n")
    done = again(package, home=tmp_path)
    assert done.returncode == 4
    assert "case.yaml" in done.stderr


def test_a_package_of_format_1_kept_here_is_repeated_for_good(tmp_path: Path) -> None:
    """Kept since format 1 began; whatever the program has become, its results must come out."""
    frozen = Path(__file__).with_name("frozen") / "CAL-0431_A.zip"
    done = again(frozen, "--run-archived-template", "--json", home=tmp_path)
    assert done.returncode == 0, done.stderr
    told = json.loads(done.stdout)
    assert told["kind"] in ("identical", "within tolerance")
    assert len(told["results"]) >= 12


def environment(**changes: Any) -> bytes:
    usual = {
        "code_sha512": "a",
        "python": {"version": "3.11.2"},
        "platform": {"system": "Linux"},
        "packages": [{"name": "numpy", "version": "2.1.0"}],
    }
    return json.dumps({**usual, **changes}).encode()


def results(value: float | None = 1.0, verdict: str = "meets") -> bytes:
    return json.dumps(
        {
            "format": 1,
            "results": [{"id": "r", "title": "Result", "value": value}],
            "criteria": [{"id": "C1", "title": "Criterion", "verdict": verdict}],
        }
    ).encode()


@pytest.mark.parametrize(
    ("now", "kind"),
    [
        (results(), "identical"),
        (results(1.0 + 5e-7), "within tolerance"),
        (results(1.0 + 5e-6), "differs"),
        (results(None), "differs"),
        (results(verdict="not assessed"), "differs"),
    ],
)
def test_results_are_held_to_the_stated_tolerance(now: bytes, kind: str) -> None:
    env = environment()
    found = agreement(
        {"results.json": results(), "environment.json": env},
        {"results.json": now, "environment.json": env},
    )
    assert found.kind == kind


def test_what_is_not_the_same_is_named() -> None:
    new = environment(
        code_sha512="b",
        platform={"system": "Windows"},
        packages=[{"name": "numpy", "version": "3.0.0"}],
    )
    found = agreement(
        {"results.json": results(), "environment.json": environment(), "template.ipynb": b"a"},
        {"results.json": results(), "environment.json": new, "template.ipynb": b"b"},
    )
    words = " ".join(found.reasons)
    for part in ("template", "code", "Linux then, Windows now", "numpy 2.1.0 → 3.0.0"):
        assert part in words


@pytest.mark.parametrize("stated", [None, 0, True, "1", 2])
def test_a_format_that_cannot_be_read_is_refused(stated: Any) -> None:
    with pytest.raises(VerificationError, match="format"):
        current("results.json", {"format": stated})
