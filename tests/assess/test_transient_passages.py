"""Passages of a case as a whole: what is found, what is judged, what is refused."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import pytest

from reportgen.errors import ModelError

Assess = Callable[..., Any]

DRIVE = """\
passages:
  - name: Start
    drive:
      {from: 0 rpm, to: 2000 rpm, torque: motor.csv, load: load.csv, inertia: 0.7 kg m^2, source: m}
"""
HEAVY = """\
rotor:
  source: drawing 7
  mass: 50 kg
  stiffness: 5e5 N/m
  damping: {ratio: 0.02}
unbalance: {eccentricity: 1 mm, source: order}
"""
CLOSE = """\
clearances:
  - {name: Seal, clearance: 1.6 mm, runout: 30 µm, source: drawing}
  - {name: Ring, clearance: 5 mm, source: drawing}
limit: {amplitude: 200 µm, source: order}
"""


def disagreeing(calc: Any) -> list[str]:
    return [finding.title for finding in calc.disagreements()]


@pytest.mark.parametrize(
    "more",
    [
        "",
        "  bow: {amount: 20 µm, angle: 60 deg}\n",
        "  internal damping: 30 N s/m\n",
        "  support: {stiffness: 4e6 N/m, damping: 9 kN s/m, mass: 6 kg}\n",
        "  support: {stiffness: 4e6 N/m, damping: 9 kN s/m}\n",
    ],
    ids=["plain", "bow", "internal damping", "support", "massless support"],
)
def test_every_kind_of_rotor_passes_and_its_second_computations_agree(
    passages: Assess, more: str
) -> None:
    rotor = f"""\
rotor:
  source: drawing 7
  mass: 50 kg
  stiffness: 5e5 N/m
  damping: {{ratio: 0.04}}
{more}unbalance: {{eccentricity: 40 µm, source: order}}
"""
    calc = passages(
        """\
limit: {amplitude: 200 µm, source: order}
passages:
  - name: Ramp
    ramp: {from: 0 rpm, to: 2000 rpm, acceleration: 200 rpm/s, hold: 1 s, source: order}
  - {name: Record, table: {file: record.csv, source: record}}
  - name: Start
    drive:
      {from: 0 rpm, to: 2000 rpm, torque: motor.csv, load: load.csv, inertia: 0.7 kg m^2, source: m}
  - name: Stop
    coast down: {from: 2000 rpm, to: 100 rpm, torque: motor.csv, inertia: 2 kg m^2, source: m}
""",
        rotor,
    )
    assert disagreeing(calc) == []
    assert [run.crossed for run in calc.runs] == [True] * 4
    for number, run in enumerate(calc.runs, 1):
        assert calc[f"passage-{number}-peak"].second is not None
        assert calc[f"passage-{number}-time-above"].second is not None
        assert run.waterfall is not None
        assert run.orbit.size > 100


def test_a_passage_up_peaks_above_the_critical_speed_and_one_down_below(passages: Assess) -> None:
    calc = passages("""\
passages:
  - name: Up
    ramp: {from: 0 rpm, to: 2000 rpm, acceleration: 200 rpm/s, source: order}
  - name: Down
    ramp: {from: 2000 rpm, to: 0 rpm, acceleration: -200 rpm/s, source: order}
""")
    critical = calc["critical-speed"].value
    assert calc["passage-1-peak-speed"].value > critical > calc["passage-2-peak-speed"].value
    steady = calc["steady-peak"].value
    assert calc["passage-1-peak"].value < steady


def test_a_programme_that_never_reaches_the_critical_has_no_peak_of_a_passage(
    passages: Assess,
) -> None:
    calc = passages(
        CLOSE
        + """\
passages:
  - name: Slow roll
    ramp: {from: 0 rpm, to: 700 rpm, acceleration: 100 rpm/s, source: order}
criteria:
  - {kind: passage clearance, share: 75 %, source: order}
