"""The case of a rotor by stations: places, side tables, the rotor that is made from it."""
# ruff: noqa: E501  (a table reads better with one fault a line)

import json
import math
import shutil
from collections.abc import Callable
from pathlib import Path
from typing import Any

import jsonschema
import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from ruamel.yaml import YAML

from reportgen.case import from_resolved, read_case, schema, side_files
from reportgen.case.to_rotor import to_rotor
from reportgen.errors import InputError, Problem
from reportgen.rotor.stations.model import assemble

LATERAL = """\
reportgen: 1
template: lateral-review
document:
  number: CAL-0002
  title: Lateral review of a test rotor
  revision: A
  status: draft
  date: 2026-03-02
  prepared: {name: N. Body}
machine: {name: Test rotor, orientation: horizontal}
units: si
rotor:
  source: drawing 7
  materials:
    steel: {density: 7850 kg/m^3, modulus: 205 GPa, poisson: 0.29}
  shaft:
    table: shaft.csv
  discs:
    - {name: Wheel, position: 500 mm, mass: 40 kg, polar inertia: 0.8 kg m^2, diametral inertia: 0.45 kg m^2}
  added masses:
    - {name: Locknut, station: 1, mass: 1.5 kg}
  couplings:
    - {name: Coupling, station: 4, mass: 9 kg}
  bearings:
    - name: DE bearing
      station: 2
      table: bearing.csv
      pedestal: {mass: 200 kg, stiffness: {x: 3e8 N/m, y: 6e8 N/m}, damping: 5 kN s/m}
    - name: NDE bearing
      position: 860 mm
      stiffness: {xx: 8e7 N/m, xy: 1e7 N/m, yx: -1e7 N/m, yy: 9e7 N/m}
      damping: 20 kN s/m
  seals:
    - {name: Piston, position: 0.5 m, stiffness: 1e6 N/m, inertia: 3 kg}
  axial loads:
    - {from station: 1, to station: 4, force: -5 kN}
  bow:
    - {station: 1, amount: 0 µm}
    - {on: Wheel, amount: 12 µm, angle: 90 deg}
    - {station: 4, amount: 0 µm}
  stated mass: {value: 96 kg, tolerance: 2 %}
speeds: {source: data sheet, rated: 3000 rpm, maximum continuous: 3150 rpm, trip: 3450 rpm}
probes:
  - {name: DE-X, station: 2, angle: 45 deg, source: drawing 9}
  - {name: DE-Y, position: 180 mm, angle: 135 deg, source: drawing 9}
clearances:
  - {name: Wear ring, on: Wheel, clearance: 0.3 mm, source: drawing 8}
unbalance cases:
  - {name: Static, planes: [{on: Wheel, amount: 250 g mm}], source: order}
  - name: By grade
    source: order
    rule: balance grade
    grade: G2.5
    factor: 2
    planes: [{on: Wheel, share: 60 %}, {station: 1, share: 40 %, angle: 180 deg}]
criteria:
  - {kind: separation margin, rule: amplification factor, source: order}
  - {kind: clearance, share: 75 %, over: operating range, source: order}
  - {kind: logarithmic decrement, minimum: 0.1, cross coupling: 1e6 N/m, on: Wheel, source: order}
"""
SHAFT = """\
# test rotor, left to right
length [mm]; outer diameter [mm]; inner diameter [mm]; outer diameter right [mm]; material; elements
200;60;0;;steel;2
600;90;20;100;steel;
200;60;0;;steel;
"""
BEARING = """\
speed [rpm],kxx [N/m],kxy [N/m],kyx [N/m],kyy [N/m],cxx [kN s/m],cyy [kN s/m]
500,6e7,1e6,-2e6,8e7,60,80
4000,9e7,4e6,-6e6,9.5e7,20,25
"""
Write = Callable[..., Path]


@pytest.fixture
def write(tmp_path: Path) -> Write:
    def write(text: str = LATERAL, shaft: str = SHAFT, bearing: str = BEARING) -> Path:
        (tmp_path / "shaft.csv").write_text(shaft)
        (tmp_path / "bearing.csv").write_text(bearing)
        (tmp_path / "case.yaml").write_text(text)
        return tmp_path / "case.yaml"

    return write


def problems(path: Path) -> list[Problem]:
    with pytest.raises(InputError) as caught:
        read_case(path)
    return caught.value.problems


def test_the_case_comes_back_equal_and_fits_the_schema(write: Write) -> None:
    path = write()
    case = read_case(path)
    assert from_resolved(json.loads(json.dumps(case.resolved(), allow_nan=False))) == case
    plain = json.loads(json.dumps(YAML(typ="safe", pure=True).load(LATERAL), default=str))
    jsonschema.Draft202012Validator(schema()).validate(plain)
    assert side_files(case) == {
        "shaft.csv": SHAFT.encode(),
        "bearing.csv": BEARING.encode(),
    }


