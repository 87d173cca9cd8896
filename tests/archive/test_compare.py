"""Comparing two revisions: what is named, by how much, what drives it, and what is refused."""

from __future__ import annotations

import json
import math
import shutil
from pathlib import Path
from typing import Any

import pytest

from reportgen.archive import compare_print
from reportgen.archive.compare import load_side, write_comparison
from reportgen.assess.comparison import compare
from reportgen.case import read_case
from reportgen.errors import InputError, VerificationError
from reportgen.package.write import read_payload, write_package


@pytest.fixture(scope="module")
def both() -> Any:
    cases = Path(__file__).parents[2] / "cases"
    return compare(
        read_case(cases / "earlier" / "booster-fan-B.yaml"), read_case(cases / "booster-fan.yaml")
    )


def changed(path: Path, folder: Path, *pairs: tuple[str, str]) -> Path:
    text = path.read_text()
    for old, new in pairs:
        assert old in text, old
        text = text.replace(old, new, 1)
    out = folder / "changed.yaml"
    out.write_text(text)
    return out


def test_each_changed_input_is_named_once(both: Any) -> None:
    counting = {c.path for c in both.changes if c.counts}
    assert counting == {
        "rotor.mass",
        "rotor.stiffness",
        "rotor.damping.logarithmic decrement",
        "passages[1].acceleration",
    }
    assert "document.revision" in {c.path for c in both.changes if not c.counts}


def test_results_moved_by_what_the_closed_form_says(both: Any) -> None:
    """√(k/m) of both cases, from the values in the files."""
    pound = 0.45359237
    old, new = math.sqrt(4.0e6 / (415 * pound)), math.sqrt(4.4e6 / (408 * pound))
    moved = {q.id: q for q in both.moved}["natural-frequency"]
    assert (moved.old, moved.new) == pytest.approx((old, new))
    assert moved.relative == pytest.approx(new / old - 1)
    by = {d.path: d for d in both.drivers}
    stiff, mass = by["rotor.stiffness"], by["rotor.mass"]
    assert stiff.alone[moved.id] == pytest.approx(math.sqrt(4.4e6 / (415 * pound)) - old)
    assert stiff.last[moved.id] == pytest.approx(new - math.sqrt(4.0e6 / (408 * pound)))
    # of two inputs that act, the mean shares are the whole
    assert stiff.share(moved) + mass.share(moved) == pytest.approx(1.0)
    assert by["rotor.damping.logarithmic decrement"].share(moved) == 0.0
    assert both.driver_of(moved) is stiff


def test_the_flipped_verdict_is_named_with_its_driver(both: Any) -> None:
    assert [j.title for j in both.flipped] == ["Separation margin, critical speed 1"]
    assert both.flipped[0].verdicts == ("meets", "does not meet")
    captions = {caption: rows for caption, _, rows in compare_print.tables(both)}
    row = captions["verdicts"][0]
    assert row[3:5] == ("meets", "does not meet")
    assert row[5].startswith("Rotor stiffness")


def test_a_case_compared_with_itself_has_nothing_to_say(fan: Path) -> None:
    case = read_case(fan)
    same = compare(case, case)
    assert (same.changes, same.moved, same.flipped, same.drivers) == ((), (), (), ())


def test_another_unit_or_source_is_no_change_of_a_value(fan: Path, tmp_path: Path) -> None:
    other = changed(
        fan, tmp_path, ("value: 20 µm", "value: 0.02 mm"), ("balance record 4105-5", "record 9")
    )
    found = compare(read_case(fan), read_case(other))
    assert [(c.path, c.counts) for c in found.changes] == [("unbalance.eccentricity", False)]
    assert found.moved == ()


