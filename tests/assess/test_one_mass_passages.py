"""Passages of the one-mass report: which rotors they cover, and what holds them a second time."""

from __future__ import annotations

from pathlib import Path

import pytest

from reportgen.assess.one_mass import OneMassAssessment, assess
from reportgen.case import read_case

CASE = """\
reportgen: 1
template: one-mass-whirl
document: {{number: CAL-0001, title: Whirl of an invented rotor, revision: A, status: for review,
  date: 2026-05-04, prepared: {{name: A. Person, role: engineer}}}}
machine: {{name: Invented rotor, orientation: {orientation}}}
units: si
rotor:
  source: drawing 7
  mass: 50 kg
  stiffness: 5e5 N/m
  damping: {{ratio: 0.04}}
{more}
speeds: {{source: data sheet, rated: 1800 rpm}}
unbalance: {{eccentricity: 40 µm, source: order}}
passages:
  - {{name: Start, from: 0 rpm, to: 1800 rpm, acceleration: {acceleration}, source: order}}
criteria: []
"""


@pytest.fixture
def passing(tmp_path: Path) -> object:
    def make(
        more: str = "", acceleration: str = "300 rpm/s", orientation: str = "horizontal"
    ) -> OneMassAssessment:
        path = tmp_path / "case.yaml"
        path.write_text(
            CASE.format(more=more, acceleration=acceleration, orientation=orientation),
            encoding="utf-8",
        )
        return assess(read_case(path))  # type: ignore[arg-type]

    return make


@pytest.mark.parametrize(
    "more",
    [
        "",
        "  bow: {amount: 20 µm, angle: 60 deg}",
        "  internal damping: 30 N s/m",
        "  support: {stiffness: 4e6 N/m, damping: 9 kN s/m, mass: 6 kg}",
        "  support: {stiffness: 4e6 N/m, damping: 9 kN s/m}",
    ],
    ids=["plain", "bow", "internal damping", "support", "massless support"],
)
def test_every_kind_of_rotor_has_a_passage_that_agrees_with_its_second_computation(
    passing: object, more: str
) -> None:
    calc = passing(more)  # type: ignore[operator]
    (one,) = calc.passages
    assert one.peak.crossed
    assert one.second is not None
    assert one.second.agrees(one.peak.amplitude)


def test_the_integrated_passage_tends_to_the_closed_form_as_internal_damping_vanishes(
    passing: object,
) -> None:
    exact = passing()  # type: ignore[operator]
    near = passing("  internal damping: 1e-6 N s/m")  # type: ignore[operator]
    assert exact.passages[0].method != near.passages[0].method
    assert near.passages[0].peak.amplitude == pytest.approx(
        exact.passages[0].peak.amplitude, rel=1e-5
    )
    assert near.passages[0].peak.speed == pytest.approx(exact.passages[0].peak.speed, rel=1e-4)


def test_a_passage_too_long_to_step_whole_is_stepped_around_its_peak(passing: object) -> None:
    (one,) = passing(acceleration="0.2 rpm/s").passages  # type: ignore[operator]
    assert one.time[-1] == pytest.approx(9000.0)
    assert one.second is not None
    assert one.second.agrees(one.peak.amplitude)


def test_a_vertical_shaft_has_no_sag_in_its_clearance(passing: object) -> None:
    (lying,) = passing().passages  # type: ignore[operator]
    (standing,) = passing(orientation="vertical").passages  # type: ignore[operator]
    assert lying.sag == pytest.approx(50 * 9.80665 / 5e5)
    assert standing.sag == 0.0
