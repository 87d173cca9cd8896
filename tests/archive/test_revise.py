"""The next revision of a calculation: only what was asked for changes, all else is kept."""

from __future__ import annotations

import difflib
import json
import shutil
from pathlib import Path
from typing import Any

import pytest

from reportgen.archive.revise import Revision, Setting, copied, keep_case, revised_text
from reportgen.archive.yaml_edit import steps
from reportgen.case import read_case, side_files
from reportgen.errors import InputError, PackageError

NEXT = Revision("D", "Specification TPW-SP-114 rev. 4: wider margin", "2026-04-01")


def revised(path: Path, folder: Path, *settings: str, remove: Any = (), **how: Any) -> str:
    revision = Revision(**{**vars(NEXT), **how})
    case = copied(path, folder / "scratch")
    return revised_text(case, [Setting.parse(s) for s in settings], remove, revision)


def difference(old: str, new: str) -> list[str]:
    lines = difflib.ndiff(old.splitlines(), new.splitlines())
    return [line for line in lines if line[:1] in "+-"]


def test_only_the_lines_asked_for_change(fan: Path, tmp_path: Path) -> None:
    old = fan.read_text()
    new = revised(fan, tmp_path, "speeds.rated=1785 rpm", "criteria[1].margin=25 %")
    lines = difference(old, new)
    gone = {line[2:].strip() for line in lines if line.startswith("-")}
    assert gone == {"revision: C", "date: 2026-03-16", "rated: 1780 rpm", "margin: 20 %"}
    assert len([line for line in lines if line.startswith("+")]) == 5  # and the history's entry
    assert [line for line in old.splitlines() if line.startswith("#")] == [
        line for line in new.splitlines() if line.startswith("#")
    ]


def test_the_new_case_says_what_where_from_and_since_when(fan: Path, tmp_path: Path) -> None:
    out = tmp_path / "new.yaml"
    out.write_text(revised(fan, tmp_path, "speeds.rated=1785 rpm", by="Ann Ash"))
    case: Any = read_case(out)
    assert case.document.revision == "D"
    assert [entry.revision for entry in case.document.history] == ["A", "B", "C", "D"]
    assert case.document.history[-1].text == NEXT.reason
    assert case.document.prepared.name == "Ann Ash"
    rated = case.speeds.rated
    assert rated.as_given == "1785 rpm"
    assert rated.source.startswith("data sheet TPW-4105-DS rev. 5; revision D: Specification")
    assert case.speeds.minimum.source == "data sheet TPW-4105-DS rev. 5"


def test_a_stated_source_stands_alone_and_others_may_be_set(fan: Path, tmp_path: Path) -> None:
    out = tmp_path / "new.yaml"
    out.write_text(
        revised(
            fan, tmp_path, "rotor.mass=410 lb", "rotor.mass.tolerance=2 lb",
            "speeds.trip.status=preliminary", "speeds.trip.source=letter of May",
            source="weighing note 2",
        )
    )  # fmt: skip
    case: Any = read_case(out)
    assert case.rotor.mass.source == "weighing note 2"
    assert case.rotor.mass.tolerance_text == "± 2 lb"
    assert (case.speeds.trip.status, case.speeds.trip.source) == ("preliminary", "letter of May")
    assert case.speeds.trip.as_given == "1970 rpm"


def test_items_are_added_and_taken_out(fan: Path, tmp_path: Path) -> None:
    out = tmp_path / "new.yaml"
    item = "criteria[5]={kind: stability, margin: 10 %, source: spec}"
    out.write_text(revised(fan, tmp_path, item, remove=["passages[2]", "speeds.trip"]))
    case: Any = read_case(out)
    assert [c.kind for c in case.criteria][-1] == "stability"
    assert [p.name for p in case.passages] == ["Start-up"]
    assert case.speeds.trip is None


