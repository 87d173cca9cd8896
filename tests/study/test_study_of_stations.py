"""Studies of rotors by stations: each sample against dense solves, damped modes, finer speeds."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from reportgen.assess.lateral_whirl import SPEEDS, Whirl
from reportgen.case import from_resolved
from reportgen.case.to_rotor import to_rotor
from reportgen.rotor import stations as mechanics
from reportgen.study.stations import judge
from reportgen.study.study import run_study


@pytest.fixture
def rotor(study_case: Any, rotor_by_stations: str) -> Any:
    return study_case(fan=rotor_by_stations).of.case


def test_the_amplitude_is_that_of_a_dense_solve(rotor: Any) -> None:
    """Solve the whole matrices at each speed of the range, by numpy's dense solver."""
    whirl = Whirl(rotor, SPEEDS)
    node = whirl.model.node(whirl.built.station(rotor.probes[0]))
    low, high = 2150 * np.pi / 30, 2250 * np.pi / 30
    response = whirl.responses[0]
    largest = 0.0
    for i, speed in enumerate(whirl.row):
        if low <= speed <= high:
            q = mechanics.dense_response(whirl.model, speed, response.load[..., i])
            x, y = q[4 * node], q[4 * node + 2]
            largest = max(largest, 0.5 * abs(x + 1j * y) + 0.5 * abs(x - 1j * y))
    outcome = next(j.outcome for j in judge(rotor) if "amplitude" in j.outcome.title)
    assert outcome.value == pytest.approx(2 * largest, rel=1e-8)  # peak-to-peak


def test_the_critical_speed_is_where_a_forward_mode_is_met(rotor: Any) -> None:
    """A lightly damped peak lies near the crossing of the damped modes with the speed."""
    (critical,) = Whirl(rotor, SPEEDS).criticals()
    model = mechanics.assemble(to_rotor(rotor.rotor, (*rotor.probes, *rotor.clearances)).rotor)
    chart = mechanics.campbell(model, np.linspace(200, 420, 12), 6)
    met = [c.speed for c in mechanics.synchronous_crossings(chart)]
    nearest = min(met, key=lambda speed: abs(speed - critical.speed))
    assert critical.speed == pytest.approx(nearest, rel=0.01)


def test_four_times_as_many_speeds_change_no_margin_by_a_thousandth(rotor: Any) -> None:
    for one, other in zip(judge(rotor), judge(rotor, 4 * SPEEDS), strict=True):
        assert one.outcome.margin == pytest.approx(other.outcome.margin, abs=1e-3)
        assert one.outcome.verdict == other.outcome.verdict


def test_the_decrement_falls_with_the_cross_coupling_to_its_threshold(rotor: Any) -> None:
    """The sweep of the mechanics finds the stiffness at which the decrement passes zero."""
    built = to_rotor(rotor.rotor, (*rotor.probes, *rotor.clearances))
    wheel = built.station(rotor.rotor.discs[0])
    speed = 2250 * np.pi / 30
    sweep = mechanics.cross_coupling_sweep(built.rotor, speed, wheel, [0.0, 1e5])
    outcome = next(j.outcome for j in judge(rotor) if "decrement" in j.outcome.title)
    assert outcome.value == pytest.approx(sweep.decrement[1], rel=1e-6)


def test_a_study_of_stations_holds_together(study_case: Any, rotor_by_stations: str) -> None:
    case = study_case(("samples: 64", "samples: 16"), fan=rotor_by_stations)
    study = run_study(case)
    assert not study.model.at_once
    assert len(study.varied) == 5
    assert study.evaluations == 16 * 7
    assert all(f.agrees for f in study.findings)
    # the share of the clearance depends on it, the decrement does not
    titles = [v.title for v in study.varied]
    ring = next(i for i, title in enumerate(titles) if "Ring" in title)
    by_title = dict(zip(study.titles, study.sensitivities, strict=True))
    found = by_title["Clearance at Ring"]
    assert found.total is not None
    assert found.total[ring] > 0.2
    decrement = by_title["Least logarithmic decrement of the forward modes"]
    assert decrement.total is not None
    assert decrement.total[ring] == 0.0


def test_limits_that_a_study_does_not_judge_are_left_open(
    study_case: Any, rotor_by_stations: str
) -> None:
    more = "  - {kind: shaft stress, limit: 60 MPa, source: spec}\n"
    case = study_case(fan=rotor_by_stations + more)
    outcome = judge(case.of.case)[-1].outcome
    assert outcome.verdict == "not assessed"
    assert "does not judge" in outcome.reason
    assert from_resolved(case.resolved()) == case
