"""The lateral review as a whole: what is found, what is judged, what is refused."""
# ruff: noqa: E501  (a case reads better with one part a line)

from __future__ import annotations

import re
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from reportgen.assess.lateral import assess, judge
from reportgen.case import read_case
from reportgen.errors import InputError, ModelError

Review = Callable[..., Any]

CASE = """\
reportgen: 1
template: lateral-review
document:
  number: CAL-0009
  title: Lateral review of a test rotor
  revision: A
  status: draft
  date: 2026-03-02
  prepared: {name: N. Body}
machine: {name: Test rotor, orientation: horizontal}
units: si
rotor:
  source: drawing 7
  materials: {steel: {density: 7850 kg/m^3, modulus: 205 GPa, poisson: 0.29}}
  shaft:
    sections:
      - {length: 150 mm, outer diameter: 60 mm, material: steel, elements: 2}
      - {length: 450 mm, outer diameter: 80 mm, material: steel, elements: 4}
      - {length: 450 mm, outer diameter: 80 mm, material: steel, elements: 4}
      - {length: 150 mm, outer diameter: 60 mm, material: steel, elements: 2}
  discs:
    - {name: Wheel, station: 3, mass: 60 kg, polar inertia: 1.2 kg m^2, diametral inertia: 0.7 kg m^2}
  bearings:
    - {name: DE, station: 2, stiffness: {xx: 6e7 N/m, yy: 8e7 N/m}, damping: 20 kN s/m}
    - {name: NDE, station: 4, stiffness: {xx: 6e7 N/m, yy: 8e7 N/m}, damping: 20 kN s/m}
speeds: {source: data sheet, minimum: 4200 rpm, rated: 4300 rpm, trip: 4700 rpm}
probes:
  - {name: X, on: DE, angle: 45 deg, source: drawing}
clearances:
  - {name: Ring, on: Wheel, clearance: 0.4 mm, source: drawing}
unbalance cases:
  - {name: By grade, rule: balance grade, grade: G6.3, planes: [{on: Wheel, share: 100 %}], source: order}
  - {name: Stated, planes: [{on: Wheel, amount: 900 g mm}], source: order}
criteria:
  - {kind: separation margin, rule: flat, margin: 20 %, source: order}
  - {kind: clearance, over: up to trip, share: 75 %, source: order}
  - {kind: logarithmic decrement, minimum: 0.1, cross coupling: 1e5 N/m, on: Wheel, source: order}
  - {kind: bearing load, share: 40 %, source: order}
  - {kind: shaft stress, limit: 60 MPa, concentration: 2, source: order}
  - {kind: balance grade, grade: G6.3, source: order}
  - {kind: project limit, result: bearing-force, limit: 2 kN, sense: at most, source: order}
"""


@pytest.fixture
def review(tmp_path: Path) -> Review:
    def make(*changes: tuple[str, str], calculate: Any = assess) -> Any:
        text = CASE
        for old, new in changes:
            assert old in text
            text = text.replace(old, new)
        (tmp_path / "case.yaml").write_text(text, encoding="utf-8")
        return calculate(read_case(tmp_path / "case.yaml"))

    return make


def test_every_result_agrees_with_its_second_computation(review: Review) -> None:
    calc = review()
    assert calc.disagreements() == []
    doubled = [finding.id for finding in calc.findings if finding.second is not None]
    assert {"rotor-mass", "critical-1", "amplitude-rated", "least-decrement"} <= set(doubled)
    assert all(finding.second is not None for finding in calc.findings if finding.headline)


def test_a_short_way_to_the_verdicts_gives_the_same_verdicts(review: Review) -> None:
    whole = review()
    lean = review(("project limit, result: bearing-force, limit: 2 kN, sense: at most",
                   "amplitude at speed, at: rated, limit: 1 mm, measure: 0-peak"),
                  calculate=judge)  # fmt: skip
    for one, other in zip(whole.judged[:-1], lean[:-1], strict=True):
        assert one.outcome.title == other.outcome.title
        assert one.outcome.verdict == other.outcome.verdict
        assert one.outcome.value == pytest.approx(other.outcome.value, rel=1e-12)


