"""Each bad input is one clear error, at its place."""
# ruff: noqa: E501  (a table reads better with one fault a line)

import re
from collections.abc import Callable
from pathlib import Path

import pytest

from reportgen.case import Case, read_case
from reportgen.errors import InputError, Problem

Problems = Callable[[str | bytes], list[Problem]]

# what is replaced, by what, field, what is found, what would do
BROKEN = [
    ("mass: {value: 62 kg,", "mass: {value: 62 mm,", "rotor.mass.value", "'mm' is not that of a mass", "kg"),
    ("mass: {value: 62 kg,", "mass: {value: 62,", "rotor.mass.value", "no unit", "62 kg"),
    ("mass: {value: 62 kg,", "mass: {value: nan kg,", "rotor.mass.value", "not a finite", "a mass"),
    ("mass: {value: 62 kg,", "mass: {value: .inf kg,", "rotor.mass.value", "not a finite", "a mass"),
    ("mass: {value: 62 kg,", "mass: {value: 1e999 kg,", "rotor.mass.value", "outside the range", "power"),
    ("mass: {value: 62 kg,", "mass: {value: -62 kg,", "rotor.mass.value", "-62 kg is not above zero", "above zero"),
    ("mass: {value: 62 kg,", "mass: {value: '1,450 kg',", "rotor.mass.value", "comma", "no"),
    ("mass: {value: 62 kg,", "mass: {value: [62 kg],", "rotor.mass.value", "found a list", "a mass"),
    ("mass: {value: 62 kg,", "mass: {", "rotor.mass.value", "value is missing", "value: 1 kg"),
    ("mass: {value: 62 kg,", "mass: {value: 62 kg, sorce: x,", "rotor.mass.sorce", "'sorce' is not known", "'source'"),
    ("mass: {value: 62 kg,", "mass: {value: 62 kg, status: prelim,", "rotor.mass.status", "'prelim'", "'preliminary'"),
    ("tolerance: 2 %", "tolerance: 120 %", "rotor.mass.tolerance", "not between 0 and 100 %", "smaller"),
    ("tolerance: 2 %", "tolerance: 65 kg", "rotor.mass.tolerance", "not above zero", "smaller"),
    ("tolerance: 2 %", "tolerance: 2 mm", "rotor.mass.tolerance", "not that of a mass", "kg"),
    ("tolerance: 2 %", "distribution: normal", "rotor.mass.distribution", "without a tolerance", "tolerance:"),
    ("1.9e6 N/m", "0 N/m", "rotor.stiffness.value", "not above zero", "above zero"),
    ("1.9e6 N/m", "10850 lb/in", "rotor.stiffness.value", "'lb/in'", "lbf/in"),
    ("{value: 0.03, source: test}", "1.0", "rotor.damping.ratio", "not below 1", "0 to below 1"),
    ("{value: 0.03, source: test}", "-0.1", "rotor.damping.ratio", "not at least zero", "0 to below 1"),
    ("{ratio: {value: 0.03, source: test}}", "{coefficient: 30 kN s/m}", "rotor.damping", "ratio of 1.38", "0 to below 1"),
    ("{ratio: {value: 0.03, source: test}}", "{}", "rotor.damping", "none of ratio", "exactly one"),
    ("{ratio: {value: 0.03, source: test}}", "{ratio: 0.1, coefficient: 1 N s/m}", "rotor.damping", "ratio and coefficient", "exactly one"),
    ("{ratio: {value: 0.03, source: test}}", "0.03", "rotor.damping", "found '0.03'", "the damping"),
    ("{ratio: {value: 0.03, source: test}}", "", "rotor.damping", "damping is empty", "after the colon"),
    ("  stiffness: {value: 1.9e6 N/m, source: beam calculation}\n", "", "rotor", "none of stiffness, shaft", "exactly one"),
    ("rated: 1480 rpm", "rated: 1480 1/s", "speeds.rated", "does not say what", "Hz, rpm or rad/s"),
    ("rated: 1480 rpm", "rated: 1800 rpm", "speeds.trip", "trip speed is not above the rated", "order"),
    ("rated: 1480 rpm", "ratd: 1480 rpm", "speeds.ratd", "'ratd' is not known", "'rated'"),
    ("  rated: 1480 rpm\n", "", "speeds.rated", "rated is missing", "rated: 1480 rpm"),
    ("acceleration: 25 rpm/s", "acceleration: -25 rpm/s", "passages[1].acceleration", "rises", "positive"),
    ("acceleration: 25 rpm/s", "acceleration: 0 rpm/s", "passages[1].acceleration", "never ends", "acceleration"),
    ("acceleration: 25 rpm/s", "acceleration: 1e9 rpm/s", "passages[1].acceleration", "of a turn", "a drive can reach"),
    ("acceleration: 25 rpm/s", "acceleration: 1e-9 rpm/s", "passages[1].acceleration", "turns", "steady"),
    ("to: 1480 rpm,", "to: 0 rpm,", "passages[1].to", "ends at the speed it starts", "another"),
    ("passages:\n  - {name", "passages:\n  {name", "passages", "found a mapping", "a list"),
    ("date: 2026-03-02", "date: 2026-02-30", "document.date", "not a date", "2026-03-02"),
    ("date: 2026-03-02", "date: 02.03.2026", "document.date", "not a date", "2026-03-02"),
    ("date: 2026-03-02", "date: 2026-W10-1", "document.date", "not a date", "2026-03-02"),
    ("number: CAL-0001", "number: ../../etc", "document.number", "cannot name a folder", "letters"),
    ("number: CAL-0001", "number: 'CAL%1'", "document.number", "cannot name a folder", "letters"),
    ("revision: A", "revision: ''", "document.revision", "nothing is written", "write it"),
    ("status: draft", "status: drft", "document.status", "found 'drft'", "'draft'"),
    ("  title: Lateral vibration of a test rotor\n", "", "document.title", "title is missing", "add title"),
    ("Lateral vibration of a test rotor", "x" * 301, "document.title", "longer than 300", "shorten"),
    ("Lateral vibration of a test rotor", '"a\\u202eb"', "", "U+202E", "delete"),
    ("Lateral vibration of a test rotor", '"a\\x07b"', "", "U+0007", "delete"),
    ("Lateral vibration of a test rotor", '"a\\ud800b"', "", "U+D800", "delete"),
    ("orientation: horizontal", "orientation: horizntal", "machine.orientation", "found 'horizntal'", "'horizontal'"),
    ("units: si", "units: metric", "units", "found 'metric'", "si, us"),
    ("reportgen: 1", "reportgen: 2", "reportgen", "found '2'", "1"),
    ("one-mass-whirl", "one-mas-whirl", "template", "no template 'one-mas-whirl'", "'one-mass-whirl'"),
    ("template: one-mass-whirl\n", "", "template", "template is missing", "one-mass-whirl"),
    ("kind: separation margin", "kind: seperation margin", "criteria[1].kind", "'seperation margin'", "'separation margin'"),
    ("kind: separation margin, ", "", "criteria[1]", "kind is missing", "separation margin"),
    ("margin: 20 %", "margin: 0.2", "criteria[1].margin", "no unit", "0.2 %"),
    ("margin: 20 %", "margin: 120 %", "criteria[1].margin", "not below 100 %", "between 0 and 100"),
    ("margin: 20 %, ", "", "criteria[1]", "flat rule has no margin", "margin: 20 %"),
    ("rule: flat", "rule: amplification factor", "criteria[1].margin", "sets its own", "leave"),
    (", source: order}\n", "}\n", "criteria[1].source", "source is missing", "add source"),
    ("- {kind: separation margin, rule: flat, margin: 20 %, source: order}",
     "- {kind: project limit, result: sag, limit: 3 furlong, sense: at most, source: order}",
     "criteria[1].limit", "'furlong' is not a unit", "3 kN"),
    ("  - {id: A1, text: Rigid housings, status: confirmed}\n",
     "  - {id: A1, text: x, status: confirmed}\n  - {id: A1, text: y, status: confirmed}\n",
     "assumptions", "'A1' stands twice", "its own name"),
    ("rotor:\n", "rotor:\n  mass: 3 kg\n", "rotor.mass", "second time, first on line 13", "one of the two"),
    ("units: si", "units: &u si", "", "an anchor, &u", "without anchors"),
    ("units: si", "units: *u", "", "an alias, *u", "the value itself"),
    ("units: si", "units: !!python/object:os.system si", "", "a tag", "plain values"),
    ("units: si", "? [a, b]\n: si", "", "a key that is not a word", "key: value"),
    ("units: si", "units: si\n---\na: b", "", "a second document", "one case a file"),
    ("units: si", "units: [si", "", "not YAML", "brackets"),
    ("units: si", "\tunits: si", "", "not YAML", "spaces, not with tabs"),
    ("units: si", "units: " + "[" * 500, "", "nested too deep", "demo"),
    ("units: si", "units: [" + "1," * 11_000 + "]", "", "more than 10000 values", "demo"),
]  # fmt: skip


