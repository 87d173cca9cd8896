"""The case of a passage: speed programmes, drive and drag, one mass or stations."""
# ruff: noqa: E501  (a table reads better with one fault a line)

import json
import math
from collections.abc import Callable
from pathlib import Path
from typing import Any

import jsonschema
import pytest
from ruamel.yaml import YAML

from reportgen.case import from_resolved, read_case, schema, side_files
from reportgen.case.to_programme import to_programme
from reportgen.errors import InputError, Problem
from reportgen.rotor.passage_programme import ConstantAcceleration, PiecewiseAcceleration

HEAD = """\
reportgen: 1
template: transient-passage
document:
  number: CAL-0003
  title: Passage of a test rotor
  revision: A
  status: draft
  date: 2026-03-02
  prepared: {name: N. Body}
machine: {name: Test rotor, orientation: horizontal}
units: si
speeds: {source: data sheet, rated: 3000 rpm}
"""
ONE_MASS = """\
rotor:
  source: drawing 7
  mass: 62 kg
  stiffness: 1.9e6 N/m
  damping: {ratio: 0.03}
unbalance: {grade: G6.3, source: order}
clearances:
  - {name: Seal, clearance: 0.4 mm, runout: 10 µm, source: drawing 8}
limit: {amplitude: 80 µm, source: order}
sudden unbalance: {name: Loss of one blade, speed: 3000 rpm, amount: 12000 g mm, source: order}
passages:
  - name: Ramp
    ramp: {from: 0 rpm, to: 3000 rpm, acceleration: 25 rpm/s, hold: 2 s, source: order}
  - {name: Record, table: {file: record.csv, source: shop record}}
  - name: Drive
    drive: {from: 0 rpm, to: 3000 rpm, torque: motor.csv, load: load.csv, inertia: 2.4 kg m^2, source: motor}
  - name: Trip
    coast down: {from: 3300 rpm, to: 0 rpm, torque: load.csv, inertia: 2.4 kg m^2, source: motor}
criteria:
  - {kind: passage clearance, share: 75 %, source: order}
  - {kind: time above limit, limit: 2 s, source: order}
  - {kind: drive margin, margin: 20 %, source: order}
"""
STATIONS = """\
stations:
  source: drawing 7
  materials: {steel: {density: 7850 kg/m^3, modulus: 205 GPa, poisson: 0.29}}
  shaft: {sections: [{length: 0.5 m, outer diameter: 60 mm, material: steel}, {length: 0.5 m, outer diameter: 60 mm, material: steel}]}
  discs: [{name: Wheel, station: 2, mass: 40 kg, polar inertia: 0.8 kg m^2, diametral inertia: 0.45 kg m^2}]
  bearings:
    - {name: DE, station: 1, stiffness: 1e8 N/m, damping: 10 kN s/m}
    - {name: NDE, station: 3, stiffness: 1e8 N/m, damping: 10 kN s/m}
planes: [{on: Wheel, amount: 400 g mm, source: order}]
probes: [{name: X, station: 2, angle: 0 deg, source: drawing 9}]
clearances: [{name: Seal, on: Wheel, clearance: 0.4 mm, source: drawing 8}]
sudden unbalance: {name: Loss of one blade, speed: 3000 rpm, amount: 12000 g mm, on: Wheel, source: order}
modes: 6
passages:
  - name: Ramp
    ramp: {from: 0 rpm, to: 3000 rpm, acceleration: 25 rpm/s, source: order}
"""
TABLES = {
    "record.csv": "time [s],speed [rpm]\n0,0\n10,800\n12,800\n30,3000\n",
    "motor.csv": "speed [rpm],torque [N m]\n0,90\n2500,140\n3000,20\n",
    "load.csv": "speed [rpm],torque [N m]\n0,2\n3500,40\n",
}
Write = Callable[..., Path]


@pytest.fixture
def write(tmp_path: Path) -> Write:
    def write(text: str, **tables: str) -> Path:
        for name, content in {**TABLES, **{f"{k}.csv": v for k, v in tables.items()}}.items():
            (tmp_path / name).write_text(content)
        (tmp_path / "case.yaml").write_text(HEAD + text)
        return tmp_path / "case.yaml"

    return write


def problems(path: Path) -> list[Problem]:
    with pytest.raises(InputError) as caught:
        read_case(path)
    return caught.value.problems


@pytest.mark.parametrize("text", [ONE_MASS, STATIONS])
def test_the_case_comes_back_equal_and_fits_the_schema(write: Write, text: str) -> None:
    case = read_case(write(text))
    assert case.holds() == []
    assert from_resolved(json.loads(json.dumps(case.resolved(), allow_nan=False))) == case
    plain = json.loads(json.dumps(YAML(typ="safe", pure=True).load(HEAD + text), default=str))
    jsonschema.Draft202012Validator(schema()).validate(plain)
    titles = [title for _, title, _, _ in case.givens()]
    assert len(titles) == len(set(titles))


def test_side_tables_of_one_name_are_kept_once(write: Write) -> None:
    sides = side_files(read_case(write(ONE_MASS)))
    assert sides == {name: content.encode() for name, content in TABLES.items()}


def test_a_prescribed_speed_reaches_the_mechanics(write: Write) -> None:
    case: Any = read_case(write(ONE_MASS))
    rpm = math.pi / 30
    ramp, table, drive, _ = case.passages
    programme = to_programme(ramp)
    assert isinstance(programme, ConstantAcceleration)
    assert programme.end_speed == pytest.approx(3000 * rpm)
    assert programme.end_time == pytest.approx(122.0)
    programme = to_programme(table)
    assert isinstance(programme, PiecewiseAcceleration)
    assert programme.breakpoints[2] == pytest.approx((12.0, 800 * rpm))
    with pytest.raises(ValueError, match="prescribes no speed"):
        to_programme(drive)
    assert [p.speeds()[1] / rpm for p in case.passages] == pytest.approx([3000, 3000, 3000, 3300])


