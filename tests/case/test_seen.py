"""A case that refers to finished calculations shows what they say, and only what they say."""

from __future__ import annotations

import hashlib
import json
import shutil
from pathlib import Path
from typing import Any

import pytest

from reportgen.case import from_resolved, read_case, side_files
from reportgen.errors import InputError, Problem
from reportgen.sheet import Sheet, standard

CASE = """\
reportgen: 1
template: one-mass-whirl
document: {number: CAL-1, title: T, revision: A, status: draft, date: 2026-03-02,
           prepared: {name: N. Body}}
machine: {name: Rotor, orientation: vertical}
units: si
see: [seen/CAL-0417_B]
rotor: {source: s, mass: 62 kg, stiffness: 1.9e6 N/m, damping: {ratio: 0.03}}
speeds: {source: s, rated: 1480 rpm}
unbalance: {grade: G6.3, source: s}
"""
RESULT = {"id": "peak", "title": "Peak", "shown": "41.2 µm 0-peak", "value": 4.12e-5,
          "second": {"agrees": True}}  # fmt: skip
CRITERION = {"title": "Clearance", "value_shown": "60 µm", "sense": "at most",
             "limit_shown": "75 µm", "verdict": "meets"}  # fmt: skip


@pytest.fixture
def case(workshop: Any, tmp_path: Path) -> Path:
    package = workshop.package(
        tmp_path / "made",
        results={
            "template": {"name": "transient-passage"},
            "results": [RESULT],
            "criteria": [CRITERION],
        },
    )
    shutil.copytree(package, tmp_path / "seen" / package.name)
    path = tmp_path / "case.yaml"
    path.write_text(CASE)
    return path


def problems(path: Path) -> list[Problem]:
    with pytest.raises(InputError) as caught:
        read_case(path)
    return caught.value.problems


def test_number_revision_digest_and_headlines_are_those_of_the_package(case: Path) -> None:
    found = read_case(case).see[0]
    folder = case.parent / "seen" / "CAL-0417_B"
    tags = (folder / "tagmanifest-sha512.txt").read_bytes()
    assert (found.number, found.revision) == ("CAL-0417", "B")
    assert found.digest == hashlib.sha512(tags).hexdigest()
    assert [(r.title, r.shown, r.agrees) for r in found.results] == [
        ("Peak", "41.2 µm 0-peak", True)
    ]
    assert [(c.limit, c.verdict) for c in found.criteria] == [("at most 75 µm", "meets")]


def test_what_is_seen_travels_with_the_case(case: Path) -> None:
    read = read_case(case)
    folder = case.parent / "seen" / "CAL-0417_B"
    assert side_files(read) == {
        f"seen/CAL-0417_B/{name}": (folder / name).read_bytes()
        for name in ("tagmanifest-sha512.txt", "manifest-sha512.txt", "data/results.json")
    }
    assert from_resolved(json.loads(json.dumps(read.resolved()))) == read


def test_a_calculation_that_is_not_for_issue_is_a_hold(case: Path) -> None:
    assert [h["text"] for h in read_case(case).holds() if h["kind"] == "data"] == [
        "Calculation CAL-0417 revision B, which this one refers to: its status is for review"
    ]


@pytest.mark.parametrize(
    "name", ["data/results.json", "manifest-sha512.txt"], ids=["results", "manifest"]
)
def test_a_changed_byte_of_the_package_is_refused(case: Path, name: str) -> None:
    file = case.parent / "seen" / "CAL-0417_B" / name
    file.write_bytes(file.read_bytes().replace(b"a", b"b", 1))
    (problem,) = problems(case)
    assert problem.field == "see[1]"
    assert "is not what" in problem.message
    assert problem.line == 7


def test_a_package_that_is_not_there_is_named_with_its_place(case: Path) -> None:
    shutil.rmtree(case.parent / "seen")
    (problem,) = problems(case)
    assert "seen/CAL-0417_B/tagmanifest-sha512.txt" in problem.message


def test_a_name_that_leads_out_of_the_folder_is_refused(case: Path) -> None:
    case.write_text(CASE.replace("seen/CAL-0417_B", "../made/CAL-0417_B"))
    (problem,) = problems(case)
    assert "plain name" in problem.message


def test_the_report_prints_them_as_they_were_printed(case: Path) -> None:
    read = read_case(case)
    kept: list[Any] = []

    class Kept(Sheet):
        def _emit(self, block: Any, extra: Any = None) -> None:
            kept.append(block)
            super()._emit(block, extra)

    standard.seen(Kept(read.resolved()))
    blocks = json.dumps(kept, ensure_ascii=False)
    assert "CAL-0417 revision B" in blocks
    assert "41.2 µm 0-peak" in blocks
    assert read.see[0].digest[:32] in blocks
