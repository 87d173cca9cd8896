"""The example house file: by the case or the command line, into the report and the package."""

from __future__ import annotations

import json
import shutil
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pikepdf
import pytest

from reportgen.publish import house_files, read_house
from reportgen.publish.house import contrast_on_white

CASES = Path(__file__).parents[2] / "cases"
EXAMPLE = CASES / "house" / "tarnmoor.yaml"


def run(*arguments: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-m", "reportgen.cli", *arguments],
        capture_output=True,
        text=True,
        check=False,
    )


def named_by_the_case(folder: Path, **changes: str) -> Path:
    """Return a copy of the pump's case that names the example, and that example beside it."""
    shutil.copytree(EXAMPLE.parent, folder / "house")
    text = (CASES / "circulating-pump.yaml").read_text("utf-8")
    text = text.replace("units: si\n", "units: si\nhouse: house/tarnmoor.yaml\n", 1)
    for old, new in changes.items():
        text = text.replace(old, new)
    case = folder / "pump.yaml"
    case.write_text(text, "utf-8")
    return case


@pytest.fixture(scope="module")
def package(made_once: Callable[..., Any]) -> Path:
    """Return a package whose case names the example."""

    def make(folder: Path) -> str:
        case = named_by_the_case(folder)
        done = run("run", "--no-sign", "-o", str(folder / "out"), str(case))
        assert done.returncode == 0, done.stderr
        return str(folder / "out" / "CAL-0417_B" / "data")

    return Path(made_once("house-example", make))


def test_the_example_reads_without_a_fault() -> None:
    house = read_house(EXAMPLE)
    assert house.name
    assert house.logo.startswith(b"<svg")
    assert house.paper == "a4"
    assert all(contrast_on_white(colour) >= 4.5 for colour in (house.main, house.accent))
    assert len(house.closing) == 2


def test_the_report_has_the_face_of_the_house(package: Path) -> None:
    house = read_house(EXAMPLE)
    page = (package / "report.html").read_text("utf-8")
    for part in (house.logo_alt, house.main, "Calculation no.", "Released", *house.closing):
        assert part in page, part
    report = package / "report.pdf"
    done = subprocess.run(["pdftotext", report, "-"], capture_output=True, check=True)
    text = " ".join(done.stdout.decode().split())
    for part in (house.name, "Calculation no.", "Released", *house.closing):
        assert part in text, part


def test_house_and_logo_travel_with_the_case(package: Path) -> None:
    for name, content in house_files(EXAMPLE).items():
        assert (package / "house" / name).read_bytes() == content
    opened = pikepdf.open(package / "report.pdf")
    assert {"house/tarnmoor.yaml", "house/tarnmoor.svg"} <= set(opened.attachments)
    assert json.loads((package / "inputs.json").read_text())["house"] == "house/tarnmoor.yaml"


def test_the_command_line_gives_the_same_face(package: Path, tmp_path: Path) -> None:
    done = run(
        "run", "--no-sign", "-o", str(tmp_path), "--house", str(EXAMPLE),
        str(CASES / "circulating-pump.yaml"),
    )  # fmt: skip
    assert done.returncode == 0, done.stderr
    data = tmp_path / "CAL-0417_B" / "data"
    for name, content in house_files(EXAMPLE).items():
        assert (data / "house" / name).read_bytes() == content
    mine, other = (
        (place / "report.html").read_text("utf-8").split("<style>")[1].split("</style>")[0]
        for place in (data, package)
    )
    assert mine == other


@pytest.mark.parametrize(
    ("old", "new", "said"),
    [
        ("house/tarnmoor.yaml", "house/none.yaml", "there is no file 'house/none.yaml'"),
        ("house/tarnmoor.yaml", "../house.yaml", "no plain name"),
        ("house/tarnmoor.yaml", "house/tarnmoor.svg", "does not end in .yaml"),
    ],
)
def test_a_house_that_is_not_there_is_named_with_its_place(
    old: str, new: str, said: str, tmp_path: Path
) -> None:
    case = named_by_the_case(tmp_path, **{old: new})
    done = run("check", str(case))
    assert done.returncode == 2
    assert said in done.stderr
    assert "pump.yaml:28" in done.stderr


def test_a_fault_in_the_house_file_stops_before_anything_is_calculated(tmp_path: Path) -> None:
    case = named_by_the_case(tmp_path)
    house = tmp_path / "house" / "tarnmoor.yaml"
    house.write_text(house.read_text("utf-8").replace("#1f4e5f", "#ffff00"), "utf-8")
    done = run("run", "--no-sign", "-o", str(tmp_path / "out"), str(case))
    assert done.returncode == 2
    assert "tarnmoor.yaml:8" in done.stderr
    assert "colours.main" in done.stderr
    assert not (tmp_path / "out").exists()
