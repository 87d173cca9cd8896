"""Cases of passages, written as a user would write them."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from reportgen.case import read_case

HEAD = """\
reportgen: 1
template: transient-passage
document:
  number: CAL-0007
  title: Passages of a test rotor
  revision: A
  status: draft
  date: 2026-03-02
  prepared: {name: N. Body}
machine: {name: Test rotor, orientation: horizontal}
units: si
speeds: {source: data sheet, rated: 2000 rpm}
"""
ROTOR = """\
rotor:
  source: drawing 7
  mass: 50 kg
  stiffness: 5e5 N/m
  damping: {ratio: 0.04}
unbalance: {eccentricity: 40 µm, source: order}
"""
RAMP = """\
passages:
  - name: Ramp
    ramp: {from: 0 rpm, to: 2000 rpm, acceleration: 200 rpm/s, source: order}
"""
TABLES = {
    "motor.csv": "speed [rpm],torque [N m]\n0,30\n2200,20\n",
    "load.csv": "speed [rpm],torque [N m]\n0,2\n2200,8\n",
    "record.csv": "time [s],speed [rpm]\n0,0\n3,900\n6,1200\n9,2000\n",
}
Assess = Callable[..., Any]


@pytest.fixture
def passages(tmp_path: Path) -> Assess:
    """Read a case of passages from text and side tables, and assess it."""

    def assess(text: str = RAMP, rotor: str = ROTOR, **tables: str) -> Any:
        from reportgen.assess.transient import assess as calculate

        for name, content in {**TABLES, **{f"{k}.csv": v for k, v in tables.items()}}.items():
            (tmp_path / name).write_text(content)
        (tmp_path / "case.yaml").write_text(HEAD + rotor + text)
        return calculate(read_case(tmp_path / "case.yaml"))

    return assess
