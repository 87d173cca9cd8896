"""Many cases from the command line: patterns, families, what is not run again, what fails."""

from __future__ import annotations

import json
import os
import shutil
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest

from reportgen.case import read_case
from reportgen.errors import InputError
from reportgen.run.family import expand, is_family, schema

CASES = Path(__file__).resolve().parents[2] / "cases"
FAMILY = """\
reportgen: 1
family: Booster fan with other wheels
case: booster-fan.yaml
number: CAL-0460
source: offers of the wheel's makers
"""
GRID = "grid: {rotor.mass: [400 lb, 415 lb], speeds.trip: [1900 rpm, 1950 rpm]}\n"


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    shutil.copy(CASES / "booster-fan.yaml", tmp_path)
    return tmp_path


def run(*words: object, home: Path) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-m", "reportgen.cli", "run", *map(str, words)],
        capture_output=True,
        text=True,
        env={**os.environ, "REPORTGEN_HOME": str(home), "OPENBLAS_NUM_THREADS": "1"},
        check=False,
    )


def written(folder: Path, text: str) -> list[Path]:
    (folder / "family.yaml").write_text(text)
    return expand(folder / "family.yaml", folder / "out")


def test_a_grid_gives_every_combination_a_number_and_the_source_of_its_values(
    folder: Path,
) -> None:
    cases = [read_case(path) for path in written(folder, FAMILY + GRID)]
    numbers = [case.document.number for case in cases]
    assert numbers == [f"CAL-0460-0{n}" for n in (1, 2, 3, 4)]
    resolved: list[Any] = [case.resolved() for case in cases]
    masses = [case["rotor"]["mass"] for case in resolved]
    assert [round(mass["si"] / 0.45359237) for mass in masses] == [400, 400, 415, 415]
    assert {mass["source"] for mass in masses} == {"offers of the wheel's makers"}
    trips = [case["speeds"]["trip"]["si"] * 30 / 3.141592653589793 for case in resolved]
    assert trips == pytest.approx([1900, 1950, 1900, 1950])
    assert all("rotor.mass" in case.document.title for case in cases)


def test_a_table_gives_a_case_for_each_row_and_leaves_empty_cells_as_they_are(
    folder: Path,
) -> None:
    (folder / "v.csv").write_text("rotor.mass,speeds.trip\n400 lb,\n,1950 rpm\n")
    first, second = (
        read_case(path).resolved() for path in written(folder, FAMILY + "table: v.csv\n")
    )
    base: Any = read_case(folder / "booster-fan.yaml").resolved()
    assert first["speeds"]["trip"]["si"] == base["speeds"]["trip"]["si"]
    assert second["rotor"]["mass"]["si"] == base["rotor"]["mass"]["si"]
    assert first["rotor"]["mass"]["si"] != base["rotor"]["mass"]["si"]


@pytest.mark.parametrize(
    ("text", "line", "words"),
    [
        (FAMILY, 1, "grid: or table:"),
        (FAMILY + "gird: {}\n", 6, "did you mean 'grid'"),
        (FAMILY + "grid: {rotor.mass: 400 lb}\n", 6, "write a list of values"),
        (FAMILY + "grid: {rotor.mas: [400 lb]}\n", 6, "'mas' is not known"),
        (FAMILY + "grid: {rotor.mass: [400 lb, -1 lb]}\n", 6, "case 2 of the family"),
        (FAMILY + f"grid: {{rotor.mass: [{', '.join(['1 lb'] * 1001)}]}}\n", 6, "at most 1000"),
        (FAMILY + "table: none.csv\n", 0, "does not exist"),
        (FAMILY + "table: short.csv\n", 2, "the row has 1 cells"),
    ],
)
def test_a_wrong_family_is_refused_at_its_place(
    folder: Path, text: str, line: int, words: str
) -> None:
    (folder / "short.csv").write_text("rotor.mass,speeds.trip\n400 lb\n")
    with pytest.raises(InputError) as caught:
        written(folder, text)
    assert any(words in str(problem) for problem in caught.value.problems)
    assert caught.value.problems[0].line == line


def test_a_family_is_told_from_a_case_and_has_a_schema(folder: Path) -> None:
    import jsonschema

    (folder / "family.yaml").write_text(FAMILY + GRID)
    assert is_family(folder / "family.yaml")
    assert not is_family(folder / "booster-fan.yaml")
    jsonschema.Draft202012Validator.check_schema(schema())


def test_a_batch_runs_what_it_can_and_then_only_what_has_changed(folder: Path) -> None:
    (folder / "family.yaml").write_text(FAMILY + "grid: {rotor.mass: [400 lb, 415 lb]}\n")
    (folder / "wrong.yaml").write_text("reportgen: 1\ntemplate: one-mass-whirl\n")
    out = folder / "reports"
    words = (folder / "family.yaml", folder / "wr*.yaml", "-o", out, "-j", 2, "--json")
    first = run(*words, home=folder)
    told = json.loads(first.stdout)
    assert first.returncode == told["exit_status"] == 2
    assert [case["status"] for case in told["cases"]] == ["done", "done", "failed"]
    assert [case["result"]["again"] for case in told["cases"][:2]] == [True, True]
    packages = [out / f"CAL-0460-0{n}_C" for n in (1, 2)]
    assert all((package / "signatures" / "prepared").is_dir() for package in packages)
    assert "wrong.yaml" in told["cases"][2]["error"]["message"]

    before = (packages[0] / "data" / "report.pdf").stat().st_mtime_ns
    shutil.rmtree(packages[1])
    second = json.loads(run(*words, home=folder).stdout)
    assert [case["result"]["again"] for case in second["cases"][:2]] == [False, True]
    assert (packages[0] / "data" / "report.pdf").stat().st_mtime_ns == before

    (packages[0] / "data" / "results.json").write_text("{}")  # a damaged one is not passed off
    third = json.loads(run(*words, home=folder).stdout)
    assert third["cases"][0]["status"] == "failed"
    assert third["cases"][1]["result"]["again"] is False


def test_two_cases_of_one_number_and_revision_are_not_both_done(folder: Path) -> None:
    shutil.copy(folder / "booster-fan.yaml", folder / "other.yaml")
    out = folder / "reports"
    done = run(folder / "booster-fan.yaml", folder / "other.yaml", "-o", out, home=folder)
    assert done.returncode == 2
    assert "this number and revision is there already" in done.stderr
    assert "1 done, 1 failed" in done.stdout


def test_a_pattern_that_matches_nothing_is_an_error(tmp_path: Path) -> None:
    done = run(tmp_path / "*.yaml", home=tmp_path)
    assert done.returncode == 2
    assert "no file matches" in done.stderr
