"""One mass on a flexible shaft on damped flexible supports.

Source: Kirk & Gunter (1972), The effect of support flexibility and damping on the
synchronous response of a single-mass flexible rotor, J. Eng. Ind. 94, 221-232. Two-degree
system (disc m on shaft stiffness k, support mass m₁, stiffness k₁, damping c₁); response
from its 2×2 equations, formed here and solved by numpy. The massless-support case has a
speed where amplitude does not depend on the damping (fixed point of the two limits).

Obtained: closed form from memory, solved by a general-purpose library.
"""

from __future__ import annotations

import numpy as np
import pytest

from reportgen.rotor.stations import (
    Bearing,
    Constant,
    Disc,
    Material,
    Pedestal,
    Rotor,
    Section,
    Unbalance,
    assemble,
    energy_balance,
    response_peaks,
    unbalance_response,
)

M, SPAN, D = 50.0, 1.0, 0.06
WIRE = Material(1e-4, 2.06e11, shear_modulus=1e17)
K = 48 * 2.06e11 * np.pi * D**4 / 64 / SPAN**3
RIGID = 1e13  # bearing between shaft and pedestal


def rotor(support_mass: float, k1: float, c1: float) -> Rotor:
    """Give a rotor whose two pedestals together make the support of the two-degree system."""
    foot = Pedestal((support_mass / 2,) * 2, (k1 / 2,) * 2, (c1 / 2,) * 2)
    bearing = Constant(RIGID)
    return Rotor(
        (Section(SPAN / 2, D, WIRE), Section(SPAN / 2, D, WIRE)),
        discs=(Disc(1, M, 0.0, 0.0),),
        bearings=(Bearing(0, bearing, "A", foot), Bearing(2, bearing, "B", foot)),
    )


def two_degree(speeds: np.ndarray, u: float, m1: float, k1: float, c1: float) -> np.ndarray:
    out = []
    for w in speeds:
        z = np.array([[K - M * w**2, -K], [-K, K + k1 - m1 * w**2 + 1j * c1 * w]])
        out.append(np.linalg.solve(z, [u * w**2, 0]))
    return np.array(out).T


@pytest.mark.parametrize(("m1", "k1", "c1"), [(0.0, K, 2e4), (20.0, 2 * K, 8e3), (5.0, K / 3, 1e5)])
def test_response_of_disc_and_supports(m1: float, k1: float, c1: float) -> None:
    speeds = np.linspace(20, 900, 150)
    r = unbalance_response(assemble(rotor(m1, k1, c1)), speeds, [Unbalance(1, 1e-3, 0.7)])
    disc, support = two_degree(speeds, 1e-3 * np.exp(0.7j), m1, k1, c1)
    assert np.abs(r.x[1] - disc).max() < 1e-5 * np.abs(disc).max()
    assert np.abs(r.pedestal_forward[0] - support).max() < 1e-5 * np.abs(disc).max()
    assert energy_balance(r).mismatch.max() < 1e-8


def test_amplitude_at_the_fixed_point_does_not_depend_on_damping() -> None:
    # |1/(k_s − mω²)| = |1/(k − mω²)| between both limits: mω² = (k + k_s)/2.
    k1 = K
    series = K * k1 / (K + k1)
    speed = np.sqrt((K + series) / 2 / M)
    expected = 1e-3 * speed**2 / ((K - series) / 2)
    for c1 in (2e3, 2e4, 2e5):
        r = unbalance_response(assemble(rotor(0.0, k1, c1)), [speed], [Unbalance(1, 1e-3)])
        assert r.major[1, 0] == pytest.approx(expected, rel=1e-5)


def test_half_power_amplification_tends_to_one_over_twice_the_damping_ratio() -> None:
    # Stiff supports with little damping: one mode with ζ from the two-degree system.
    m1, k1, c1 = 0.0, 20 * K, 5e4
    z = np.roots(np.polyadd(np.polymul([M, 0, K], [m1, c1, K + k1]), [0, 0, 0, 0, -K * K]))
    lam = z[np.argmax(z.imag)]
    zeta = -lam.real / abs(lam)
    r = unbalance_response(
        assemble(rotor(m1, k1, c1)), np.linspace(200, 800, 241), [Unbalance(1, 1e-3)]
    )
    (peak,) = response_peaks(r, 1, 0.0)
    assert peak.amplification == pytest.approx(1 / (2 * zeta), rel=20 * zeta**2)
    assert peak.speed == pytest.approx(abs(lam), rel=3 * zeta**2)
    assert peak.phase == pytest.approx(-np.pi / 2, abs=3 * zeta)
