"""Shaft stiffness against handbook beam tables.

Source: Young & Budynas, Roark's Formulas for Stress and Strain, 7th ed., table 8.1 (concentrated
intermediate load); Gere & Timoshenko, Mechanics of Materials, appendix G. Formulas from memory,
evaluated here by hand for a 50 mm steel shaft on 1 m.

Obtained: from memory.
"""

import math

import numpy as np
import pytest

from reportgen.rotor import beams
from reportgen.rotor.beams_stepped import (
    Bearing,
    Section,
    SteppedShaft,
    bending_moments,
    flexibility,
    stiffness_at,
)

E, D, L = 2.0e11, 0.05, 1.0
I = math.pi * D**4 / 64.0  # noqa: E741
HELD = math.inf


def shaft(length, *bearings):
    return SteppedShaft([Section(0.35 * length, E, D), Section(0.65 * length, E, D)], bearings)


def test_section_of_a_round_bar():
    # d = 50 mm: I = 306 796 mm⁴, W = 12 272 mm³ (any steel tables).
    assert beams.area_moment(0.05) == pytest.approx(306796e-12, rel=2e-6)
    assert beams.section_modulus(0.05) == pytest.approx(12272e-9, rel=4e-5)
    # Tube 60 × 5: I = 329 376 mm⁴ = π(60⁴ − 50⁴)/64.
    assert beams.area_moment(0.06, 0.05) == pytest.approx(329376e-12, rel=2e-6)


@pytest.mark.parametrize(
    ("closed", "coefficient"),
    [
        (beams.simply_supported, 48.0),
        (beams.built_in_both_ends, 192.0),
        (beams.built_in_and_supported, 768.0 / 7.0),
    ],
)
def test_stiffness_at_mid_span(closed, coefficient):
    assert closed(E, I, L, L / 2) == pytest.approx(coefficient * E * I / L**3, rel=1e-14)


def test_stiffness_of_cantilever_and_overhang():
    assert beams.cantilever(E, I, L) == pytest.approx(3 * E * I / L**3, rel=1e-14)
    expected = 3 * E * I / (0.25**2 * 1.25)
    assert beams.overhung(E, I, L, 0.25) == pytest.approx(expected, rel=1e-14)


@pytest.mark.parametrize("a", [0.1, 0.37, 0.5, 0.8])
@pytest.mark.parametrize(
    ("tilting", "formula"),
    [
        ((0.0, 0.0), lambda a, b: 3 * E * I * L / (a**2 * b**2)),
        ((HELD, HELD), lambda a, b: 3 * E * I * L**3 / (a**3 * b**3)),
        ((HELD, 0.0), lambda a, b: 12 * E * I * L**3 / (a**3 * b**2 * (3 * L + b))),
    ],
)
def test_shaft_in_pieces_has_the_tabulated_stiffness(a, tilting, formula):
    model = shaft(L, Bearing(0.0, tilting=tilting[0]), Bearing(L, tilting=tilting[1]))
    assert stiffness_at(model, a) == pytest.approx(formula(a, L - a), rel=1e-11)


def test_overhang_flexibility_deflection_and_slope():
    # End of an overhang a beyond a span L: force: θ = Fa(2L + 3a)/6EI; moment: θ = M(L + 3a)/3EI.
    a = 0.3
    expected = np.array(
        [[a**2 * (L + a) / 3, a * (2 * L + 3 * a) / 6], [a * (2 * L + 3 * a) / 6, (L + 3 * a) / 3]]
    ) / (E * I)
    assert beams.overhung_flexibility(E, I, L, a) == pytest.approx(expected, rel=1e-14)
    model = shaft(L + a, Bearing(0.0), Bearing(L))
    assert flexibility(model, L + a) == pytest.approx(expected, rel=1e-11)


def test_springs_at_the_ends_add_to_the_deflection_by_their_share():
    # Load at a: δ = a²b²/(3EIL) + (b/L)²/k₁ + (a/L)²/k₂ (statics).
    a, b, k1, k2 = 0.3, 0.7, 4e6, 9e6
    model = shaft(L, Bearing(0.0, k1), Bearing(L, k2))
    expected = a**2 * b**2 / (3 * E * I * L) + (b / L) ** 2 / k1 + (a / L) ** 2 / k2
    assert 1.0 / stiffness_at(model, a) == pytest.approx(expected, rel=1e-11)


def test_stepped_cantilever_by_moment_area():
    # First half (at the wall) of I₁ = 16·I₂ (double diameter), load at the end:
    # δ = F/(3E)·[L³/I₁ + (L/2)³(1/I₂ − 1/I₁)].
    model = SteppedShaft([Section(0.5, E, 0.1), Section(0.5, E, 0.05)], [Bearing(0, tilting=HELD)])
    i2, i1 = I, 16 * I
    expected = (1.0 / i1 + 0.125 * (1 / i2 - 1 / i1)) / (3 * E)
    assert 1.0 / stiffness_at(model, 1.0) == pytest.approx(expected, rel=1e-11)


def test_bending_moment_under_the_load_and_at_the_bearing():
    span = shaft(L, Bearing(0.0), Bearing(L))
    # Fab/L, and half of that half-way to the bearing.
    moments = np.abs(bending_moments(span, 1000.0, 0.4, [0.2, 0.4, 0.7]))
    assert moments == pytest.approx([120.0, 240.0, 120.0], rel=1e-8)
    assert float(beams.simply_supported_moment(1000.0, L, 0.4)) == pytest.approx(240.0)
    over = shaft(1.3, Bearing(0.0), Bearing(L))
    assert np.abs(bending_moments(over, 500.0, 1.3, [1.0])) == pytest.approx([150.0], rel=1e-8)
    assert float(beams.overhung_moment(500.0, 0.3)) == pytest.approx(150.0)
    # 240 N·m on 50 mm: 240/12.272e-6 = 19.56 MPa.
    assert float(beams.bending_stress(240.0, 0.05)) == pytest.approx(19.557e6, rel=1e-4)


def test_deflection_curve_off_the_load():
    # Mid-span deflection for a load at a ≥ L/2: F b (3L² − 4b²)/(48EI).
    b = 0.3
    found = beams.simply_supported_deflection(E, I, L, L - b, L / 2)
    assert float(found) == pytest.approx(b * (3 * L**2 - 4 * b**2) / (48 * E * I), rel=1e-13)
