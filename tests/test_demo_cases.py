"""The main job as a user meets it, on the demo cases of the invented plant."""

from __future__ import annotations

import hashlib
import json
import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import jsonschema
import nbformat
import pytest

from reportgen.case import schema

ROOT = Path(__file__).parents[1]
CASES = sorted((ROOT / "cases").glob("*.yaml"))
ONE_MASS = ("circulating-pump", "exhauster", "booster-fan")
Run = Callable[[str], Any]


def reportgen(*arguments: str, home: Path, **more: Any) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-m", "reportgen.cli", *arguments],
        env={**os.environ, "REPORTGEN_HOME": str(home)},
        capture_output=True,
        text=True,
        check=False,
        **more,
    )


@pytest.mark.parametrize("path", CASES, ids=lambda p: p.stem)
def test_a_demo_leaves_a_whole_package(path: Path, run_demo: Run) -> None:
    demo = run_demo(path.stem)
    held = {p.name for p in (demo.package / "data").iterdir()}
    assert held >= {
        "report.html",
        "report.pdf",
        "calculation.ipynb",
        "results.json",
        "case.yaml",
        "inputs.json",
        "environment.json",
        "template.ipynb",
        "HOW-TO-CHECK.txt",
    }
    assert (demo.package / "data" / "case.yaml").read_bytes() == path.read_bytes()
    assert str(demo.package) in demo.out
    verdicts = {c["verdict"] for c in demo.results()["criteria"]}
    assert demo.status == (3 if "does not meet" in verdicts else 0)


@pytest.mark.parametrize(
    ("name", "side"),
    [("circulating-pump", "below"), ("exhauster", "above"), ("booster-fan", "fails")],
)
def test_the_three_rotors_are_what_they_are_there_to_show(
    name: str, side: str, run_demo: Run
) -> None:
    demo = run_demo(name)
    results = demo.results()
    critical = next(r["value"] for r in results["results"] if r["id"] == "critical-speed")
    inputs = json.loads((demo.package / "data" / "inputs.json").read_bytes())
    rated = inputs["speeds"]["rated"]["si"]
    if side == "below":
        assert rated < critical
        assert demo.status == 0
    elif side == "above":
        assert rated > critical
        assert demo.status == 0
    else:
        assert demo.status == 3
        assert "does not meet" in demo.out


def test_the_centrifuge_barely_passes_and_its_sibling_stalls(run_demo: Run) -> None:
    passes, stalls = (
        run_demo(name) for name in ("basket-centrifuge", "basket-centrifuge-small-motor")
    )
    found = {r["id"]: r for r in passes.results()["results"]}
    assert passes.status == 0
    assert 0.7 < found["passage-1-least-torque"]["value"] < 1
    assert found["passage-1-peak"]["value"] > 0

    found = {r["id"]: r for r in stalls.results()["results"]}
    assert stalls.status == 3
    assert found["passage-1-least-torque"]["value"] > 1
    assert found["passage-1-peak"]["value"] is None
    hang, critical = found["passage-1-hang-speed"], found["critical-speed"]
    assert 0.9 < hang["value"] / critical["value"] < 1
    conclusion = json.dumps(stalls.results()["conclusion"])
    assert f"stalls at the critical speed and hangs at {hang['shown']}" in conclusion
    assert "the linear result is void beyond contact" in conclusion
    assert found["passage-2-peak"]["value"] is None
    assert "Slow run for washing" in conclusion
    assert "is no passage" in conclusion


def test_both_unit_systems_are_shown(run_demo: Run) -> None:
    systems = {run_demo(name).results()["units"] for name in ONE_MASS}
    assert systems == {"si", "us"}


@pytest.mark.parametrize("path", CASES, ids=lambda p: p.stem)
def test_every_second_computation_of_the_demos_agrees(path: Path, run_demo: Run) -> None:
    seconds = [r["second"] for r in run_demo(path.stem).results()["results"] if "second" in r]
    assert len(seconds) >= 4
    assert all(second["agrees"] for second in seconds)


@pytest.mark.parametrize("path", CASES, ids=lambda p: p.stem)
def test_a_fresh_package_verifies_as_signed_by_its_own_identity(
    path: Path, run_demo: Run, tmp_path: Path
) -> None:
    done = reportgen("verify", "--json", str(run_demo(path.stem).package), home=tmp_path)
    verification = json.loads(done.stdout)
    assert done.returncode == 0, done.stdout
    assert verification["kind"] == "self-issued"
    assert [s["role"] for s in verification["signers"]] == ["prepared"]


def test_a_changed_byte_fails_verification(run_demo: Run, tmp_path: Path) -> None:
    import shutil

    package = Path(shutil.copytree(run_demo("circulating-pump").package, tmp_path / "CAL-0417_B"))
    results = package / "data" / "results.json"
    results.write_bytes(results.read_bytes().replace(b'"meets"', b'"MEETS"', 1))
    done = reportgen("verify", str(package), home=tmp_path)
    assert done.returncode == 4
    assert "results.json" in done.stdout