def test_alternatives_are_put_in_together(fan: Path, tmp_path: Path) -> None:
    other = changed(
        fan,
        tmp_path,
        ("logarithmic decrement: {value: 0.25", "ratio: {value: 0.05"),
        ("minimum: 1750 rpm", "minimum: 1770 rpm"),
        ("rated: 1780 rpm", "rated: 1880 rpm"),
        ("maximum continuous: 1790 rpm", "maximum continuous: 1890 rpm"),
    )
    found = compare(read_case(fan), read_case(other))
    assert {d.path: len(d.changes) for d in found.drivers} == {"rotor.damping": 2, "speeds": 3}
    taken = [c.path for d in found.drivers for c in d.changes]
    assert sorted(taken) == sorted(c.path for c in found.changes if c.counts)


def test_criteria_that_come_and_go_are_told(fan: Path, tmp_path: Path) -> None:
    text = fan.read_text()
    kept, _, _ = text.partition("  - kind: balance grade")
    other = tmp_path / "fewer.yaml"
    other.write_text(kept)
    found = compare(read_case(fan), read_case(other))
    assert [(j.title, j.verdicts) for j in found.flipped] == [
        ("Residual unbalance by balance quality grade", ("meets", ""))
    ]


def test_packages_are_compared_from_the_command_line(
    reportgen: Any, run_demo: Any, fan_of_revision_b: Path
) -> None:
    package = run_demo("booster-fan").package
    done = reportgen("compare", fan_of_revision_b, package)
    assert done.returncode == 3  # the new revision does not meet a criterion
    for words in ("rotor.stiffness", "4 kN/mm", "4.4 kN/mm", "+10 %", "does not meet"):
        assert words in done.stdout
    assert done.stderr == ""
    found = json.loads(reportgen("compare", fan_of_revision_b, package, "--json").stdout)
    assert found["notes"] == []
    assert [c["title"] for c in found["criteria"] if c["flipped"]] == [
        "Separation margin, critical speed 1"
    ]
    assert found["new"]["tag_manifest_sha512"]


def test_the_demo_report_shows_both_curves_and_the_driver(run_demo: Any) -> None:
    demo = run_demo("booster-fan-changes")
    results = demo.results()
    assert set(results["series"]["curves"]) == {"revision B", "revision C"}
    assert "driven most by rotor stiffness" in json.dumps(results["conclusion"])
    held = {p.name for p in (demo.package / "data").rglob("*.yaml")}
    assert held == {"case.yaml", "booster-fan.yaml", "booster-fan-B.yaml"}


def test_a_comparison_of_packages_is_a_package_of_its_own(
    reportgen: Any, run_demo: Any, fan_of_revision_b: Path, tmp_path: Path
) -> None:
    package = run_demo("booster-fan").package
    done = reportgen(
        "compare", fan_of_revision_b, package, "-o", tmp_path / "out", "--prepared", "Ann Ash",
        "--date", "2026-04-01", "--json",
    )  # fmt: skip
    assert done.returncode == 3, done.stderr
    made = Path(json.loads(done.stdout)["package"])
    assert made.name == "CAL-0438-B-C_A"
    document = json.loads((made / "data" / "results.json").read_bytes())["document"]
    assert (document["prepared"]["name"], document["date"]) == ("Ann Ash", "2026-04-01")
    assert (made / "data" / "new" / "results.json").is_file()
    assert "computed again" in (made / "data" / "report.html").read_text()
    assert reportgen("verify", made).returncode == 0
    # what it was made from can be read again from the package alone
    again = read_case(made / "data" / "case.yaml")
    assert again.new.digest  # type: ignore[attr-defined]


def test_archived_results_that_are_not_found_again_are_told(
    run_demo: Any, fan: Path, tmp_path: Path
) -> None:
    payload = read_payload(run_demo("booster-fan").package)
    results = json.loads(payload["results.json"])
    results["results"][0]["value"] *= 1.001
    results["criteria"][0]["verdict"] = "meets"
    payload["results.json"] = json.dumps(results).encode()
    older = write_package(tmp_path, "CAL-0438_C", payload, {})
    (tmp_path / "a").mkdir()
    sides = (load_side(older, tmp_path / "a"), load_side(fan, tmp_path / "b"))
    notes = compare_print.archive_notes(sides, compare(sides[0].case, sides[1].case))
    assert len(notes) == 1
    assert "Critical speed" in notes[0]
    assert "Separation margin" in notes[0]
    case = read_case(write_comparison(*sides, tmp_path / "made"))
    assert case.old.results is not None  # type: ignore[attr-defined]


