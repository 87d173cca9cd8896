"""Passages of a case by stations: places, modes, torques, sudden unbalance, what is judged."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

from reportgen.assess.transient_stations import turn_peaks
from reportgen.errors import ModelError

Assess = Callable[..., Any]

ROTOR = """\
stations:
  source: drawing 7
  materials: {steel: {density: 7850 kg/m^3, modulus: 205 GPa, poisson: 0.29}}
  shaft:
    sections:
      - {length: 0.45 m, outer diameter: 42 mm, material: steel, elements: 2}
      - {length: 0.45 m, outer diameter: 42 mm, material: steel, elements: 2}
  discs:
    - {name: Wheel, station: 2, mass: 40 kg, polar inertia: 0.8 kg m^2,
       diametral inertia: 0.45 kg m^2}
  bearings:
    - {name: DE, station: 1, stiffness: 3e7 N/m, damping: 30 kN s/m}
    - {name: NDE, station: 3, stiffness: 3e7 N/m, damping: 30 kN s/m}
planes: [{on: Wheel, amount: 800 g mm, source: order}]
"""
PLACES = """\
probes: [{name: X, on: DE, angle: 0 deg, source: drawing 9}]
clearances:
  - {name: Ring, on: Wheel, clearance: 2.4 mm, runout: 20 µm, source: drawing 8}
limit: {amplitude: 150 µm, source: order}
"""
RAMP = """\
passages:
  - name: Ramp
    ramp: {from: 500 rpm, to: 3000 rpm, acceleration: 300 rpm/s, source: order}
"""
JUDGED = """\
criteria:
  - {kind: passage clearance, share: 75 %, source: order}
  - {kind: time above limit, limit: 5 s, source: order}
  - {kind: drive margin, margin: 20 %, source: order}
  - {kind: separation margin, rule: flat, margin: 5 %, source: order}
  - {kind: amplitude at speed, limit: 60 µm, measure: peak-to-peak, at: rated, source: order}
"""


def test_every_place_is_watched_and_the_peak_is_that_of_the_whole_rotor(passages: Assess) -> None:
    calc = passages(PLACES + RAMP + JUDGED, ROTOR)
    run = calc.runs[0]
    assert [place.name for place in run.watched] == ["probe X", "Ring"]
    assert run.highest.name == "Ring"
    peak = calc["passage-1-clearance-1-peak"]
    assert peak.headline
    assert peak.second is not None
    assert peak.second.difference(peak.value) < 2e-3
    assert calc.disagreements() == []
    contact = run.contacts[0]
    assert contact.sag > 0
    assert contact.used == pytest.approx(peak.value + contact.sag + 20e-6)
    one = calc.facts.reductions[0]
    assert one.missed <= 1e-3
    assert one.changed <= 1e-3
    assert {force.name for force in run.forces} == {"DE", "NDE"}
    assert sum(force.static for force in run.forces) > 40 * 9.8
    verdicts = {j.outcome.title: j.outcome.verdict for j in calc.judged}
    assert verdicts["Drive torque above the least that passes"] == "not assessed"
    assert verdicts["Clearance at Ring, closest during Ramp"] == "meets"


def test_a_run_below_the_critical_is_no_passage(passages: Assess) -> None:
    calc = passages(PLACES + RAMP.replace("3000 rpm", "1000 rpm") + JUDGED, ROTOR)
    assert not calc.runs[0].crossed
    assert calc["passage-1-clearance-1-peak"].value is None
    assert "no passage" in calc["passage-1-clearance-1-peak"].note
    assert calc.judged[0].outcome.verdict == "not assessed"


def test_torques_set_the_speed_and_are_held_against_the_whirl(passages: Assess) -> None:
    text = """\
passages:
  - name: Start
    drive:
      {from: 300 rpm, to: 2200 rpm, torque: motor.csv, load: load.csv, inertia: 2 kg m^2, source: m}
  - name: Stop
    coast down: {from: 2200 rpm, to: 300 rpm, torque: load.csv, inertia: 2 kg m^2, source: m}
"""
    calc = passages(PLACES + text + JUDGED, ROTOR)
    start, stop = calc.runs
    # J dω/dt = T is integrated here the plain way, by a thousand short steps of time
    speed, time = 300 * np.pi / 30, 0.0
    target = 2200 * np.pi / 30
    while speed < target:
        rpm = speed * 30 / np.pi
        net = (30 - rpm * 10 / 2200) - (2 + rpm * 6 / 2200)
        speed, time = speed + net / 2 * 5e-3, time + 5e-3
    assert start.time[-1] == pytest.approx(time, rel=2e-3)
    assert start.drive.quasi_static < 1
    drive = next(j.outcome for j in calc.judged if "Drive torque" in j.outcome.title)
    assert drive.value == pytest.approx(1 / start.drive.quasi_static - 1)
    assert "load and steady whirl" in drive.reason
    assert stop.crossed
    assert stop.watched[1].peak_speed < calc["critical-speed"].value


def test_a_drive_below_its_load_is_refused(passages: Assess) -> None:
    text = """\
passages:
  - name: Start
    drive:
      {from: 0 rpm, to: 2200 rpm, torque: motor.csv, load: load.csv, inertia: 2 kg m^2, source: m}
"""
    with pytest.raises(ModelError, match=r"'Start'.*does not exceed the load"):
        passages(text, ROTOR, motor="speed [rpm],torque [N m]\n0,9\n800,2\n2200,2\n")


def test_a_sudden_unbalance_overshoots_the_steady_whirl_after_it(passages: Assess) -> None:
    text = """\
sudden unbalance:
  {name: Loss, on: Wheel, speed: 2600 rpm, amount: 3000 g mm, angle: 180 deg, source: order}
"""
    found = passages(PLACES + text + RAMP, ROTOR).sudden
    assert found.peak > found.after > found.before
    assert found.second.difference(found.peak) < 1e-2
    assert found.place == "Ring"


def test_the_modes_that_a_case_states_are_kept_and_what_they_miss_is_told(
    passages: Assess,
) -> None:
    calc = passages("modes: 1\n" + PLACES + RAMP, ROTOR)
    kept = calc.facts.reductions[0]
    chosen = passages(PLACES + RAMP, ROTOR).facts.reductions[0]
    assert kept.pairs == 1 < chosen.pairs
    assert kept.missed > chosen.missed > 0


def test_largest_sizes_of_half_turns_are_those_of_a_swept_sine() -> None:
    time = np.linspace(0.0, 4.0, 4001)
    angle = 20.0 * time + 4.0 * time**2
    when, size = turn_peaks(angle, time, (1.0 + 0.1 * time) * np.cos(angle))
    assert np.all(np.diff(when) > 0)
    inner = slice(2, -2)
    assert size[inner] == pytest.approx(1.0 + 0.1 * when[inner], rel=2e-3)
    assert size.size == pytest.approx(angle[-1] / np.pi, abs=2)