def test_every_criterion_of_the_case_is_judged(review: Review) -> None:
    calc = review()
    titles = " ".join(judged.outcome.title for judged in calc.judged)
    for words in ("Separation margin", "Clearance at Ring", "decrement", "against static load, DE",
                  "Bending stress", "Residual unbalance", "rotating bearing force"):  # fmt: skip
        assert words in titles
    assert all(judged.outcome.verdict != "not assessed" for judged in calc.judged)


def test_a_grade_gives_the_total_of_its_unbalance_case(review: Review) -> None:
    """Common practice: U = G·m/Ω, here for the highest running speed."""
    calc = review()
    speed = 4300 * np.pi / 30
    assert calc.whirl.totals[0] == pytest.approx(6.3e-3 * calc.mass.mass / speed)


def test_a_mass_that_is_not_the_drawings_is_a_hold(review: Review) -> None:
    stated = ("  bearings:\n", "  stated mass: {value: 150 kg, tolerance: 2 %}\n  bearings:\n")
    calc = review(stated)
    assert len(calc.open_points) == 1
    assert re.search(r"differs from the drawing's by \d+\.\d+%", calc.open_points[0])
    near = (stated[0], stated[1].replace("150 kg", f"{calc.mass.mass:.1f} kg"))
    assert review(near).open_points == ()


def test_an_upright_rotor_has_no_sag_and_no_static_loads(review: Review) -> None:
    calc = review(("orientation: horizontal", "orientation: vertical"),
                  ("  - {kind: bearing load, share: 40 %, source: order}\n", ""))  # fmt: skip
    assert calc.static is None
    assert all(support.static is None for support in calc.supports)


def test_a_rotor_driven_unstable_is_told_from_a_stable_one(review: Review) -> None:
    driven = "{xx: 6e7 N/m, xy: 4e7 N/m, yx: -4e7 N/m, yy: 6e7 N/m}"
    calc = review(
        ("{xx: 6e7 N/m, yy: 8e7 N/m}", driven), ("damping: 20 kN s/m", "damping: 9 kN s/m")
    )
    assert calc["least-decrement"].value < 0
    verdict = next(j.outcome for j in calc.judged if "decrement" in j.outcome.title)
    assert verdict.verdict == "does not meet"
    assert "unstable" in verdict.reason


def test_halving_the_elements_hardly_moves_the_criticals(review: Review) -> None:
    validity = review().validity
    assert validity.halving < 1e-3
    assert validity.energy < 1e-9
    assert validity.residual < 1e-10


@pytest.mark.parametrize(
    ("change", "error", "words"),
    [
        (("{name: NDE, station: 4", "{name: NDE, station: 9"), InputError, "station"),
        (("on: Wheel, share: 100 %", "on: Weel, share: 100 %"), InputError, "Weel"),
        (("    - {name: NDE, station: 4, stiffness: {xx: 6e7 N/m, yy: 8e7 N/m}, damping: 20 kN s/m}\n",
          ""), (InputError, ModelError), "bearing"),
        (("result: bearing-force", "result: bearing-farce"), ModelError, "bearing-force"),
    ],
    ids=["no such station", "no such part", "one bearing alone", "no such result"],
)  # fmt: skip
def test_what_cannot_be_a_rotor_gets_one_clear_error(
    review: Review, change: tuple[str, str], error: Any, words: str
) -> None:
    with pytest.raises(error, match=words):
        review(change)


def test_a_very_short_section_beside_a_long_one_changes_nothing(review: Review) -> None:
    usual = review(calculate=judge)
    long = "      - {length: 150 mm, outer diameter: 60 mm, material: steel, elements: 2}\n      - {length: 450"
    short = ("      - {length: 149.9 mm, outer diameter: 60 mm, material: steel, elements: 2}\n"
             "      - {length: 0.1 mm, outer diameter: 60 mm, material: steel}\n      - {length: 450")  # fmt: skip
    moved = [(long, short), ("station: 4", "station: 5"), ("Wheel, station: 3", "Wheel, station: 4"),
             ("DE, station: 2", "DE, station: 3")]  # fmt: skip
    for one, other in zip(usual, review(*moved, calculate=judge), strict=True):
        assert one.outcome.verdict == other.outcome.verdict
        assert one.outcome.value == pytest.approx(other.outcome.value, rel=1e-5)
