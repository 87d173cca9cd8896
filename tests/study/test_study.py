"""A study judges as the assessment does, and gives the same numbers wherever it is computed."""

from __future__ import annotations

import math
import re
from concurrent.futures import ProcessPoolExecutor
from multiprocessing import get_context
from typing import Any

import numpy as np
import pytest

from reportgen.assess.by_template import assess_case
from reportgen.case import from_resolved
from reportgen.errors import InputError
from reportgen.study import evaluate
from reportgen.study.evaluate import Model, dask_mapper
from reportgen.study.inputs import case_with, values_of, varied_of
from reportgen.study.sampling import design
from reportgen.study.study import run_study, worst_settings

SHAFT = """\
  shaft: {support: simply supported, span: {value: 900 mm, tolerance: 2 mm}, position: 400 mm,
          outer diameter: {value: 95 mm, tolerance: 1 mm}, inner diameter: 20 mm,
          modulus: {value: 205 GPa, tolerance: 2 %}}
"""
STIFF = "  stiffness: {value: 4.2e6 N/m, tolerance: 10 %, distribution: normal}\n"
RATIO = "damping: {ratio: {value: 0.04, tolerance: 0.01}}"
AMOUNT = "amount: {value: 3600 g mm, tolerance: 10 %, source: record}"


def model_and_values(case: Any, samples: int = 8) -> tuple[Model, Any]:
    inner = case.of.case
    varied = varied_of(inner)
    model = Model.of(inner.resolved(), [v.place for v in varied])
    return model, values_of(varied, design("random", samples, len(varied), 3).A)


def assert_as_assessed(case: Any, samples: int = 8) -> None:
    """Hold margins and verdicts of whole arrays against the assessment of each rotor."""
    model, values = model_and_values(case, samples)
    assert model.at_once
    found = model.outcomes(values)
    codes = {1: "meets", 0: "does not meet", -1: "not assessed"}
    for n, row in enumerate(values):
        one = assess_case(from_resolved(case_with(model.resolved, model.places, list(row))))
        for i, judged in enumerate(one.judged):
            outcome = judged.outcome
            assert outcome.verdict == codes[int(found.verdict[i, n])], (outcome.title, row)
            if outcome.margin is None:
                assert math.isnan(found.margin[i, n])
            else:  # a passage is found to one part in a million
                assert found.margin[i, n] == pytest.approx(outcome.margin, rel=1e-9, abs=3e-6)


@pytest.mark.parametrize(
    "changes",
    [
        [],
        [(STIFF, SHAFT)],
        [(STIFF, SHAFT.replace("simply supported", "built in at both ends"))],
        [(STIFF, SHAFT.replace("simply supported", "built in at one end")
          .replace("span: {value: 900 mm, tolerance: 2 mm}, ", ""))],
        [(STIFF, SHAFT.replace("simply supported", "overhung beyond two bearings")
          .replace("position: 400 mm", "overhang: 250 mm"))],
        [(RATIO, "damping: {logarithmic decrement: {value: 0.25, tolerance: 0.05}}")],
        [(RATIO, "damping: {amplification factor: {value: 3, tolerance: 40 %}}")],
        [(RATIO, "damping: {coefficient: {value: 2500 N s/m, tolerance: 50 %}}")],
        [(AMOUNT, "grade: {value: G6.3, tolerance: 10 %}")],
        [(AMOUNT, "eccentricity: {value: 20 µm, tolerance: 20 %}")],
        # the critical speed within and around the range, and between it and the trip speed
        [("4.2e6 N/m", "6.5e6 N/m")],
        [("4.2e6 N/m", "7.3e6 N/m")],
        [("4.2e6 N/m", "9e6 N/m")],
        # damping so high that some rotors have no half-power points
        [("value: 0.04, tolerance: 0.01", "value: 0.5, tolerance: 0.2")],
        [("value: 0.04, tolerance: 0.01", "value: 0.3, tolerance: 0.15")],
    ],
)  # fmt: skip
def test_whole_arrays_are_judged_as_the_assessment_judges_each(
    changes: Any, study_case: Any
) -> None:
    assert_as_assessed(study_case(*changes))


@pytest.mark.parametrize("change", [(), ("to: 1780 rpm", "to: 1420 rpm")])
def test_passages_are_judged_as_the_assessment_judges_each(
    change: Any, study_case: Any, passing_fan: str
) -> None:
    changes = [change] if change else []
    assert_as_assessed(study_case(*changes, fan=passing_fan), samples=8)


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ("  damping: {ratio", "  bow: {amount: {value: 5 µm, tolerance: 10 %}}\n  damping: {ratio"),
        ("  damping: {ratio", "  support: {stiffness: 4e7 N/m}\n  damping: {ratio"),
    ],
)
def test_what_has_no_closed_form_is_judged_one_by_one(old: str, new: str, study_case: Any) -> None:
    case = study_case((old, new))
    model, values = model_and_values(case, 2)
    assert not model.at_once
    found = model.outcomes(values)
    one = from_resolved(case_with(model.resolved, model.places, list(values[1])))
    margins = [j.outcome.margin for j in assess_case(one).judged]
    theirs = [None if math.isnan(m) else float(m) for m in found.margin[:, 1]]
    assert theirs == margins


