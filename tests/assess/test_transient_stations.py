"""Passages of a case by stations: places, modes, torques, sudden unbalance, what is judged."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from reportgen.assess.transient_stations import turn_peaks
from reportgen.errors import ModelError
from reportgen.rotor import onemass
from reportgen.rotor.transient import TorqueCurve, run_up

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


LIGHT = """\
stations:
  source: drawing 7
  materials: {air: {density: 1 kg/m^3, modulus: 205 GPa, poisson: 0.29}}
  shaft:
    sections:
      - {length: 0.5 m, outer diameter: 40 mm, material: air, elements: 2}
      - {length: 0.5 m, outer diameter: 40 mm, material: air, elements: 2}
  discs: [{name: Wheel, station: 2, mass: 40 kg, polar inertia: 1e-6 kg m^2,
           diametral inertia: 1e-6 kg m^2}]
  bearings:
    - {name: DE, station: 1, stiffness: 1e11 N/m}
    - {name: NDE, station: 3, stiffness: 1e11 N/m}
  seals: [{name: Damper, station: 2, stiffness: 1e-3 N/m, damping: 300 N s/m}]
planes: [{on: Wheel, amount: 20000 g mm, source: order}]
clearances: [{name: Ring, on: Wheel, clearance: 60 mm, source: drawing}]
"""
TORQUE = """\
passages:
  - name: Start
    drive:
      {from: 300 rpm, to: 2200 rpm, torque: motor.csv, load: load.csv, inertia: 0.6 kg m^2,
       source: m}
"""


def test_the_whirl_brakes_the_drive_as_the_coupled_one_mass_has_it(passages: Assess) -> None:
    """Compare with the one mass whose whirl and speed are integrated together."""
    calc = passages(TORQUE, LIGHT)
    run, side = calc.runs[0], calc.facts.side
    sag = side.clearances[0][3]
    one = onemass.OneMassRotor(
        mass=40.0,
        stiffness=40.0 * 9.80665 / sag,
        damping_ratio=300.0 / (2.0 * np.sqrt(40.0 * 40.0 * 9.80665 / sag)),
        eccentricity=5e-4,
    )
    rpm = np.pi / 30
    drive = TorqueCurve([0.0, 2200 * rpm], [30.0, 20.0])
    load = TorqueCurve([0.0, 2200 * rpm], [2.0, 8.0])
    coupled = run_up(one, 0.6, drive, load, 2200 * rpm, 300 * rpm)
    free = run_up(replace(one, eccentricity=1e-6), 0.6, drive, load, 2200 * rpm, 300 * rpm)
    # the whirl costs time, and the rounds find all but a little of it
    cost = coupled.time[-1] - free.time[-1]
    assert cost > 0.02 * free.time[-1]
    assert run.time[-1] - free.time[-1] == pytest.approx(cost, rel=0.05)
    assert run.watched[0].peak == pytest.approx(coupled.peak.amplitude, rel=0.01)
    assert run.audit.dissipated == pytest.approx(coupled.audit.dissipated, rel=0.02)
    assert run.audit.mismatch < 1e-3
    assert calc.disagreements() == []


def test_where_load_and_whirl_leave_nothing_the_report_says_that_it_does_not_know(
    passages: Assess,
) -> None:
    weak = "speed [rpm],torque [N m]\n0,9\n2200,9\n"
    calc = passages(TORQUE + JUDGED, LIGHT.replace("20000 g mm", "80000 g mm"), motor=weak)
    run = calc.runs[0]
    assert "whether the rotor passes is not known" in run.reason
    assert run.audit is None
    assert not run.crossed
    verdicts = {j.outcome.title: j.outcome.verdict for j in calc.judged}
    assert verdicts["Drive torque above the least that passes, Start"] == "not assessed"
