"""Shaft stiffness: reciprocity, independence of cuts, and refusals."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.errors import ModelError
from reportgen.rotor import beams, damping
from reportgen.rotor.beams_stepped import (
    Bearing,
    Section,
    SteppedShaft,
    bending_moments,
    influence,
    stiffness_at,
)

STEPPED = SteppedShaft(
    [Section(0.3, 2.1e11, 0.06), Section(0.5, 2.1e11, 0.09, 0.03), Section(0.4, 2.0e11, 0.05)],
    [Bearing(0.05, 4e7), Bearing(0.95, 6e7, 1e4)],
)
lengths = st.lists(st.floats(0.05, 0.6), min_size=2, max_size=5)


@settings(deadline=None, max_examples=25)
@given(pieces=lengths)
def test_cuts_in_a_uniform_shaft_change_nothing(pieces):
    total = sum(pieces)
    bearings = [Bearing(0.0), Bearing(total)]
    cut = SteppedShaft([Section(piece, 2e11, 0.05) for piece in pieces], bearings)
    expected = beams.simply_supported(2e11, beams.area_moment(0.05), total, 0.4 * total)
    assert stiffness_at(cut, 0.4 * total) == pytest.approx(expected, rel=1e-11)


def test_a_step_a_hair_from_a_bearing_costs_no_accuracy():
    for gap in (1e-3, 1e-6, 1e-9):
        sections = [Section(0.2 + gap, 2e11, 0.05), Section(1.0 - gap, 2e11, 0.05)]
        near = SteppedShaft(sections, [Bearing(0.2), Bearing(1.2)])
        expected = beams.simply_supported(2e11, beams.area_moment(0.05), 1.0, 0.3)
        assert stiffness_at(near, 0.5) == pytest.approx(expected, rel=1e-12)


def test_three_bearings_share_a_load_as_the_three_moment_equation_says():
    # Two equal spans, load F at the middle of the first: M at the inner bearing = 3FL/32.
    three = SteppedShaft([Section(2.0, 2e11, 0.05)], [Bearing(0.0), Bearing(1.0), Bearing(2.0)])
    moments = bending_moments(three, 100.0, 0.5, [0.5, 1.0])
    assert np.abs(moments) == pytest.approx([100.0 / 4 - 9.375 / 2, 9.375], rel=1e-10)


def test_influence_is_reciprocal_and_positive_definite():
    coefficients = influence(STEPPED, [0.1, 0.4, 0.7, 1.2])
    assert coefficients == pytest.approx(coefficients.T, rel=1e-10)
    assert np.linalg.eigvalsh(coefficients).min() > 0.0
    assert stiffness_at(STEPPED, 0.4) == pytest.approx(1.0 / coefficients[1, 1], rel=1e-12)


@pytest.mark.parametrize(
    ("make", "words"),
    [
        (lambda: SteppedShaft([], [Bearing(0.0), Bearing(1.0)]), "at least one section"),
        (lambda: SteppedShaft(STEPPED.sections, [Bearing(0.0)]), "free to fall or tilt"),
        (lambda: SteppedShaft(STEPPED.sections, [Bearing(0.0), Bearing(2.0)]), "off the shaft"),
        (lambda: SteppedShaft(STEPPED.sections, [Bearing(0.1), Bearing(0.1)]), "same place"),
        (lambda: Section(0.0, 2e11, 0.05), "length"),
        (lambda: Section(1.0, 2e11, 0.05, 0.06), "not below the outer"),
        (lambda: Bearing(-0.1), "position"),
        (lambda: Bearing(0.1, 0.0), "stiffness of a bearing"),
        (lambda: Bearing(0.1, 1e6, -1.0), "tilting"),
        (lambda: stiffness_at(STEPPED, 1.5), "off the shaft"),
        (
            lambda: stiffness_at(SteppedShaft(STEPPED.sections, [Bearing(0.0), Bearing(1.0)]), 1.0),
            "on a rigid bearing",
        ),
        (lambda: beams.simply_supported(2e11, 1e-7, 1.0, 1.0), "not between the bearings"),
        (lambda: beams.simply_supported(2e11, 0.0, 1.0, 0.5), "second moment"),
        (lambda: beams.cantilever(2e11, 1e-7, -1.0), "length"),
        (lambda: beams.overhung(2e11, 1e-7, 1.0, 0.0), "overhang"),
        (lambda: beams.area_moment(0.05, 0.05), "not below the outer"),
        (lambda: beams.bending_stress(math.nan, 0.05), "not finite"),
        (
            lambda: beams.simply_supported_deflection(2e11, 1e-7, 1.0, 0.5, 1.1),
            "between the bearings",
        ),
    ],
)
def test_shafts_out_of_range_are_refused(make, words):
    with pytest.raises(ModelError, match=words):
        make()


@settings(deadline=None, max_examples=40)
@given(zeta=st.floats(0.0, 0.999))
def test_decrement_and_ratio_undo_each_other(zeta):
    delta = damping.decrement_from_ratio(zeta)
    assert damping.ratio_from_decrement(delta) == pytest.approx(zeta, rel=1e-9, abs=1e-300)


@settings(deadline=None, max_examples=25)
@given(zeta=st.floats(1e-3, 0.5), cycles=st.integers(1, 5), count=st.integers(2, 8))
def test_decrement_of_an_exact_decay_is_recovered(zeta, cycles, count):
    delta = damping.decrement_from_ratio(zeta)
    record = 3.0 * np.exp(-delta * cycles * np.arange(count))
    assert damping.decrement_from_amplitudes(record, cycles) == pytest.approx(delta, rel=1e-9)


@pytest.mark.parametrize(
    ("make", "words"),
    [
        (lambda: damping.decrement_from_ratio(1.0), "does not swing"),
        (lambda: damping.ratio_from_decrement(-0.1), "decrement"),
        (lambda: damping.decrement_from_amplitudes([1.0]), "two or more"),
        (lambda: damping.decrement_from_amplitudes([1.0, 0.0]), "greater than 0"),
        (lambda: damping.decrement_from_amplitudes([1.0, 2.0]), "grow"),
        (lambda: damping.decrement_from_amplitudes([2.0, 1.0], cycles=0), "whole number"),
        (lambda: damping.ratio_from_amplification(0.5), "no peak"),
        (lambda: damping.ratio_from_half_power(10.0, 11.0, 12.0), "either side"),
    ],
)
def test_records_that_give_no_damping_are_refused(make, words):
    with pytest.raises(ModelError, match=words):
        make()