def test_nothing_rests_on_a_damaged_package(reportgen: Any, run_demo: Any, tmp_path: Path) -> None:
    broken = Path(shutil.copytree(run_demo("booster-fan").package, tmp_path / "CAL-0438_C"))
    case = broken / "data" / "case.yaml"
    case.write_text(case.read_text().replace("408 lb", "407 lb"))
    with pytest.raises(VerificationError, match=r"case\.yaml"):
        load_side(broken, tmp_path / "x")
    done = reportgen("compare", broken, broken, "-o", tmp_path / "out")
    assert done.returncode == 4
    assert "Traceback" not in done.stderr
    assert not (tmp_path / "out").exists()


def test_what_cannot_be_compared_is_refused(
    reportgen: Any, fan: Path, run_demo: Any, tmp_path: Path
) -> None:
    study = run_demo("booster-fan-tolerances").case
    for old, words in ((study, "cannot be compared"), (tmp_path / "none.yaml", "no such file")):
        done = reportgen("compare", old, fan)
        assert done.returncode == 2
        assert words in done.stderr
        assert done.stdout == ""


def test_packages_that_cannot_be_computed_again_are_compared_as_archived(
    run_demo: Any, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    from reportgen.archive import compare_archived

    payload = read_payload(run_demo("booster-fan").package)
    results = json.loads(payload["results.json"])
    results["results"][0]["value"] *= 1.01
    results["criteria"][0]["verdict"] = "meets"
    older = write_package(
        tmp_path, "CAL-0438_C", payload | {"results.json": json.dumps(results).encode()}, {}
    )
    sides = [load_side(older, tmp_path / "a"),
             load_side(run_demo("booster-fan").package, tmp_path / "b")]  # fmt: skip
    monkeypatch.setattr(compare_archived, "has_assessment", lambda _: False)
    calc, note = compare_archived.compared(*sides)
    assert "as they are" in note
    assert [q.id for q in calc.moved] == ["critical-speed"]
    assert calc.moved[0].relative == pytest.approx(1 / 1.01 - 1)
    assert [j.verdicts for j in calc.flipped] == [("meets", "does not meet")]
    assert calc.drivers == ()
    tables = {caption: rows for caption, _, rows in compare_print.tables(calc)}
    assert tables["results that moved"][0][-1] == "–"
    case = load_side(run_demo("booster-fan").case, tmp_path / "c")
    with pytest.raises(InputError, match="run both"):
        compare_archived.compared(sides[0], case)


def test_a_comparison_names_cases_of_one_template(tmp_path: Path, fan: Path) -> None:
    cases = fan.parent
    text = (cases / "booster-fan-changes.yaml").read_text()
    for name in ("booster-fan.yaml", "booster-fan-tolerances.yaml"):
        shutil.copy(cases / name, tmp_path / name)
    shutil.copytree(cases / "earlier", tmp_path / "earlier")
    case = tmp_path / "c.yaml"
    case.write_text(text.replace("{case: booster-fan.yaml}", "{case: booster-fan-tolerances.yaml}"))
    with pytest.raises(InputError, match=r"new\.case.*a case of tolerance-study"):
        read_case(case)
    broken = (tmp_path / "booster-fan.yaml").read_text().replace("408 lb", "408 pounds of")
    (tmp_path / "booster-fan.yaml").write_text(broken)
    case.write_text(text)
    with pytest.raises(InputError, match=r"booster-fan\.yaml:\d+:\d+: rotor\.mass"):
        read_case(case)
