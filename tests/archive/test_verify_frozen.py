"""Packages of format 1, kept as they were made: every later version must judge them alike.

They hold invented people and numbers. Their keys are thrown away. ``anchors.pem`` holds the
roots of the signer and of the time stamper of ``anchored.zip``.
"""

from __future__ import annotations

import json
from datetime import UTC, datetime
from pathlib import Path

import pytest

from reportgen.archive.agreement import agreement
from reportgen.archive.verify import load_anchors, read_package, verify_package
from reportgen.package import formats

FROZEN = Path(__file__).with_name("frozen")
NOW = [datetime(2026, 3, 5, tzinfo=UTC), datetime(2046, 3, 5, tzinfo=UTC)]

VERDICTS = {
    "approved": ("self-issued", True, ""),
    "anchored": ("not anchored", True, ""),
    "draft": ("unsigned", True, ""),
    "stripped": ("unsigned", False, "no signature, though the document's status is for review"),
    "changed-byte": ("damaged", False, "data/inputs.json: changed"),
    "pdf-cut": ("damaged", False, "signatures/approved/report.pdf: cut off"),
    "statement-edited": ("damaged", False, "is not the statement that was signed"),
    "check-removed": ("damaged", False, "before it is signed as checked"),
}


@pytest.mark.parametrize("now", NOW, ids=["days later", "twenty years later"])
@pytest.mark.parametrize("name", VERDICTS)
def test_a_frozen_package_is_judged_as_ever(name, now):
    kind, ok, words = VERDICTS[name]
    found = verify_package(FROZEN / f"{name}.zip", now=now)
    assert (found.kind, found.ok) == (kind, ok)
    told = " | ".join(f"{fault.subject}: {fault.detail}" for fault in found.faults)
    assert words in told
    assert bool(told) is not ok


@pytest.fixture
def _a_later_format(monkeypatch):
    """Read as a version would that works with a format 2, of which there is none yet."""

    def from_1(results):
        document = {**results["document"], "titles": [results["document"].get("title", "")]}
        return {**results, "format": 2, "document": document}

    monkeypatch.setattr(formats, "CURRENT", 2)
    monkeypatch.setitem(formats.MIGRATIONS, 1, from_1)


@pytest.mark.usefixtures("_a_later_format")
@pytest.mark.parametrize("name", VERDICTS)
def test_a_version_of_a_later_format_judges_format_1_alike(name):
    test_a_frozen_package_is_judged_as_ever(name, NOW[1])


@pytest.mark.usefixtures("_a_later_format")
def test_a_version_of_a_later_format_compares_its_results_with_those_of_format_1():
    whole = Path(__file__).parents[1] / "run" / "frozen" / "CAL-0431_A.zip"
    then = read_package(whole).below("data/")
    later = json.loads(then["results.json"])
    later["format"] = 2
    later["results"][0]["value"] *= 1.01
    found = agreement(then, {**then, "results.json": json.dumps(later).encode()})
    assert [one.id for one in found.results if one.kind == "differs"] == ["critical-speed"]
    assert len(found.results) >= 12


def test_every_frozen_package_has_a_verdict():
    assert {path.stem for path in FROZEN.glob("*.zip")} == set(VERDICTS)


@pytest.mark.parametrize("now", NOW, ids=["days later", "twenty years later"])
def test_the_frozen_anchors_cover_signer_and_time_stamp(now):
    found = verify_package(FROZEN / "anchored.zip", load_anchors(FROZEN / "anchors.pem"), now=now)
    assert (found.kind, found.ok) == ("trusted", True)
    assert found.signers[0].time_stamped
    assert found.signers[0].time == datetime(2026, 3, 2, 10, 0, tzinfo=UTC)


def test_the_frozen_approval_says_who_signed_what():
    signers = verify_package(FROZEN / "approved.zip", now=NOW[0]).signers
    assert [(s.role, s.name, s.words) for s in signers] == [
        ("prepared", "Ann Ash", "prepared with care"),
        ("checked", "Bo Birch", "checked with care"),
        ("approved", "Cy Cedar", "approved with care"),
    ]
    assert signers[-1].accepted_holds == {"H1": "Mass of the impeller is preliminary"}