def test_running_again_elsewhere_gives_the_same_bytes(run_demo: Run, tmp_path: Path) -> None:
    demo = run_demo("circulating-pump")
    again = tmp_path / "another place"
    done = reportgen(
        "run", str(demo.case), "-o", str(again), "--no-sign", home=tmp_path, cwd=tmp_path
    )
    assert done.returncode == 0, done.stderr
    for name in ("results.json", "report.html", "report.pdf", "calculation.ipynb", "inputs.json"):
        first = (demo.package / "data" / name).read_bytes()
        second = (again / demo.package.name / "data" / name).read_bytes()
        assert hashlib.sha512(first).hexdigest() == hashlib.sha512(second).hexdigest(), name


def test_running_again_into_the_same_folder_keeps_the_package(
    run_demo: Run, tmp_path: Path
) -> None:
    import shutil

    demo = run_demo("circulating-pump")
    out = tmp_path / "out"
    shutil.copytree(demo.package, out / demo.package.name)
    before = (out / demo.package.name / "tagmanifest-sha512.txt").stat().st_mtime_ns
    done = reportgen("run", str(demo.case), "-o", str(out), home=tmp_path)
    assert done.returncode == 0, done.stderr
    assert "kept as it is" in done.stderr
    assert (out / demo.package.name / "tagmanifest-sha512.txt").stat().st_mtime_ns == before


def test_a_changed_case_under_the_same_revision_is_refused(run_demo: Run, tmp_path: Path) -> None:
    import shutil

    demo = run_demo("circulating-pump")
    out = tmp_path / "out"
    shutil.copytree(demo.package, out / demo.package.name)
    changed = tmp_path / "circulating-pump.yaml"
    changed.write_text(demo.case.read_text().replace("rated: 1480 rpm", "rated: 1485 rpm"))
    done = reportgen("run", str(changed), "-o", str(out), home=tmp_path)
    assert done.returncode == 2
    assert "speeds.rated" in done.stderr
    assert "Traceback" not in done.stderr


def test_a_draft_is_left_unsigned_and_that_is_said(run_demo: Run, tmp_path: Path) -> None:
    text = run_demo("circulating-pump").case.read_text()
    case = tmp_path / "draft.yaml"
    case.write_text(text.replace("status: for review", "status: draft"))
    done = reportgen("run", str(case), "-o", str(tmp_path / "out"), home=tmp_path)
    assert done.returncode == 0, done.stderr
    assert "draft" in done.stderr
    assert not (tmp_path / "out" / "CAL-0417_B" / "signatures").exists()


def test_all_problems_of_a_bad_case_are_shown_at_once(tmp_path: Path) -> None:
    text = (ROOT / "cases" / "circulating-pump.yaml").read_text()
    bad = tmp_path / "bad.yaml"
    bad.write_text(
        text.replace("value: 62 kg", "value: -62 kg").replace("rated: 1480 rpm", "ratde: 1480 rpm")
    )
    done = reportgen("run", str(bad), "-o", str(tmp_path / "out"), home=tmp_path)
    assert done.returncode == 2
    assert "rotor.mass" in done.stderr
    assert "did you mean 'rated'" in done.stderr
    assert not (tmp_path / "out").exists()
    assert done.stdout == ""


@pytest.mark.parametrize("path", CASES, ids=lambda p: p.stem)
def test_demo_cases_fit_the_published_schema(path: Path) -> None:
    from ruamel.yaml import YAML

    case = YAML(typ="safe", pure=True).load(path.read_text())
    plain = json.loads(json.dumps(case, default=str))
    jsonschema.Draft202012Validator(schema()).validate(plain)


def test_the_executed_notebook_runs_again_on_its_own_and_gives_the_same(
    run_demo: Run, tmp_path: Path
) -> None:
    """Let nbval compare every stored output."""
    notebook = run_demo("exhauster").package / "data" / "calculation.ipynb"
    stored = nbformat.reads(notebook.read_text(), as_version=4)
    assert sum(bool(cell.get("outputs")) for cell in stored.cells) >= 10
    copy = tmp_path / "calculation.ipynb"
    copy.write_bytes(notebook.read_bytes())
    done = subprocess.run(
        [sys.executable, "-m", "pytest", "--nbval", "--nbval-current-env", "-p", "no:cacheprovider",
         "-W", "ignore", "-q", str(copy)],
        capture_output=True, text=True, check=False, cwd=tmp_path,
    )  # fmt: skip
    assert done.returncode == 0, done.stdout[-3000:]


def test_a_local_template_must_be_allowed_by_name(tmp_path: Path) -> None:
    text = (ROOT / "cases" / "circulating-pump.yaml").read_text()
    case = tmp_path / "case.yaml"
    case.write_text(text.replace("template: one-mass-whirl", "template: own.ipynb"))
    done = reportgen("run", str(case), "-o", str(tmp_path / "out"), home=tmp_path)
    assert done.returncode == 2
    assert "Traceback" not in done.stderr
