"""What a case file becomes: model, resolved form, givens, holds, schema."""

import json
import math
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import jsonschema
import pytest
from ruamel.yaml import YAML

from reportgen.case import Case, from_resolved, read_case, schema, side_files
from reportgen.errors import InputError

CASES = sorted((Path(__file__).parents[2] / "cases").glob("*.yaml"))
Read = Callable[[str | bytes], Case]


@pytest.mark.parametrize("path", CASES, ids=lambda p: p.stem)
def test_a_demo_case_comes_back_equal_from_its_resolved_form(path: Path) -> None:
    case = read_case(path)
    resolved = json.loads(json.dumps(case.resolved(), allow_nan=False))
    assert from_resolved(resolved) == case
    assert from_resolved({**resolved, "template_record": {}, "provenance": {}}) == case


@pytest.mark.parametrize("path", CASES, ids=lambda p: p.stem)
def test_a_demo_case_fits_the_published_schema(path: Path) -> None:
    whole = schema()
    jsonschema.Draft202012Validator.check_schema(whole)
    plain = YAML(typ="safe", pure=True).load(path.read_text())
    plain = json.loads(json.dumps(plain, default=str))  # dates as the text they were
    jsonschema.Draft202012Validator(whole).validate(plain)


@pytest.mark.parametrize(
    ("path", "value"),
    [
        (("rotor", "mass"), 62),
        (("rotor", "mss"), "62 kg"),
        (("document", "status"), "final"),
        (("document", "number"), "a/b"),
        (("template",), "one-mas-whirl"),
        (("criteria",), [{"kind": "separation"}]),
    ],
)
def test_the_schema_refuses_what_the_reader_refuses(
    sound: str, path: tuple[str, ...], value: Any
) -> None:
    plain = YAML(typ="safe", pure=True).load(sound)
    plain = json.loads(json.dumps(plain, default=str))
    validator = jsonschema.Draft202012Validator(schema())
    validator.validate(plain)
    inner = plain
    for key in path[:-1]:
        inner = inner[key]
    inner[path[-1]] = value
    assert not validator.is_valid(plain)


def test_every_key_of_the_models_has_its_place_in_the_schema() -> None:
    definitions = schema()["$defs"]
    keys = set(definitions["OneMassCase"]["properties"])
    assert {"reportgen", "template", "document", "rotor", "speeds", "passages"} <= keys
    assert "client reference" in definitions["Document"]["properties"]
    assert "maximum continuous" in definitions["Speeds"]["properties"]
    assert "from" in definitions["PassageGiven"]["properties"]


def test_the_demo_plant_shows_what_a_case_can_hold() -> None:
    cases = [read_case(path) for path in CASES if "one-mass" in path.read_text()]
    assert {case.units for case in cases} == {"si", "us"}
    givens = [given for case in cases for _, _, given, _ in case.givens()]
    assert all(given.source for given in givens)
    assert any(given.tolerance for given in givens)
    assert any(given.status == "preliminary" for given in givens)
    kinds = {hold["kind"] for case in cases for hold in case.holds()}
    assert kinds >= {"preliminary", "source", "assumption"}
    assert all("nvented" in path.read_text() for path in CASES)


def test_values_are_si_and_stand_as_given_beside(sound: str, read: Read) -> None:
    case: Any = read(sound)
    mass = case.rotor.mass
    assert (float(mass), mass.unit, mass.as_given, mass.source) == (
        62.0,
        "kg",
        "62 kg",
        "weight table",
    )
    assert mass.tolerance_text == "± 2 %"
    assert mass.half_width == pytest.approx(1.24, rel=1e-15)
    assert mass.distribution == "uniform"
    assert float(case.speeds.rated) == pytest.approx(1480 * 2 * math.pi / 60, rel=1e-15)
    assert list(case.speeds.stated()) == ["minimum", "rated", "trip"]
    assert case.resolved()["rotor"]["mass"]["si"] == 62.0
    assert case.resolved()["document"]["client_reference"] is None


@pytest.mark.parametrize(
    ("tolerance", "half_width", "printed"),
    [("2 %", 1.24, "± 2 %"), ("± 0.5 kg", 0.5, "± 0.5 kg"), ("1 lb", 0.45359237, "± 1 lb")],
)
def test_a_tolerance_is_a_share_or_an_amount(
    sound: str, read: Read, tolerance: str, half_width: float, printed: str
) -> None:
    case: Any = read(sound.replace("tolerance: 2 %", f"tolerance: {tolerance}"))
    assert case.rotor.mass.half_width == pytest.approx(half_width, rel=1e-15)
    assert case.rotor.mass.tolerance_text == printed


def test_a_sections_source_and_status_hold_for_givens_that_state_none(
    sound: str, read: Read
) -> None:
    text = sound.replace("  source: data sheet\n", "  source: data sheet\n  status: preliminary\n")
    text = text.replace("900 rpm", "{value: 900 rpm, source: operator, status: confirmed}")
    case: Any = read(text)
    assert (case.speeds.minimum.source, case.speeds.minimum.status) == ("operator", "confirmed")
    assert (case.speeds.rated.source, case.speeds.rated.status) == ("data sheet", "preliminary")


def test_a_sections_source_reaches_the_sections_in_it(sound: str, read: Read) -> None:
    text = sound.replace("rotor:\n", "rotor:\n  source: drawing 7\n")
    text = text.replace("{ratio: {value: 0.03, source: test}}", "{ratio: 0.03}")
    case: Any = read(text)
    assert case.rotor.damping.ratio.source == "drawing 7"
    assert case.rotor.mass.source == "weight table"