"""
    )
    peak = calc["passage-1-peak"]
    assert peak.value is None
    assert "no passage" in peak.note
    assert "r/min" in peak.note
    assert calc["passage-1-largest"].value > 0
    assert "not of a passage" in calc["passage-1-largest"].title
    assert {j.outcome.verdict for j in calc.judged} == {"not assessed"}


def test_a_stall_is_named_with_its_speed_and_the_torque_it_would_take(passages: Assess) -> None:
    calc = passages(
        CLOSE + DRIVE + "criteria:\n"
        "  - {kind: drive margin, margin: 10 %, source: order}\n"
        "  - {kind: time above limit, limit: 1000 s, source: order}\n"
        "  - {kind: passage clearance, share: 75 %, source: order}\n",
        HEAVY,
        motor="speed [rpm],torque [N m]\n0,12\n2200,11\n",
    )
    run = calc.runs[0]
    assert run.stalled
    assert not run.crossed
    assert "stalled at the critical speed" in run.reason
    assert calc["passage-1-peak"].value is None
    hang = calc["passage-1-hang-speed"]
    assert hang.value == pytest.approx(run.critical, rel=0.05)
    # the balance of torques there, from the whirl's own dissipation: c·ω·|z|²
    side = calc.facts
    whirl = side.rotor.damping * hang.value * run.hang_state.amplitude**2
    rows = 12 - 1 / (2200 * math.pi / 30) * hang.value, 2 + 6 / (2200 * math.pi / 30) * hang.value
    assert rows[0] - rows[1] == pytest.approx(whirl, rel=1e-3)
    assert calc["passage-1-least-torque"].value > 1
    verdicts = {j.outcome.title: (j.outcome.verdict, j.outcome.reason) for j in calc.judged}
    assert all(verdict == "does not meet" for verdict, _ in verdicts.values() if "Ring" not in _)
    drive = verdicts["Drive torque above the least that passes, Start"]
    assert drive == ("does not meet", "with the drive as stated the rotor stalls")
    time = verdicts["Time above the limit of amplitude, longest during Start"]
    assert "as long as the drive is on" in time[1]
    assert disagreeing(calc) == []


def test_contact_adds_peak_sag_and_runout_and_voids_the_result(passages: Assess) -> None:
    calc = passages(
        CLOSE
        + """\
passages:
  - name: Ramp
    ramp: {from: 0 rpm, to: 2000 rpm, acceleration: 200 rpm/s, source: order}
criteria:
  - {kind: passage clearance, share: 75 %, source: order}
""",
        HEAVY,
    )
    seal, ring = calc.runs[0].contacts
    sag = 50 * 9.80665 / 5e5
    assert seal.used == pytest.approx(calc["passage-1-peak"].value + sag + 30e-6)
    assert ring.used == pytest.approx(calc["passage-1-peak"].value + sag)
    assert seal.touches
    assert "void" in calc.judged[0].outcome.reason
    assert calc.judged[0].outcome.verdict == "does not meet"


def test_the_least_acceleration_just_keeps_within_the_closest_clearance(passages: Assess) -> None:
    text = """\
clearances: [{name: Seal, clearance: 1.35 mm, source: drawing}]
passages:
  - name: Ramp
    ramp: {from: 0 rpm, to: 2500 rpm, acceleration: 200 rpm/s, hold: 1 s, source: order}
"""
    calc = passages(text)
    found = calc["passage-1-least-acceleration"].value * 30 / math.pi
    again = passages(text.replace("200 rpm/s", f"{found:.8g} rpm/s"))
    contact = again.runs[0].contacts[0]
    # the second computation, not the closed form that the acceleration came from
    peak = again["passage-1-peak"].second.value
    assert peak + contact.sag == pytest.approx(1.35e-3, rel=1e-4)


def test_a_drive_that_crosses_its_load_below_the_critical_is_refused(passages: Assess) -> None:
    with pytest.raises(ModelError, match=r"'Start'.*does not exceed the load.* r/min, below the"):
        passages(DRIVE, motor="speed [rpm],torque [N m]\n0,30\n700,3\n2200,2\n")


def test_a_run_of_hours_is_refused_with_what_to_change(passages: Assess) -> None:
    slow = DRIVE.replace("0.7 kg m^2", "20000 kg m^2")
    with pytest.raises(ModelError, match=r"about .* minutes; at most 20,000 turns.*End it nearer"):
        passages(slow)


def test_without_drive_or_limit_the_criteria_on_them_are_not_assessed(passages: Assess) -> None:
    calc = passages("""\
passages:
  - name: Ramp
    ramp: {from: 0 rpm, to: 2000 rpm, acceleration: 200 rpm/s, source: order}
criteria:
  - {kind: drive margin, margin: 10 %, source: order}
  - {kind: time above limit, limit: 2 s, source: order}
  - {kind: passage clearance, share: 75 %, source: order}
""")
    assert [j.outcome.verdict for j in calc.judged] == ["not assessed"] * 3
    assert all(j.outcome.reason for j in calc.judged)


def test_a_project_limit_on_a_result_that_is_not_there_names_those_that_are(
    passages: Assess,
) -> None:
    with pytest.raises(ModelError, match="passage-1-peak"):
        passages("""\
passages:
  - name: Ramp
    ramp: {from: 0 rpm, to: 2000 rpm, acceleration: 200 rpm/s, source: order}
criteria:
  - {kind: project limit, result: peak, limit: 1 mm, sense: at most, source: order}
""")


def test_an_undamped_rotor_is_passed_and_has_no_steady_peak(passages: Assess) -> None:
    calc = passages(
        rotor="""\
rotor: {source: drawing, mass: 50 kg, stiffness: 5e5 N/m, damping: {ratio: 0}}
unbalance: {eccentricity: 40 µm, source: order}
""",
    )
    assert calc.runs[0].crossed
    assert calc["steady-peak"].value is None
    assert disagreeing(calc) == []