def test_titles_say_what_a_given_belongs_to(write: Write) -> None:
    titles = [title for _, title, _, _ in read_case(write()).givens()]
    assert len(titles) == len(set(titles))
    for wanted in (
        "Material steel, density",
        "Wheel, polar inertia",
        "DE bearing, pedestal stiffness x",
        "DE bearing, pedestal damping",
        "NDE bearing, stiffness xy",
        "Piston, inertia",
        "Bow 2, amount",
        "Static, plane 1, amount",
        "Wear ring, clearance",
    ):
        assert wanted in titles


def test_a_side_table_without_source_or_preliminary_is_a_hold(write: Write) -> None:
    assert read_case(write()).holds() == []
    text = LATERAL.replace(
        "      table: bearing.csv", "      table: {file: bearing.csv, status: preliminary}"
    )
    (hold,) = read_case(write(text)).holds()
    assert (hold["kind"], hold["text"]) == (
        "preliminary",
        "DE bearing, table, bearing.csv: preliminary; drawing 7",
    )
    holds = read_case(write(LATERAL.replace("  source: drawing 7\n", ""))).holds()
    assert {
        "id": "H4",
        "kind": "source",
        "text": "Shaft table, shaft.csv: no source stated",
    } in holds


def test_the_rotor_has_its_parts_where_the_case_says(write: Write) -> None:
    case: Any = read_case(write())
    built = to_rotor(case.rotor, also_at=(*case.probes, *case.clearances))
    assert built.ends == pytest.approx((0.0, 0.18, 0.2, 0.5, 0.8, 0.86, 1.0), abs=1e-12)
    rotor = built.rotor
    assert [(d.name, d.station) for d in rotor.discs] == [("Wheel", 3)]
    assert [(b.name, b.station, b.carries_weight) for b in rotor.bearings] == [
        ("DE bearing", 2, True),
        ("NDE bearing", 5, True),
        ("Piston", 3, False),
    ]
    assert rotor.couplings[0].station == 6
    assert rotor.couplings[0].share == 0.5
    assert (rotor.axial_loads[0].station_from, rotor.axial_loads[0].station_to) == (0, 6)
    assert built.station(case.probes[1]) == 1
    assert built.station(case.clearances[0]) == 3
    pedestal = rotor.bearings[0].pedestal
    assert pedestal is not None
    assert pedestal.mass == (200.0, 200.0)
    assert pedestal.stiffness == (3e8, 6e8)
    assert pedestal.damping == (5e3, 5e3)


def test_coefficients_reach_the_mechanics(write: Write) -> None:
    case: Any = read_case(write())
    table, constant, seal = (b.coefficients for b in to_rotor(case.rotor).rotor.bearings)
    at = table.at(np.array([500, 4000]) * math.pi / 30)
    np.testing.assert_allclose(at.stiffness[0, :2, :2], [[6e7, 1e6], [-2e6, 8e7]], rtol=1e-12)
    np.testing.assert_allclose(at.damping[1, :2, :2], [[2e4, 0], [0, 2.5e4]], rtol=1e-12)
    one = constant.at(np.array([100.0]))
    np.testing.assert_allclose(one.stiffness[0, :2, :2], [[8e7, 1e7], [-1e7, 9e7]])
    np.testing.assert_allclose(one.damping[0, :2, :2], [[2e4, 0], [0, 2e4]])
    np.testing.assert_allclose(seal.at(np.array([0.0])).inertia[0, :2, :2], [[3, 0], [0, 3]])


def test_cutting_the_shaft_changes_neither_its_mass_nor_its_shape(write: Write) -> None:
    case: Any = read_case(write())
    whole = math.pi / 4 * 0.06**2 * 0.4
    # frustum, r² + rR + R² over 3, less the bore
    whole += math.pi * 0.6 * ((0.045**2 + 0.045 * 0.05 + 0.05**2) / 3 - 0.01**2)
    parts = 40 + 1.5 + 4.5
    for also in ((), (*case.probes, *case.clearances)):
        model = assemble(to_rotor(case.rotor, also_at=also).rotor)
        rigid = np.zeros((model.stations, 2))
        rigid[:, 0] = 1.0
        mass = float(np.sum(rigid * np.asarray(model.mass.times(rigid))))
        assert mass == pytest.approx(7850 * whole + parts, rel=1e-9)
    sections = to_rotor(case.rotor).rotor.sections
    assert sections[1].outer == pytest.approx(0.09)
    assert sections[1].outer_right == pytest.approx(0.095)
    assert sections[2].outer_right == pytest.approx(0.1)


