"""A small sound case that tests break in one place at a time."""

from collections.abc import Callable
from pathlib import Path

import pytest

from reportgen.case import Case, read_case
from reportgen.errors import InputError, Problem

SOUND = """\
reportgen: 1
template: one-mass-whirl
document:
  number: CAL-0001
  title: Lateral vibration of a test rotor
  revision: A
  status: draft
  date: 2026-03-02
  prepared: {name: N. Body}
machine: {name: Test rotor, orientation: horizontal}
units: si
rotor:
  mass: {value: 62 kg, source: weight table, tolerance: 2 %}
  stiffness: {value: 1.9e6 N/m, source: beam calculation}
  damping: {ratio: {value: 0.03, source: test}}
speeds:
  source: data sheet
  minimum: 900 rpm
  rated: 1480 rpm
  trip: 1720 rpm
unbalance: {grade: {value: G6.3, source: order}}
passages:
  - {name: Start-up, from: 0 rpm, to: 1480 rpm, acceleration: 25 rpm/s, source: drive}
assumptions:
  - {id: A1, text: Rigid housings, status: confirmed}
criteria:
  - {kind: separation margin, rule: flat, margin: 20 %, source: order}
"""


@pytest.fixture
def sound() -> str:
    return SOUND


@pytest.fixture
def read(tmp_path: Path) -> Callable[[str | bytes], Case]:
    def read(text: str | bytes) -> Case:
        path = tmp_path / "case.yaml"
        path.write_bytes(text.encode() if isinstance(text, str) else text)
        return read_case(path)

    return read


@pytest.fixture
def problems(read: Callable[[str | bytes], Case]) -> Callable[[str | bytes], list[Problem]]:
    def problems(text: str | bytes) -> list[Problem]:
        with pytest.raises(InputError) as caught:
            read(text)
        return caught.value.problems

    return problems
