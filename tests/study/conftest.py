"""Cases that the studies of these tests draw from."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

FAN = """\
reportgen: 1
template: one-mass-whirl
document: {number: CAL-0900, title: Invented fan, revision: A, status: draft, date: 2026-05-04,
           prepared: {name: A. Person}}
machine: {name: Invented fan, orientation: horizontal}
units: si
rotor:
  source: drawing
  mass: {value: 180 kg, tolerance: 5 %}
  stiffness: {value: 4.2e6 N/m, tolerance: 10 %, distribution: normal}
  damping: {ratio: {value: 0.04, tolerance: 0.01}}
  internal damping: {value: 600 N s/m, tolerance: 20 %}
speeds: {source: data sheet, minimum: 1750 rpm, rated: 1780 rpm, maximum continuous: 1790 rpm,
         trip: {value: 1970 rpm, tolerance: 5 rpm}}
unbalance: {amount: {value: 3600 g mm, tolerance: 10 %, source: record}}
criteria:
  - {kind: separation margin, rule: flat, margin: 16 %, source: spec}
  - {kind: separation margin, rule: amplification factor, source: spec}
  - {kind: amplitude at speed, limit: 120 µm, measure: peak-to-peak, at: operating range,
     source: spec}
  - {kind: amplitude at speed, limit: 40 µm, measure: r.m.s., at: rated, source: spec}
  - {kind: balance grade, grade: G6.3, source: spec}
  - {kind: stability, margin: 20 %, source: spec}
  - {kind: project limit, result: ground-force, limit: 250 N, sense: at most, measure: 0-peak,
     source: spec}
  - {kind: project limit, result: amplification-factor, limit: "13", sense: at most, source: spec}
  - {kind: project limit, result: amplitude-trip, limit: 46 µm, sense: at most, source: spec}
"""
PASSAGES = """\
passages:
  - {name: Up, from: 0 rpm, to: 1780 rpm, acceleration: {value: 35 rpm/s, tolerance: 10 %},
     clearance: {value: 1.2 mm, tolerance: 0.1 mm}, runout: {value: 20 µm, tolerance: 5 µm},
     source: data sheet}
  - {name: Down, from: 1780 rpm, to: 600 rpm, acceleration: -9 rpm/s, clearance: 0.7 mm,
     source: data sheet}
"""
STUDY = """\
reportgen: 1
template: tolerance-study
document: {number: CAL-0901, title: Study of an invented fan, revision: A, status: draft,
           date: 2026-05-05, prepared: {name: A. Person}}
machine: {name: Invented fan, orientation: horizontal}
units: si
of: fan.yaml
sampling: {method: sobol, samples: 64, seed: 7}
criteria: [{kind: failing share, limit: 20 %, source: spec}]
"""


@pytest.fixture
def study_case(tmp_path: Path) -> Callable[..., Any]:
    """Read a study of a fan, each text changed by pairs of old and new words."""
    from reportgen.case import read_case

    def read(*changes: tuple[str, str], fan: str = FAN) -> Any:
        study = STUDY
        for old, new in changes:
            assert old in fan + study, old
            fan, study = fan.replace(old, new), study.replace(old, new)
        (tmp_path / "fan.yaml").write_text(fan)
        (tmp_path / "study.yaml").write_text(study)
        return read_case(tmp_path / "study.yaml")

    return read


@pytest.fixture
def rotor_by_stations() -> str:
    """Give a small rotor by stations with tolerances."""
    return (Path(__file__).parent / "rotor-by-stations.yaml").read_text()


@pytest.fixture
def passing_fan() -> str:
    """Give a fan with passages; these have no closed form with internal damping."""
    text = FAN.replace("  internal damping: {value: 600 N s/m, tolerance: 20 %}\n", "")
    text = text.replace("  - {kind: stability, margin: 20 %, source: spec}\n", "")
    share = "  - {kind: passage clearance, share: 75 %, source: spec}\n"
    return text.replace("criteria:\n", PASSAGES + "criteria:\n" + share)
