"""Rigid rotor on two equal springs: closed form.

Source: any text on rigid rotors (Genta 2005, Dynamics of Rotating Systems, ch. 3):
cylindrical mω² = 2k; conical I_d ω² − I_p Ω ω − 2 k a² = 0, hence critical forward
Ω² = 2ka²/(I_d − I_p), which exists only for I_p < I_d, and backward 2ka²/(I_d + I_p).
Values computed from these formulas.

Obtained: closed form, worked out by hand.
"""

from __future__ import annotations

import numpy as np
import pytest

from reportgen.rotor.stations import (
    Bearing,
    Constant,
    Disc,
    Material,
    Rotor,
    Section,
    Unbalance,
    assemble,
    campbell,
    unbalance_response,
    undamped_criticals,
)

MASS, ARM, K = 40.0, 0.3, 2e6
# Stiff and light: bends by 1e-7 of what the springs give, weighs 1e-7 of the disc.
ROD = Material(1e-5, 1e16)


def rotor(polar: float, diametral: float, damping: float = 0.0) -> Rotor:
    bearing = Constant(K, damping)
    return Rotor(
        (Section(ARM, 0.1, ROD), Section(ARM, 0.1, ROD)),
        discs=(Disc(1, MASS, polar, diametral),),
        bearings=(Bearing(0, bearing), Bearing(2, bearing)),
    )


@pytest.mark.parametrize("spin", [0.0, 200.0, 900.0])
def test_cylindrical_and_conical_whirl(spin: float) -> None:
    polar, diametral = 0.5, 0.9
    chart = campbell(assemble(rotor(polar, diametral)), [spin], 4)
    conical = np.roots([diametral, -polar * spin, -2 * K * ARM**2])
    expected = np.sort([np.sqrt(2 * K / MASS)] * 2 + list(np.abs(conical)))
    assert np.sort(chart.frequencies[:, 0]) == pytest.approx(expected, rel=1e-6)
    assert np.abs(chart.exponents.real).max() < 1e-6 * expected[-1]


def test_critical_speeds_below_the_limit_of_equal_inertias() -> None:
    got = undamped_criticals(assemble(rotor(0.5, 0.9)), K, 2)
    expected = [np.sqrt(2 * K / MASS), np.sqrt(2 * K * ARM**2 / 0.4)]
    assert got.speeds == pytest.approx(sorted(expected), rel=1e-6)
    back = undamped_criticals(assemble(rotor(0.5, 0.9)), K, 2, "backward")
    assert back.speeds[1] == pytest.approx(np.sqrt(2 * K * ARM**2 / 1.4), rel=1e-6)


@pytest.mark.parametrize("ratio", [1.0, 1.5])
def test_a_disc_like_rotor_has_no_forward_conical_critical(ratio: float) -> None:
    got = undamped_criticals(assemble(rotor(0.9 * ratio, 0.9)), K, 4)
    below = got.speeds[got.speeds < 1e5]  # the rod's own modes lie far above
    assert below == pytest.approx([np.sqrt(2 * K / MASS)], rel=1e-6)


def test_static_unbalance_moves_it_like_one_mass() -> None:
    c, u = 3e3, 2e-3
    speeds = np.linspace(5, 1500, 200)
    response = unbalance_response(assemble(rotor(0.5, 0.9, c)), speeds, [Unbalance(1, u)])
    expected = u * speeds**2 / (2 * K - MASS * speeds**2 + 2j * c * speeds)
    # Relative to each value: phase included.
    assert np.abs(response.x[1] / expected - 1).max() < 1e-5
    assert np.abs(response.backward).max() < 1e-9 * np.abs(response.forward).max()