@pytest.mark.parametrize(("old", "new", "field", "found", "remedy"), BROKEN)
def test_one_fault_is_one_problem_at_its_place(
    sound: str, problems: Problems, old: str, new: str, field: str, found: str, remedy: str
) -> None:
    assert sound.count(old) >= 1
    at = sound.rindex(old)
    text = sound[:at] + new + sound[at + len(old) :]
    seen = problems(text)
    first = seen[0] if found != "an alias, *u" else seen[-1]
    assert len({p.line for p in seen}) == 1, [str(p) for p in seen]
    assert first.field == field
    assert found in first.message
    assert remedy in f"{first.message}; {first.remedy}"
    changed = text[: at + len(new)].count("\n") + 1
    assert sound[:at].count("\n") - 8 <= first.line <= changed + 1
    assert first.column >= 1
    assert len(str(first)) < 600


def test_the_place_is_that_of_the_value(sound: str, problems: Problems) -> None:
    (one,) = problems(sound.replace("62 kg", "62 mm"))
    assert str(one).startswith(f"{one.file}:13:17: rotor.mass.value: the unit 'mm'")


def test_all_problems_are_shown_at_once_in_the_order_of_the_file(
    sound: str, problems: Problems
) -> None:
    text = sound
    for old, new in [("62 kg", "62"), ("A\n", "'A/1'\n"), ("900 rpm", "900 mm"), ("20 %", "x")]:
        text = text.replace(old, new, 1)
    found = problems(text.replace("status: draft", "status: final"))
    assert [p.field for p in found] == [
        "document.revision",
        "document.status",
        "rotor.mass.value",
        "speeds.minimum",
        "criteria[1].margin",
    ]
    assert [p.line for p in found] == sorted(p.line for p in found)