def test_unbalance_and_bow_reach_the_mechanics(write: Write) -> None:
    case: Any = read_case(write())
    built = to_rotor(case.rotor)
    (one,) = built.unbalance(case.unbalance_cases[0])
    assert (one.station, one.amount, one.angle) == (built.station(case.rotor.discs[0]), 250e-6, 0.0)
    first, second = built.unbalance(case.unbalance_cases[1], total=1e-3)
    assert (first.amount, second.amount) == pytest.approx((0.6e-3, 0.4e-3))
    assert second.angle == pytest.approx(math.pi)
    with pytest.raises(ValueError, match="needs the total"):
        built.unbalance(case.unbalance_cases[1])
    bow = built.bow()
    assert bow is not None
    offsets = np.asarray(bow.offsets)
    np.testing.assert_allclose(offsets[built.station(case.rotor.discs[0])], 12e-6j, atol=1e-20)
    np.testing.assert_allclose(offsets[[0, -1]], 0.0, atol=1e-20)


def test_elements_are_no_longer_than_the_shaft_is_thick_unless_stated(write: Write) -> None:
    case: Any = read_case(write())
    counts = [s.elements for s in to_rotor(case.rotor).rotor.sections]
    lengths = [s.length for s in to_rotor(case.rotor).rotor.sections]
    assert counts[0] == 2  # stated
    for section in to_rotor(case.rotor).rotor.sections[1:]:
        assert section.length / section.elements <= max(section.outers) * (1 + 1e-9)
    assert sum(lengths) == pytest.approx(1.0)


def test_sections_in_the_case_give_the_rotor_of_the_table(write: Write) -> None:
    sections = """\
    sections:
      - {length: 200 mm, outer diameter: 60 mm, material: steel, elements: 2}
      - {length: 600 mm, outer diameter: 90 mm, inner diameter: 20 mm, outer diameter right: 100 mm, material: steel}
      - {length: 0.2 m, outer diameter: 6 cm, material: steel, position: 800 mm}
"""
    table: Any = read_case(write())
    typed: Any = read_case(write(LATERAL.replace("    table: shaft.csv\n", sections)))
    assert to_rotor(typed.rotor).rotor.sections == to_rotor(table.rotor).rotor.sections


IN_CASE = [
    ("position: 500 mm, mass", "position: 1200 mm, mass", "discs", "beyond the end", "1000 mm long"),
    ("name: Locknut, station: 1", "name: Locknut, station: 9", "added masses", "station 9, which does not exist", "1 to 4"),
    ("      station: 2\n", "      station: 9\n", "bearings", "DE bearing sits at station 9", "1 to 4"),
    ("      station: 2\n", "", "bearings[1]", "no place is given", "exactly one of station"),
    ("name: Locknut, station: 1", "name: Locknut, station: 1, position: 0 mm", "added masses[1]", "more than one place", "exactly one"),
    ("name: Locknut", "name: Wheel", "rotor", "two parts are named 'Wheel'", "its own name"),
    ("Piston, position: 0.5 m", "Piston, station: 1.5", "seals[1].station", "'1.5'", "whole number"),
    ("name: Wear ring, on: Wheel", "name: Wear ring, on: Weel", "clearances", "'Weel', which is no part", "Wheel"),
    ("1e6 N/m, on: Wheel", "1e6 N/m, on: Weel", "criteria", "'Weel', which is no part", "Wheel"),
    ("1e6 N/m, on: Wheel", "1e6 N/m", "criteria[3]", "stand apart", "both"),
    ("to station: 4, force", "to station: 7, force", "axial loads", "station 7", "1 to 4"),
    ("from station: 1", "from station: 4", "axial loads[1].to station", "to the left", "rising"),
    ("polar inertia: 0.8", "polar inertia: 0.95", "discs[1].polar inertia", "twice the diametral", "both"),
    ("xx: 8e7 N/m, ", "", "bearings[2].stiffness", "not whole", "xx: and yy:"),
    (", yx: -1e7 N/m", "", "bearings[2].stiffness", "stands alone", "yx"),
    ("xx: 8e7 N/m", "xx: -8e7 N/m", "bearings[2].stiffness", "not above zero", "weight"),
    ("{x: 3e8 N/m, y: 6e8 N/m}", "{x: 3e8 N/m}", "pedestal.stiffness", "not whole", "x: and y:"),
    ("{x: 3e8 N/m, y: 6e8 N/m}", "0 N/m", "pedestal.stiffness", "not above zero", "above zero"),
    ("poisson: 0.29", "poisson: 0.5", "materials.steel.poisson", "not below 0.5", "0.5"),
    (", poisson: 0.29", "", "materials.steel", "neither poisson", "0.29"),
    ("    steel:", "    stel:", "shaft", "'steel', which materials does not have", "stel"),
    ("grade: G2.5\n", "grade:\n", "unbalance cases[2].grade", "empty", "after"),
    ("    rule: balance grade\n", "", "unbalance cases[2]", "grade without its rule", "together"),
    ("{on: Wheel, share: 60 %}", "{on: Wheel, amount: 6 g mm}", "unbalance cases[2].planes", "needs the share alone", "share"),
    ("  - {name: DE-Y", "  - {name: DE-X", "probes", "'DE-X' stands twice", "its own name"),
    ("    table: shaft.csv", "    table: shafts.csv", "shaft.table", "no file 'shafts.csv'", "folder"),
    ("    table: shaft.csv", "    table: ../shaft.csv", "shaft.table", "no plain name", "folder"),
    ("    table: shaft.csv", "    table: /etc/shaft.csv", "shaft.table", "no plain name", "folder"),
    ("    table: shaft.csv", "    table: shaft.txt", "shaft.table", "not end in .csv", "CSV"),
    ("    table: shaft.csv", "    {}", "shaft", "neither sections nor table", "CSV"),
    ("      table: bearing.csv", "      stiffness: 1e8 N/m\n      table: bearing.csv", "bearings[1]", "together", "one of them"),
]  # fmt: skip