FAULTS = [
    (ONE_MASS, "acceleration: 25 rpm/s", "acceleration: 0 rpm/s", "passages[1].ramp.acceleration", "never ends"),
    (ONE_MASS, "acceleration: 25 rpm/s", "acceleration: -25 rpm/s", "passages[1].ramp.acceleration", "rises"),
    (ONE_MASS, "acceleration: 25 rpm/s", "acceleration: 1e9 rpm/s", "passages[1].ramp.acceleration", "of a turn"),
    (ONE_MASS, "acceleration: 25 rpm/s", "acceleration: 1e-6 rpm/s", "passages[1].ramp.acceleration", "turns"),
    (ONE_MASS, "drive: {from: 0 rpm, to: 3000 rpm", "drive: {from: 0 rpm, to: 3100 rpm", "passages[3].drive.torque", "covers 0 to 3000 r/min"),
    (ONE_MASS, "drive: {from: 0 rpm, to: 3000 rpm", "drive: {from: 3000 rpm, to: 0 rpm", "passages[3].drive.to", "runs up"),
    (ONE_MASS, "coast down: {from: 3300 rpm, to: 0 rpm", "coast down: {from: 0 rpm, to: 30 rpm", "passages[4].coast down.to", "lower speed"),
    (ONE_MASS, "{from: 3300 rpm, to: 0 rpm, torque: load.csv", "{from: 3300 rpm, to: 0 rpm, torque: motor.csv", "passages[4].coast down.torque", "covers 0 to 3000"),
    (ONE_MASS, "  - name: Ramp\n    ramp:", "  - name: Ramp\n    table: record.csv\n    ramp:", "passages[1]", "ramp and table"),
    (ONE_MASS, "name: Trip", "name: Ramp", "passages", "'Ramp' stands twice"),
    (ONE_MASS, "unbalance: {grade: G6.3, source: order}\n", "", "", "unbalance is missing"),
    (ONE_MASS, "{name: Seal, clearance", "{name: Seal, station: 2, clearance", "clearances", "one mass has none"),
    (ONE_MASS, "limit: {amp", "probes: [{name: X, station: 2, angle: 0 deg}]\nlimit: {amp", "probes", "one mass has no probes"),
    (STATIONS, "on: Wheel, clearance", "clearance", "clearances", "no place"),
    (STATIONS, "on: Wheel, amount: 400 g mm", "on: Weel, amount: 400 g mm", "planes", "'Weel'"),
    (STATIONS, "station: 2, angle", "station: 9, angle", "probes", "station 9"),
    (STATIONS, "amount: 400 g mm", "share: 40 %", "planes", "has no amount"),
    (STATIONS, "amount: 12000 g mm, on: Wheel", "amount: 12000 g mm", "sudden unbalance", "no part of the rotor"),
    (STATIONS, "modes: 6", "modes: 0", "modes", "greater than or equal to 1"),
    (STATIONS, "planes: [{on: Wheel, amount: 400 g mm, source: order}]\n", "", "", "planes are missing"),
    (STATIONS, "modes: 6", "unbalance: {grade: G6.3}", "unbalance", "has its unbalance in planes"),
]  # fmt: skip


@pytest.mark.parametrize(("text", "old", "new", "field", "found"), FAULTS)
def test_one_fault_is_one_problem(
    write: Write, text: str, old: str, new: str, field: str, found: str
) -> None:
    assert text.count(old) == 1
    (one,) = problems(write(text.replace(old, new)))
    assert one.field == field
    assert found in one.message
    assert one.line >= 1


def test_both_models_or_none_is_refused(write: Write) -> None:
    (one,) = problems(write("passages: [{name: Record, table: record.csv}]\n"))
    assert "none of rotor, stations" in one.message
    stations = STATIONS.partition("planes:")[0]
    (one,) = problems(write(ONE_MASS + stations))
    assert "rotor and stations are given together" in one.message


@pytest.mark.parametrize(
    ("name", "old", "new", "found"),
    [
        ("record", "12,800", "10,800", "time repeats"),
        ("record", "12,800", "9,800", "time is below"),
        ("record", "800\n12,800", "-800\n12,800", "not at least zero"),
        ("motor", "2500,140", "0,140", "speed repeats"),
        ("motor", "torque [N m]", "torque [lb ft]", "not that of a torque"),
        ("motor", "torque [N m]", "force [N]", "'force [N]' is not known"),
    ],
)
def test_rows_that_cannot_be_used_are_placed(
    write: Write, name: str, old: str, new: str, found: str
) -> None:
    changed = TABLES[f"{name}.csv"].replace(old, new)
    assert changed != TABLES[f"{name}.csv"]
    (one,) = problems(write(ONE_MASS, **{name: changed}))
    assert one.file.endswith(f"{name}.csv")
    assert found in one.message


def test_a_table_whose_speed_never_changes_is_no_passage(write: Write) -> None:
    (one,) = problems(write(ONE_MASS, record="time [s],speed [rpm]\n0,800\n5,800\n"))
    assert (one.field, one.message) == ("passages[2].table", "the speed of the table never changes")


def test_a_drag_that_is_not_above_zero_never_slows_the_shaft(write: Write) -> None:
    (one,) = problems(write(ONE_MASS, load="speed [rpm],torque [N m]\n0,2\n3500,-40\n"))
    assert "never slows" in one.message