def test_the_numbers_are_the_same_on_one_core_two_cores_and_a_cluster(
    study_case: Any, passing_fan: str, rotor_by_stations: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Spread the same pieces over processes and over a real Dask cluster on loopback."""
    from distributed import Client, LocalCluster

    monkeypatch.setattr(evaluate, "AT_ONCE", 64)  # several pieces of each kind
    cases = [
        study_case(fan=passing_fan),
        study_case(fan=rotor_by_stations),
    ]
    cases = [(c, *model_and_values(c, n)) for c, n in zip(cases, (256, 16), strict=True)]
    here = [model.outcomes(values) for _, model, values in cases]
    assert [model.at_once for _, model, _ in cases] == [True, False]
    with ProcessPoolExecutor(2, mp_context=get_context("spawn")) as pool:
        two = [model.outcomes(values, pool.map) for _, model, values in cases]
    with (
        LocalCluster(
            n_workers=2, threads_per_worker=1, processes=True, host="127.0.0.1",
            dashboard_address=None, silence_logs=50,
        ) as cluster,
        Client(cluster) as client,
    ):  # fmt: skip
        assert len(client.scheduler_info()["workers"]) == 2
        mapper = dask_mapper(client)
        far = [model.outcomes(values, mapper) for _, model, values in cases]
        monkeypatch.setenv(evaluate.SCHEDULER, client.scheduler.address)
        with evaluate.mapper_from_environment() as chosen:
            named = [cases[0][1].outcomes(cases[0][2], chosen)]
    for found in (two, far, named):
        for one, other in zip(here, found, strict=False):
            assert one.margin.tobytes() == other.margin.tobytes()
            assert one.verdict.tobytes() == other.verdict.tobytes()


def test_a_scheduler_that_is_not_there_is_one_clear_error(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv(evaluate.SCHEDULER, "no address at all")
    with pytest.raises(InputError, match="no scheduler answers"), (
        evaluate.mapper_from_environment()
    ):  # fmt: skip
        pass
    monkeypatch.delenv(evaluate.SCHEDULER)
    with evaluate.mapper_from_environment() as mapper:
        assert mapper is None


def test_a_study_counts_ranks_and_names_the_worst_rotor(study_case: Any) -> None:
    study = run_study(study_case(("samples: 64", "samples: 256")))
    assert study.evaluations == 256 * (len(study.varied) + 2)
    assert study.outcomes.margin.shape == (9, 512)
    for i, share in enumerate(study.shares):
        fails = (study.outcomes.verdict[i] == 0).sum()
        assert (share.failing, share.assessed) == (fails, 512)
        low, high = share.interval  # type: ignore[misc]
        assert low <= share.failing / 512 <= high
    # √(k/m) alone sets the critical speed: only mass and stiffness can drive its margin, and
    # within small tolerances it is linear in both, so that the variances stand as the squares
    found = study.sensitivities[0]
    titles = [v.title for v in study.varied]
    mass, stiff = titles.index("Rotor mass"), titles.index("Rotor stiffness")
    others = [i for i in range(len(titles)) if i not in (mass, stiff)]
    assert np.abs(found.total[others]).max() < 1e-3  # damping moves a peak by ζ²
    normal = 0.7737  # variance of a normal cut at two standard deviations, over theirs
    ratio = (0.05**2 / 3) / (normal * 0.05**2)
    assert found.total[mass] / found.total[stiff] == pytest.approx(ratio, rel=0.15)
    at = study.worst_of()
    assert at is not None
    one = study.worst[at]
    assert one is not None
    assert one.margin == np.nanmin(study.outcomes.margin)
    assert np.array_equal(study.values[one.sample - 1], one.values)
    assert all(f.agrees for f in study.findings)
    assert len([f for f in study.findings if f.second]) >= 20


def test_the_worst_rotors_values_read_back_exactly(study_case: Any) -> None:
    from reportgen.units import parse_quantity

    study = run_study(study_case())
    for value, quantity, text in worst_settings(study, 0).values():
        assert parse_quantity(text, quantity).si == value


def test_the_verdict_on_a_share_needs_the_whole_interval(study_case: Any) -> None:
    case = study_case(("samples: 64", "samples: 256"))
    verdicts = {}
    share = run_study(case).shares[0]
    assert share.interval is not None
    middle = share.failing / share.assessed
    assert 0.02 < middle < 0.98
    for limit in (0.9 * share.interval.low, middle, 1.01 * share.interval.high):
        stated = study_case(("samples: 64", "samples: 256"),
                            ("limit: 20 %", f"limit: {100 * limit:.6f} %"))  # fmt: skip
        verdicts[limit] = run_study(stated).judged[0].outcome.verdict
    assert list(verdicts.values()) == ["does not meet", "not assessed", "meets"]


@pytest.mark.parametrize(
    ("change", "words"),
    [
        (("samples: 64", "samples: 100"), "no power of two"),
        (("of: fan.yaml", "of: nowhere.yaml"), "there is no file"),
        (("of: fan.yaml", "of: ../fan.yaml"), "plain name"),
        (("of: fan.yaml", "of: case.yaml"), "case that is run"),
        (("mass: {value: 180 kg", "mass: {value: -180 kg"), "rotor.mass"),
        (("method: sobol", "method: halton"), "sobol"),
    ],
)
def test_a_wrong_study_is_told_at_its_place(change: Any, words: str, study_case: Any) -> None:
    with pytest.raises(InputError, match=words):
        study_case(change)


def test_a_case_without_tolerances_or_criteria_cannot_be_studied(
    study_case: Any, passing_fan: str
) -> None:
    exact = re.sub(r", tolerance: [^,}]+", "", passing_fan).replace(", distribution: normal", "")
    with pytest.raises(InputError, match="has a tolerance"):
        study_case(fan=exact)
    with pytest.raises(InputError, match="states no criterion"):
        study_case(fan=passing_fan.partition("criteria:")[0])


def test_a_resolved_study_reads_back(study_case: Any) -> None:
    case = study_case()
    assert from_resolved(case.resolved()) == case
    assert [h["text"] for h in case.holds()] == [h["text"] for h in case.of.case.holds()]