@pytest.mark.parametrize(("old", "new", "field", "found", "remedy"), IN_CASE)
def test_one_fault_in_the_case_is_one_problem(
    write: Write, old: str, new: str, field: str, found: str, remedy: str
) -> None:
    assert LATERAL.count(old) == 1
    (one,) = problems(write(LATERAL.replace(old, new)))
    assert one.field.endswith(field)
    assert found in one.message
    assert remedy in f"{one.message}; {one.remedy}"
    line = LATERAL[: LATERAL.index(old)].count("\n") + 1
    assert line - 50 <= one.line <= line + 3


IN_SHAFT = [
    ("600;90", "600;nan", (4, 2, "outer diameter"), "not a finite number"),
    ("600;90", "-600;90", (4, 1, "length"), "-600 is not above zero"),
    ("600;90", "600 mm;90", (4, 1, "length"), "a unit and so has the header"),
    ("600;90", "600,5;90", (4, 1, "length"), "comma"),
    ("600;90", "6e2 0;90", (4, 1, "length"), "more than one number"),
    ("600;90", ";90", (4, 1, "length"), "the cell is empty"),
    ("600;90;20;100;steel;", "600;90;20;100;;", (4, 5, "material"), "the cell is empty"),
    ("600;90;20;100;steel;", "600;90;20;100;steel;1.5", (4, 6, "elements"), "not a whole number"),
    ("600;90;20;100;steel;", "600;90;20;steel;", (4, 0, ""), "5 cells, but the header has 6"),
    ("length [mm]", "lenght [mm]", (2, 1, ""), "'lenght [mm]' is not known"),
    ("length [mm]", "length [kg]", (2, 1, "length"), "not that of a length"),
    ("length [mm];", "length [mm];length [in];", (2, 2, "length"), "stands twice"),
    ("; material", "; elements", (2, 6, "elements"), "stands twice"),
]


@pytest.mark.parametrize(("old", "new", "place", "found"), IN_SHAFT)
def test_a_fault_in_a_side_table_is_placed_by_row_and_column(
    write: Write, old: str, new: str, place: tuple[int, int, str], found: str
) -> None:
    text = SHAFT.replace(old, new)
    assert text != SHAFT
    if "length [in]" in new:
        text = text.replace("\n200;", "\n200;200;").replace("\n600;", "\n600;600;")
    seen = problems(write(shaft=text))
    assert all(one.file.endswith("shaft.csv") for one in seen)
    if new == "; elements":
        seen = [one for one in seen if "twice" in one.message]
    (one,) = seen
    assert (one.line, one.column, one.field) == place
    assert found in one.message