def test_a_flood_of_problems_is_cut_short(sound: str, problems: Problems) -> None:
    found = problems(sound + "".join(f"key{i}: 1\n" for i in range(500)))
    assert len(found) == 101
    assert found[-1].message == "and 400 more problems"


@pytest.mark.parametrize(
    ("content", "words"),
    [
        (b"", "found nothing, not a case"),
        (b"# only a remark\n", "found nothing, not a case"),
        (b"- a\n- b\n", "found a list, not a case"),
        (b"just words", "found 'just words', not a case"),
        (b"a: \x00\x01", "is binary: a zero byte at offset 3"),
        (b"\xff\xfea\x00", "is UTF-16, not UTF-8"),
        ("a: b\nc: Größe".encode("latin-1"), "is not UTF-8: byte 0xf6 at offset 10"),
        (b"a: \x1b[31m", r"U\+001B"),
        ("a: \u202e b".encode(), r"U\+202E \(right-to-left override\)"),
        (b"x" * ((1 << 20) + 1), "larger than 1 MiB"),
    ],
)
def test_a_file_that_is_no_case_is_one_problem(
    problems: Problems, content: bytes, words: str
) -> None:
    (one,) = problems(content)
    assert re.search(words, one.message)
    assert one.remedy
    assert one.file.endswith("case.yaml")


def test_a_file_that_is_not_utf8_is_placed_by_line(problems: Problems) -> None:
    (one,) = problems("a: b\nc: Größe".encode("latin-1"))
    assert (one.line, one.column) == (2, 6)


def test_a_file_of_50_megabytes_is_not_read(tmp_path: Path) -> None:
    path = tmp_path / "huge.yaml"
    with path.open("wb") as stream:
        stream.truncate(50_000_000)
    with pytest.raises(InputError, match="larger than 1 MiB"):
        read_case(path)


def test_what_is_not_a_readable_file_is_refused(tmp_path: Path) -> None:
    for path, words in [
        (tmp_path / "absent.yaml", "does not exist"),
        (tmp_path, "is a folder"),
        (Path("/dev/null"), "not a regular file"),
        (tmp_path / ("x" * 5000), "does not exist|cannot be read"),
        (tmp_path / "a\0b", "does not exist|cannot be read"),
    ]:
        with pytest.raises(InputError, match=words):
            read_case(path)


def test_aliases_that_explode_are_refused_before_they_do(problems: Problems) -> None:
    bomb = "a0: &a0 [x, x]\n" + "".join(
        f"a{i}: &a{i} [{', '.join([f'*a{i - 1}'] * 9)}]\n" for i in range(1, 30)
    )
    assert "an anchor" in problems(bomb)[0].message


def test_a_byte_order_mark_is_tolerated(sound: str, read: Callable[[bytes], Case]) -> None:
    assert read(b"\xef\xbb\xbf" + sound.encode()).template == "one-mass-whirl"


def test_windows_line_ends_are_tolerated(sound: str, read: Callable[[bytes], Case]) -> None:
    assert read(sound.replace("\n", "\r\n").encode()) == read(sound.encode())
