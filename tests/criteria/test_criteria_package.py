import subprocess
import sys

import pypandoc
import pytest

import reportgen.criteria as criteria
from reportgen.criteria import SOURCES, cited, project_source
from reportgen.criteria.acceptance import agreement
from reportgen.criteria.peaks import Record


def every_outcome():
    """One outcome of each criterion, as far as they differ in how the limit is told."""
    spec = project_source("Specification 7")
    split = criteria.allocate(1.0, 0.0, 1.0, 0.1)
    harmonic = {"measure": "0-peak", "harmonic": True}
    flat = criteria.FlatMargin(0.2, 0.2, spec, critically_damped=2.5)
    found = agreement(
        Record([1, 2, 3, 4, 5], [0, 1, 2, 1, 0]),
        3.0,
        2.0,
        speed_tolerance=0.05,
        amplification_tolerance=0.2,
        source=spec,
    )
    return [
        *criteria.separation_margins([(50.0, 9.0), (90.0, 2.0)], 70.0, 80.0, flat),
        *criteria.separation_margins(
            [(50.0, 9.0), (75.0, 2.0), (90.0, 9.0)], 70.0, 80.0, criteria.AmplificationMargin()
        ),
        criteria.amplitude_at_speed(
            1e-6, 1e-5, limit_measure="peak-to-peak", source=spec, **harmonic
        ),
        criteria.running_vibration(1e-6, 100.0, **harmonic),
        criteria.balance_grade(1e-6, 2.5e-3, 60.0, 100.0),
        *criteria.balance_grade_in_planes(None, split, 0.0, 1.0),
        criteria.residual_unbalance(1e-6, 60.0, 100.0),
        criteria.clearance_share(1e-6, 1e-3),
        criteria.contact(1e-6, 1e-3),
        criteria.log_decrement(0.2, cross_coupling=1.0),
        criteria.speed_above_threshold(200.0, 100.0, margin=0.2),
        criteria.shaft_vibration(1e-6, 300.0, boundary="A/B", **harmonic),
        criteria.casing_velocity(1e-3, 300.0, group=1, support="rigid", boundary="A/B"),
        criteria.bearing_load(1.0, 1.0, 9.0, source=spec),
        criteria.bearing_load_share(1.0, 9.0, allowed=0.5, source=spec),
        criteria.shaft_stress(1.0, 1.0, 9.0, source=spec),
        criteria.project_limit(
            1.0, 2.0, sense="at most", quantity="force", source=spec, title="Force"
        ),
        found.speed,
        found.amplification,
    ]


def test_every_outcome_says_how_and_from_where():
    for outcome in every_outcome():
        assert outcome.title
        assert outcome.how
        assert outcome.source
        assert outcome.reason or outcome.verdict != "not assessed"
        assert ("edition you hold" in outcome.caution) == (outcome.basis == "from memory")


def test_every_formula_is_read_by_pandoc_without_a_warning():
    formulas = {outcome.how_latex for outcome in every_outcome() if outcome.how_latex}
    assert len(formulas) > 10
    text = "\n\n".join(f"${formula}$" for formula in sorted(formulas))
    html = pypandoc.convert_text(
        text, "html", format="markdown", extra_args=["--mathml", "--fail-if-warnings"]
    )
    assert html.count("<math") == len(formulas)


def test_sources_are_told_apart_and_complete():
    for name, source in SOURCES.items():
        assert source.id == name
        assert source.standard
        assert source.used
        assert source.basis in {"read", "from memory", "common practice"}
        if source.basis == "from memory":
            assert source.clause
            assert source.edition


def test_a_case_may_name_its_source_and_the_rule_keeps_its_caution():
    ours = SOURCES["petroleum-separation"]
    assert cited(ours) == ours
    assert cited(ours, standard="API 617", clause="4.8").basis == "from memory"
    other = cited(ours, standard="Specification 7")
    assert (other.basis, other.clause, other.edition) == ("from memory", "", "")
    assert cited(ours, standard="Specification 7", edition="2024").edition == "2024"


@pytest.mark.parametrize("module", ["numpy", "scipy"])
def test_the_limits_themselves_need_no_arrays(module):
    code = f"import sys, reportgen.criteria; sys.exit({module!r} in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0


def test_what_is_public_is_there():
    assert sorted(criteria.__all__) == list(dict.fromkeys(sorted(criteria.__all__)))
    for name in criteria.__all__:
        assert hasattr(criteria, name)
