"""Spinning uniform Timoshenko shaft on pinned ends, against its dispersion relation.

Source: Eshleman & Eubanks (1969), On the critical speeds of a continuous rotor, J. Eng.
Ind. 91, 1180-1188 (equations of a rotating Timoshenko shaft). With w = W sin kz and
φ = Φ cos kz, k = nπ/L, whirl speed ω and spin Ω:

    κGA k² W − κGA k Φ = ρA ω² W
    −κGA k W + (EI k² + κGA) Φ = ρI ω² Φ − 2ρI Ω ω Φ

whose determinant is a quartic in ω, solved here by numpy.roots.

Obtained: closed form from memory, solved by a general-purpose library.
"""

from __future__ import annotations

import numpy as np
import pytest

from reportgen.rotor.stations import (
    Bearing,
    Constant,
    Material,
    Rotor,
    Section,
    assemble,
    campbell,
    undamped_criticals,
)

L, D, BORE = 0.8, 0.16, 0.08
STEEL = Material(7850.0, 2.06e11, 0.29)
A, INERTIA = np.pi / 4 * (D**2 - BORE**2), np.pi / 64 * (D**4 - BORE**4)
M2 = (BORE / D) ** 2
KAPPA = (
    6 * 1.29 * (1 + M2) ** 2 / ((7 + 6 * 0.29) * (1 + M2) ** 2 + (20 + 12 * 0.29) * M2)
)  # Cowper (1966)
G = 2.06e11 / 2.58
PIN = 1e15  # N/m: adds less than 1e-6 to the results


def whirl_speeds(n: int, spin: float) -> np.ndarray:
    k, s = n * np.pi / L, KAPPA * G * A
    first = np.array([-7850 * A, 0, s * k**2])
    second = np.array([-7850 * INERTIA, 2 * 7850 * INERTIA * spin, 2.06e11 * INERTIA * k**2 + s])
    quartic = np.polymul(first, second)
    quartic[-1] -= (s * k) ** 2
    roots = np.roots(quartic).real
    return roots[np.argsort(np.abs(roots))][:2]  # the bending pair; the other is shear


def rotor(elements: int) -> Rotor:
    return Rotor(
        (Section(L, D, STEEL, inner=BORE, elements=elements),),
        bearings=(Bearing(0, Constant(PIN)), Bearing(1, Constant(PIN))),
    )


@pytest.mark.parametrize("spin", [0.0, 3000.0, 20000.0])
def test_whirl_speeds_of_a_turning_shaft(spin: float) -> None:
    chart = campbell(assemble(rotor(120)), [spin], 4)
    got = np.sort(chart.frequencies[:, 0])
    expected = np.sort(np.abs(np.concatenate([whirl_speeds(n, spin) for n in (1, 2)])))
    # Second order in length over diameter (0.04); see the convergence test below.
    assert got == pytest.approx(expected, rel=6e-5)
    if spin:
        forward = np.sort(chart.frequencies[chart.sense[:, 0] == "forward", 0])
        assert forward == pytest.approx(
            sorted(max(whirl_speeds(n, spin)) for n in (1, 2)), rel=6e-5
        )


@pytest.mark.parametrize("whirl", ["forward", "backward"])
def test_synchronous_criticals_are_where_whirl_and_spin_agree(whirl: str) -> None:
    model = assemble(rotor(120))
    got = undamped_criticals(model, PIN, 2, whirl).speeds  # type: ignore[arg-type]
    for n, speed in enumerate(got, start=1):
        side = whirl_speeds(n, speed)
        omega = max(side) if whirl == "forward" else -min(side)
        assert omega == pytest.approx(speed, rel=6e-5)


def test_error_falls_at_the_elements_order() -> None:
    expected = max(whirl_speeds(1, 5000.0))
    error = []
    for elements in (24, 48, 96):
        chart = campbell(assemble(rotor(elements)), [5000.0], 2)
        error.append(chart.frequencies.max() / expected - 1)
    order = np.log2(np.array(error[:-1]) / np.array(error[1:]))
    # Elements much shorter than the diameter: shear rules, order 2 (order 4 when slender).
    assert order == pytest.approx([2, 2], abs=0.1)