def test_what_is_open_is_a_hold(sound: str, read: Read) -> None:
    assert read(sound).holds() == []
    text = sound.replace("{value: G6.3, source: order}", "G6.3")
    text = text.replace("source: beam calculation", "source: b, status: preliminary")
    text = text.replace("source: test", "source: assumed by experience")
    text = text.replace("status: confirmed", "status: to be confirmed")
    text = text.replace("margin: 20 %", "margin: {value: 20 %, status: preliminary}")
    assert read(text).holds() == [
        {"id": "H1", "kind": "preliminary", "text": "Rotor stiffness, 1.9e6 N/m: preliminary; b"},
        {"id": "H2", "kind": "source", "text": "Damping ratio, 0.03: assumed by experience"},
        {"id": "H3", "kind": "source", "text": "Balance quality grade, G6.3: no source stated"},
        {
            "id": "H4",
            "kind": "preliminary",
            "text": "Margin of criterion 1, 20 %: preliminary; order",
        },
        {
            "id": "H5",
            "kind": "assumption",
            "text": "Assumption A1 to be confirmed: Rigid housings",
        },
    ]


def test_givens_come_in_order_with_path_title_and_quantity(sound: str, read: Read) -> None:
    listed = [(path, title, quantity) for path, title, _, quantity in read(sound).givens()]
    assert listed[:3] == [
        ("rotor.mass", "Rotor mass", "mass"),
        ("rotor.stiffness", "Rotor stiffness", "stiffness"),
        ("rotor.damping.ratio", "Damping ratio", "ratio"),
    ]
    assert ("passages[1].from", "Start-up, from speed", "speed") in listed
    assert not any(path.startswith("criteria") for path, _, _ in listed)


def test_text_stays_as_it_is_typed(sound: str, read: Read) -> None:
    text = sound.replace("CAL-0001", "0417").replace("revision: A", "revision: 1.10")
    text = text.replace("Test rotor", "no")
    case: Any = read(text)
    assert (case.document.number, case.document.revision) == ("0417", "1.10")
    assert case.machine.name == "no"


def test_a_case_cannot_be_changed(sound: str, read: Read) -> None:
    case: Any = read(sound)
    with pytest.raises(ValueError, match="frozen"):
        case.units = "us"
    with pytest.raises(ValueError, match="frozen"):
        case.rotor.mass.si = 1.0


def test_a_resolved_case_that_was_tampered_with_is_refused(sound: str, read: Read) -> None:
    resolved = read(sound).resolved()
    for value in ({"si": -1.0}, {"si": math.nan}, {"quantity": "length"}, {"extra": 1}):
        rotor = {**resolved["rotor"], "mass": {**resolved["rotor"]["mass"], **value}}
        with pytest.raises(InputError, match=r"rotor\.mass"):
            from_resolved({**resolved, "rotor": rotor})
    with pytest.raises(InputError, match="no template"):
        from_resolved({**resolved, "template": "other"})


def test_resolved_givens_are_refused_in_a_case_file(sound: str, read: Read) -> None:
    with pytest.raises(InputError, match="'si' is not known"):
        read(sound.replace("{value: 62 kg, source: weight table, tolerance: 2 %}", "{si: 62}"))


LOCAL = """\
reportgen: 1
template: own/template.ipynb
document:
  number: X-1
  title: Own
  revision: A
  status: draft
  date: 2026-03-02
  prepared: {name: N. Body}
machine: {name: Test rotor, orientation: vertical}
units: us
inputs:
  span: {value: 12 in, quantity: length, source: sketch, status: preliminary}
  blades: 7
  note: as built
"""


def test_a_local_template_takes_free_inputs(read: Read) -> None:
    case: Any = read(LOCAL)
    assert float(case.inputs["span"]) == pytest.approx(0.3048, rel=1e-15)
    assert case.inputs["blades"] == 7.0
    assert case.inputs["note"] == "as built"
    assert [hold["kind"] for hold in case.holds()] == ["preliminary"]
    assert case.givens()[0][:2] == ("inputs.span", "Span")
    assert from_resolved(json.loads(json.dumps(case.resolved()))) == case
    assert side_files(case) == {}
    plain = json.loads(json.dumps(YAML(typ="safe", pure=True).load(LOCAL), default=str))
    jsonschema.Draft202012Validator(schema()).validate(plain)


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        ("quantity: length", "quantity: lenght", "did you mean 'length'"),
        ("quantity: length, ", "", "quantity is missing"),
        ("12 in", "12 kg", "not that of a length"),
        ("blades: 7", "blades: [7]", "neither a given, a text nor a number"),
        ("own/", "../own/", "leads out of the case's folder"),
        ("own/", "/own/", "leads out of the case's folder"),
        ("own/", "c:\\own\\", "leads out of the case's folder"),
    ],
)
def test_a_fault_in_a_local_case_is_explained(read: Read, old: str, new: str, words: str) -> None:
    with pytest.raises(InputError, match=words) as caught:
        read(LOCAL.replace(old, new))
    assert len(caught.value.problems) == 1


def test_the_package_is_light_to_import() -> None:
    code = (
        "import sys, reportgen.case; "
        "print(sorted({'numpy', 'pydantic', 'pint', 'ruamel.yaml'} & set(sys.modules)))"
    )
    out = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert out.stdout.strip() == "[]"


def test_the_facade_holds_what_it_names() -> None:
    import reportgen.case

    for name in reportgen.case.__all__:
        assert getattr(reportgen.case, name) is not None
    with pytest.raises(AttributeError, match="no attribute 'absent'"):
        _ = reportgen.case.absent
