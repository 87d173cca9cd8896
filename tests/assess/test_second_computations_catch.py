"""A method that is broken on purpose is caught by its second computation.

Each test spoils one primary method by a factor or a sign, as a wrong formula would, and expects
the assessment to disagree with itself where that method's results are.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from reportgen.assess import lateral, lateral_whirl, one_mass, one_mass_passage
from reportgen.case import read_case

CASES = Path(__file__).resolve().parents[2] / "cases"


def wrong(calc: Any) -> set[str]:
    return {finding.id for finding in calc.disagreements()}


@pytest.fixture
def pump() -> Any:
    return read_case(CASES / "circulating-pump.yaml")


@pytest.fixture
def fan() -> Any:
    return read_case(CASES / "booster-fan.yaml")


@pytest.fixture
def overhung() -> Any:
    return read_case(CASES / "mixing-fan.yaml")


def spoilt(of: Callable[..., Any], how: Callable[[Any], Any]) -> Callable[..., Any]:
    return lambda *args, **kw: how(of(*args, **kw))


def test_sound_methods_agree(pump: Any, fan: Any, overhung: Any) -> None:
    assert wrong(one_mass.assess(pump)) == wrong(one_mass.assess(fan)) == set()
    assert wrong(lateral.assess(overhung)) == set()


@pytest.mark.parametrize(
    ("name", "how", "expected"),
    [
        ("response", lambda z: 1.001 * z, "amplitude-rated"),
        ("resonance_peak", lambda p: replace(p, speed=p.speed * 1.001), "critical-speed"),
        ("resonance_peak", lambda p: replace(p, amplitude=p.amplitude * 2), "amplitude-peak"),
        ("amplification_factor", lambda f: replace(f, factor=f.factor / 2), "amplification-factor"),
        ("internal_damping_onset", lambda s: 1.01 * s, "instability-onset"),
    ],
)
def test_a_spoilt_formula_of_the_one_mass_rotor_is_caught(
    pump: Any, monkeypatch: pytest.MonkeyPatch, name: str, how: Any, expected: str
) -> None:
    monkeypatch.setattr(one_mass.onemass, name, spoilt(getattr(one_mass.onemass, name), how))
    assert expected in wrong(one_mass.assess(pump))


def test_a_spoilt_closed_form_of_the_passage_is_caught(
    fan: Any, monkeypatch: pytest.MonkeyPatch
) -> None:
    peak = one_mass_passage.passage.passage_peak
    spoil = spoilt(peak, lambda p: replace(p, amplitude=1.002 * p.amplitude))
    monkeypatch.setattr(one_mass_passage.passage, "passage_peak", spoil)
    assert {"passage-1-peak", "passage-2-peak"} <= wrong(one_mass.assess(fan))


@pytest.mark.parametrize(
    ("part", "expected"),
    [
        (lambda r: replace(r, forward=1.001 * r.forward), "amplitude-rated"),
        (lambda r: replace(r, backward=-r.backward), "critical-1-amplitude"),
    ],
    ids=["factor on the forward part", "sign of the backward part"],
)
def test_a_spoilt_response_along_the_shaft_is_caught(
    overhung: Any, monkeypatch: pytest.MonkeyPatch, part: Any, expected: str
) -> None:
    of = lateral_whirl.mechanics.unbalance_responses
    monkeypatch.setattr(
        lateral_whirl.mechanics,
        "unbalance_responses",
        spoilt(of, lambda found: [part(response) for response in found]),
    )
    assert expected in wrong(lateral.assess(overhung))


def test_a_spoilt_decrement_is_caught(overhung: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    of = lateral_whirl.mechanics.log_decrement
    monkeypatch.setattr(
        lateral_whirl.mechanics, "log_decrement", spoilt(of, lambda d: np.asarray(d) / (2 * np.pi))
    )
    assert "least-decrement" in wrong(lateral.assess(overhung))