def test_a_first_issue_enters_the_history(fan: Path, tmp_path: Path) -> None:
    exhauster = fan.parent / "exhauster.yaml"  # no history, status for review
    out = tmp_path / "new.yaml"
    out.write_text(revised(exhauster, tmp_path, "rotor.mass=311 lb", revision="B"))
    history = read_case(out).document.history
    assert [(e.revision, e.date) for e in history] == [("A", "2026-03-09"), ("B", "2026-04-01")]
    issued = tmp_path / "issued.yaml"
    issued.write_text(exhauster.read_text().replace("status: for review", "status: for issue"))
    out.write_text(revised(issued, tmp_path / "i", "rotor.mass=311 lb", revision="B"))
    assert read_case(out).document.status == "for review"  # never issued by itself


def test_texts_stay_the_texts_they_are(fan: Path, tmp_path: Path) -> None:
    text = fan.read_text().replace("revision: C\n", "revision: 1.10\n").replace(
        "number: CAL-0438", "number: 0417"
    )  # fmt: skip
    text = text.replace("title: Lateral", "title: 'It''s so: lateral' # as drawn\n  #")
    odd = tmp_path / "odd.yaml"
    odd.write_text(text)
    new = revised(odd, tmp_path, "speeds.rated=1785 rpm", revision="1.20")
    out = tmp_path / "new.yaml"
    out.write_text(new)
    case = read_case(out)
    assert (case.document.number, case.document.revision) == ("0417", "1.20")
    assert case.document.history[-2].revision == "1.10"
    assert "title: 'It''s so: lateral' # as drawn" in new


@pytest.mark.parametrize(
    ("setting", "words"),
    [
        ("speeds.rted=1 rpm", "'rted' is not known here"),
        ("speds.rated=1 rpm", "did you mean 'speeds'"),
        ("criteria[0].margin=3 %", "items count from 1"),
        ("criteria[9].margin=3 %", "the list has 4 items"),
        ("speeds[1]=3 rpm", "there is no list here"),
        ("rotor=3", "a section stands here"),
        ("rotor.mass=-3 kg", "not above zero"),
        ("speeds.rated=1900 rpm", "below the rated"),
        ("speeds.rated.pitch=3", "lies below a single value"),
        ("rotor..mass=3 kg", "is no path"),
        ("rotor.mass", "sets nothing"),
        ("rotor.mass=", "set to nothing"),
        ("criteria[5]={kind: stability", "is not YAML"),
    ],
)
def test_what_cannot_be_set_is_told(setting: str, words: str, fan: Path, tmp_path: Path) -> None:
    with pytest.raises(InputError) as error:
        revised(fan, tmp_path, setting)
    assert words in str(error.value)


@pytest.mark.parametrize(
    ("how", "words"),
    [
        ({"revision": "C"}, "there already"),
        ({"revision": "B"}, "the latest is C"),
        ({"date": "2025-01-01"}, "lies before"),
        ({"date": "soon"}, "not a date"),
        ({"reason": " "}, "no reason"),
        ({"revision": "D/1"}, "cannot name a folder"),
    ],
)
def test_a_revision_that_cannot_follow_is_refused(
    how: Any, words: str, fan: Path, tmp_path: Path
) -> None:
    with pytest.raises(InputError, match=words):
        revised(fan, tmp_path, "speeds.rated=1785 rpm", **how)


def test_paths_are_those_that_errors_print() -> None:
    assert steps("criteria[2].margin") == ["criteria", 1, "margin"]
    assert steps("speeds.maximum continuous") == ["speeds", "maximum continuous"]
    for wrong in ("", "[1]", "a[", "a]b", ".a", "a.", "a[x]"):
        with pytest.raises(InputError):
            steps(wrong)


def test_an_existing_case_is_never_written_over(fan: Path, tmp_path: Path) -> None:
    case = copied(fan, tmp_path / "scratch")
    text = revised_text(case, [], [], NEXT)
    target = tmp_path / "kept.yaml"
    keep_case(case, text, target)
    keep_case(case, text, target)  # the same again is no harm
    assert target.read_text() == text
    target.write_text("mine")
    with pytest.raises(PackageError, match="already with other content"):
        keep_case(case, text, target)
    assert target.read_text() == "mine"


