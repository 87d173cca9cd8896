"""Cases begun by the program: they read well as they stand, and say that all is still open."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path
from typing import Any, Literal

import pytest

from reportgen.case import read_case
from reportgen.case.models import MODELS
from reportgen.case.starter import Beginning, starter
from reportgen.errors import InputError

OTHER = Beginning("one-mass-whirl", "si", "2026-05-04")


def new(*words: object) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-m", "reportgen.cli", "new", *map(str, words)]
    return subprocess.run(command, capture_output=True, text=True, check=False)


@pytest.mark.parametrize("units", ["si", "us"])
@pytest.mark.parametrize("template", MODELS)
def test_a_starter_reads_well_and_lists_its_values_as_open(
    tmp_path: Path, template: str, units: Literal["si", "us"]
) -> None:
    (tmp_path / "rotor.yaml").write_text(starter(OTHER), encoding="utf-8")
    path = tmp_path / "new.yaml"
    path.write_text(starter(Beginning(template, units, "2026-05-04")), encoding="utf-8")
    case = read_case(path)
    assert case.template == template
    assert case.document.status == "draft"
    resolved: Any = case.resolved()
    assert resolved["units"] == units
    if template != "tolerance-study":  # its holds are those of the case that it is of
        assert len(case.holds()) >= 5


def test_a_starter_takes_its_shaft_from_a_table_of_sections(tmp_path: Path) -> None:
    rows = "".join(f"100,{50 + 5 * n},steel\n" for n in range(6))
    (tmp_path / "shaft.csv").write_text(f"length [mm],outer diameter [mm],material\n{rows}")
    done = new("lateral-review", "-o", tmp_path / "a.yaml", "--sections", tmp_path / "shaft.csv")
    assert done.returncode == 0, done.stderr
    case: Any = read_case(tmp_path / "a.yaml")
    assert len(case.rotor.shaft.table) == 6


def test_no_file_is_overwritten_and_no_template_is_guessed(tmp_path: Path) -> None:
    (tmp_path / "a.yaml").write_text("mine")
    done = new("one-mass-whirl", "-o", tmp_path / "a.yaml")
    assert done.returncode == 2
    assert (tmp_path / "a.yaml").read_text() == "mine"
    with pytest.raises(InputError, match="did you mean 'lateral-review'"):
        starter(Beginning("lateral-revue", "si", "2026-05-04"))
    with pytest.raises(InputError, match="takes no shaft sections"):
        starter(Beginning("one-mass-whirl", "si", "2026-05-04", ("a.csv", 3)))