@pytest.mark.parametrize(
    ("bearing", "row", "found"),
    [
        (BEARING.replace("4000,", "500,"), 3, "speed repeats"),
        (BEARING.replace("4000,", "400,"), 3, "speed is below that of the row before"),
        (BEARING.rsplit("\n", 2)[0] + "\n", 1, "1 row of values"),
        (BEARING.splitlines()[0], 1, "0 rows of values"),
        ("", 1, "table is empty"),
        ("# only a remark\n", 1, "table is empty"),
        (BEARING.replace("kyy [N/m]", "mxx [kg]"), 1, "'kyy' is missing"),
        (BEARING.replace("500,6e7", '500,"6e7'), 3, "not CSV"),
        (BEARING + "\n".join(f"{5000 + i},1,1,1,1,1,1" for i in range(6000)), 5002, "more than 5000"),
    ],
)  # fmt: skip
def test_a_coefficient_table_that_cannot_be_used_is_refused(
    write: Write, bearing: str, row: int, found: str
) -> None:
    (one,) = problems(write(bearing=bearing))
    assert one.file.endswith("bearing.csv")
    assert one.line == row
    assert found in one.message
    assert one.remedy


def test_faults_of_case_and_tables_are_shown_together(write: Write) -> None:
    text = LATERAL.replace("mass: 40 kg", "mass: 40")
    found = problems(write(text, SHAFT.replace("600", "x"), BEARING.replace("9e7", "y")))
    assert [Path(one.file).name for one in found] == ["bearing.csv", "case.yaml", "shaft.csv"]


def test_sections_that_overlap_or_leave_a_gap_are_refused(write: Write) -> None:
    shaft = SHAFT.replace("; elements", "; position [mm]").replace("steel;2", "steel;0")
    for place, words in (("150", "section 2 overlaps"), ("250", "section 2 leaves a gap")):
        (one,) = problems(write(shaft=shaft.replace("100;steel;", f"100;steel;{place}")))
        assert words in one.message
        assert "200 mm" in one.message
    assert read_case(write(shaft=shaft.replace("100;steel;", "100;steel;200")))


def test_a_bore_as_wide_as_the_shaft_is_refused_in_a_table(write: Write) -> None:
    (one,) = problems(write(shaft=SHAFT.replace("90;20", "90;90")))
    assert "section 2 of the table: the bore is not below" in one.message


def test_units_in_the_cells_are_read_where_the_header_has_none(write: Write) -> None:
    shaft = "length,outer diameter,material\n200 mm,60 mm,steel\n23.6220472440945 in,9 cm,steel\n0.2 m,60 mm,steel\n"
    case: Any = read_case(write(shaft=shaft))
    assert case.rotor.shaft.table.column("length") == pytest.approx((0.2, 0.6, 0.2))


def test_a_thin_section_beside_a_long_one_is_kept_as_it_is(write: Write) -> None:
    shaft = SHAFT.replace("200;60;0;;steel;2", "0.1;60;0;;steel;\n199.9;60;0;;steel;2")
    case: Any = read_case(
        write(
            LATERAL.replace("station: 4", "station: 5").replace("station: 2", "station: 3"), shaft
        )
    )
    built = to_rotor(case.rotor)
    assert built.ends[1] == pytest.approx(1e-4)
    assert built.rotor.sections[0].length == pytest.approx(1e-4)


def test_a_link_out_of_the_folder_is_not_followed(write: Write, tmp_path: Path) -> None:
    path = write()
    outside = tmp_path.parent / f"{tmp_path.name}-outside.csv"
    shutil.move(tmp_path / "shaft.csv", outside)
    (tmp_path / "shaft.csv").symlink_to(outside)
    (one,) = problems(path)
    assert "leads out of the case's folder" in one.message


def test_a_side_table_in_a_folder_keeps_its_name(write: Write, tmp_path: Path) -> None:
    path = write(LATERAL.replace("table: shaft.csv", "table: tables/shaft.csv"))
    (tmp_path / "tables").mkdir()
    shutil.move(tmp_path / "shaft.csv", tmp_path / "tables" / "shaft.csv")
    assert set(side_files(read_case(path))) == {"tables/shaft.csv", "bearing.csv"}


@settings(
    deadline=None, max_examples=60, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
@given(
    content=st.binary(max_size=120)
    | st.text('0123456789.,;e-+ \n\t"#[]kxyzc rpmNs/m', max_size=200).map(str.encode),
    after_header=st.booleans(),
)
def test_any_bytes_in_a_side_table_are_read_or_explained(
    write: Write, content: bytes, after_header: bool
) -> None:
    path = write()
    header = BEARING.splitlines()[0].encode() + b"\n"
    (path.parent / "bearing.csv").write_bytes(header * after_header + content)
    try:
        case: Any = read_case(path)
    except InputError as error:
        found = error
    else:
        assert len(case.rotor.bearings[0].table) >= 2
        return
    assert all(Path(one.file).name in ("bearing.csv", "case.yaml") for one in found.problems)
    assert all(one.message for one in found.problems)
