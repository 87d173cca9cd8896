"""Repeating archived calculations: what agrees, what differs, what is not run unasked."""

from __future__ import annotations

import json
import os
import subprocess
import sys
import zipfile
from collections.abc import Callable
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from reportgen.archive.agreement import agreement
from reportgen.errors import ReportgenError, VerificationError
from reportgen.package.formats import current
from reportgen.package.write import write_package
from reportgen.run.rerun import rerun

RunDemo = Callable[[str], Any]
FROZEN = Path(__file__).with_name("frozen") / "CAL-0431_A.zip"


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
    page = before["report.html"].decode()
    assert "one-mass-whirl, shipped with reportgen and unmodified (digest sha512:" in page


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
    kept = tmp_path / "kept"
    more = ["--run-archived-template", "--json", "-o", kept]
    done = again(package, *more, home=tmp_path)
    assert done.returncode == 0, done.stderr
    told = json.loads(done.stdout)
    assert told["kind"] == "within tolerance"
    assert "to the last digit" in told["headline"]
    assert told["package"]["kind"] == "unsigned"
    assert mark.exists()
    assert (kept / package.name / "data" / "report.pdf").read_bytes().startswith(b"%PDF")


def test_a_damaged_package_is_not_repeated(run_demo: RunDemo, tmp_path: Path) -> None:
    package = repacked(payload(run_demo("exhauster").package), tmp_path)
    (package / "data" / "case.yaml").write_text("reportgen: 1\n")
    done = again(package, home=tmp_path)
    assert done.returncode == 4
    assert "case.yaml" in done.stderr


def test_a_package_of_format_1_kept_here_is_repeated_for_good(tmp_path: Path) -> None:
    """Kept since format 1 began; whatever the program has become, its results must come out."""
    done = again(FROZEN, "--run-archived-template", "--json", home=tmp_path)
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


def results(
    value: float | None = 1.0,
    verdict: str = "meets",
    *,
    found: float = 0.3,
    limit: float = 0.2,
    agrees: bool = True,
    curve: tuple[float | None, ...] = (0.0, 1e-9, 2.0),
) -> bytes:
    return json.dumps(
        {
            "format": 1,
            "document": {"number": "CAL-1", "revision": "A", "status": "draft"},
            "results": [
                {"id": "r", "title": "Result", "value": value, "second": {"agrees": agrees}},
                {"id": "none", "title": "Share", "value": 0.0},
            ],
            "criteria": [
                {"id": "C1", "title": "C", "verdict": verdict, "value": found, "limit": limit}
            ],
            "series": {"map": {"rows": [{"y": curve}], "units": "m"}},
        }
    ).encode()


@pytest.mark.parametrize(
    ("now", "kind"),
    [
        (results(), "identical"),
        (results(1.0 + 5e-7), "within tolerance"),
        (results(1.0 + 5e-6), "differs"),
        (results(None), "differs"),
        (results(agrees=False), "differs"),
        (results(verdict="not assessed"), "differs"),
        (results(found=0.3 + 1e-7), "within tolerance"),
        (results(limit=0.2 + 1e-5), "differs"),
        (results(curve=(1e-8, 0.0, 2.0)), "within tolerance"),
        (results(curve=(0.0, 1e-5, 2.0)), "differs"),
        (results(curve=(None, 1e-9, 2.0)), "differs"),
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


def test_curves_read_out_at_other_points_are_told_and_not_compared() -> None:
    sides = [{"results.json": r} for r in (results(), results(curve=(0.0, 2.0)))]
    found = agreement(sides[0], sides[1])
    assert found.kind == "within tolerance"
    assert "other points, so that they were not compared: map" in " ".join(found.reasons)


def test_a_package_of_the_same_version_with_other_files_is_told() -> None:
    sides = [
        {
            "results.json": results(),
            "environment.json": environment(
                packages=[{"name": "numpy", "version": "2.1.0", "record_sha256": digest}]
            ),
        }
        for digest in "ab"
    ]
    assert any("other files: numpy" in words for words in agreement(*sides).reasons)


JUNK = st.recursive(
    st.none() | st.booleans() | st.integers(-9, 9) | st.text(max_size=5),
    lambda inner: (
        st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=5), inner, max_size=3)
    ),
    max_leaves=6,
)


@given(st.data())
@settings(
    deadline=None,
    max_examples=int(os.environ.get("FUZZ", "30")),
    suppress_health_check=[HealthCheck.function_scoped_fixture, HealthCheck.too_slow],
)
def test_whatever_a_whole_bag_holds_is_refused_in_words_and_not_run(data: st.DataObject) -> None:
    """Its digests are right, so that only what the files say can give it away."""
    with zipfile.ZipFile(FROZEN) as archive:
        prefix = "CAL-0431_A/data/"
        files = {
            name.removeprefix(prefix): archive.read(name)
            for name in archive.namelist()
            if name.startswith(prefix)
        }
    files["template.ipynb"] += b" "  # not the shipped one, so that it would have to be allowed
    name = data.draw(
        st.sampled_from(["results.json", "inputs.json", "environment.json", "case.yaml"])
    )
    if name == "case.yaml":
        files[name] = data.draw(st.binary(max_size=200))
    else:
        whole = json.loads(files[name])
        inner = whole
        while True:
            key = data.draw(st.sampled_from(sorted(inner) if isinstance(inner, dict)
                                            else range(len(inner))))  # fmt: skip
            below = inner[key]
            if not isinstance(below, dict | list) or not below or data.draw(st.booleans()):
                inner[key] = data.draw(JUNK)
                break
            inner = below
        files[name] = json.dumps(whole).encode()
    if data.draw(st.integers(0, 5)) == 0:
        del files[data.draw(st.sampled_from(sorted(files)))]
    with TemporaryDirectory() as folder, pytest.raises(ReportgenError) as caught:
        rerun(repacked(files, Path(folder)), (), lambda _: False)
    assert caught.value.exit_status in (2, 4)


@pytest.mark.parametrize("stated", [None, 0, True, "1", 2])
def test_a_format_that_cannot_be_read_is_refused(stated: Any) -> None:
    with pytest.raises(VerificationError, match="format"):
        current("results.json", {"format": stated})