def test_a_package_is_rerun_with_changed_values_in_one_command(
    reportgen: Any, run_demo: Any, tmp_path: Path
) -> None:
    package = run_demo("booster-fan").package
    done = reportgen(
        "revise", package, "--set", "criteria[1].margin=15 %", "--revision", "D",
        "--reason", "Specification rev. 4", "--date", "2026-04-01", "-o", tmp_path / "out",
        "--case", tmp_path / "kept" / "fan.yaml",
    )  # fmt: skip
    assert done.returncode == 0, done.stderr
    made = tmp_path / "out" / "CAL-0438_D"
    assert str(made) in done.stdout
    results = json.loads((made / "data" / "results.json").read_bytes())
    assert {c["verdict"] for c in results["criteria"]} == {"meets"}
    assert results["document"]["history"][-1]["text"] == "Specification rev. 4"
    assert (tmp_path / "kept" / "fan.yaml").read_bytes() == (
        made / "data" / "case.yaml"
    ).read_bytes()
    assert reportgen("verify", made).returncode == 0
    compared = json.loads(reportgen("compare", package, made, "--json").stdout)
    assert [i["path"] for i in compared["inputs"] if i["counts"]] == ["criteria[1].margin"]


def test_a_wrong_command_leaves_nothing(reportgen: Any, fan: Path, tmp_path: Path) -> None:
    out = tmp_path / "out"
    common = ("--revision", "D", "--reason", "x", "-o", out)
    for more in (("--set", "speeds.rted=1 rpm"), ("--no-run",), ("--set", "nothing")):
        done = reportgen("revise", fan, *common, *more)
        assert done.returncode == 2, done.stderr
        assert "Traceback" not in done.stderr
    assert not out.exists()
    assert reportgen("revise", tmp_path / "none", *common).returncode == 2


def test_the_worst_rotor_of_a_study_runs_as_a_case_of_its_own(
    reportgen: Any, run_demo: Any, tmp_path: Path
) -> None:
    package = run_demo("booster-fan-tolerances").package
    case = tmp_path / "worst.yaml"
    done = reportgen("worst", package, "--criterion", "C2", "--case", case, "--json")
    assert done.returncode == 0, done.stderr
    told = json.loads(done.stdout)
    from reportgen.assess.by_template import assess_case

    read = read_case(case)
    assert read.document.status == "draft"
    assert read.document.number == "CAL-0438-WORST-C2"
    judged = assess_case(read).judged
    margin = next(j.outcome.margin for j in judged if j.outcome.title in told["criterion"])
    assert margin == pytest.approx(told["margin"], abs=1e-12)
    assert margin is not None
    assert margin < 0
    assert not any(given.half_width for _, _, given, _ in read.givens()
                   if "sampled rotor" in given.source)  # fmt: skip
    for wrong, words in (("C9", "C1, C2"), ("", "tolerance study")):
        source = package if wrong else run_demo("booster-fan").package
        failed = reportgen("worst", source, "--criterion", wrong, "--case", tmp_path / "w.yaml")
        assert failed.returncode == 2
        assert words in failed.stderr
    assert not (tmp_path / "w.yaml").exists()


def test_side_tables_are_carried(tmp_path: Path, fan: Path) -> None:
    """A comparison names two files; both go with its next revision."""
    for name in ("booster-fan.yaml", "booster-fan-changes.yaml"):
        shutil.copy(fan.parent / name, tmp_path / name)
    shutil.copytree(fan.parent / "earlier", tmp_path / "earlier")
    source = tmp_path / "booster-fan-changes.yaml"
    case = copied(source, tmp_path / "scratch")
    text = revised_text(case, [Setting.parse("document.project=Unit 42")], [],
                        Revision("B", "moved", "2026-04-01"))  # fmt: skip
    target = tmp_path / "kept" / "case-b.yaml"
    keep_case(case, text, target)
    new = read_case(target)
    assert side_files(new) == side_files(read_case(source))
    assert new.document.project == "Unit 42"
