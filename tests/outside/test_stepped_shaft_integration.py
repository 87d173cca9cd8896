"""Static deflection of a stepped, conical shaft against direct numerical integration.

Source: moment-area / unit-load method of any strength-of-materials text, evaluated by
scipy.integrate.quad: v(z) = ∫ M m_z /EI ds + ∫ V v_z /(κGA) ds with the unit-load moment
m_z and shear v_z. Shear coefficient of the solid circle by Cowper (1966).

Obtained: computed by a general-purpose library.
"""

from __future__ import annotations

import itertools

import numpy as np
import pytest
from scipy.integrate import quad

from reportgen.rotor.stations import (
    Bearing,
    Constant,
    Disc,
    Material,
    Rotor,
    Section,
    assemble,
    mass_properties,
    static_deflection,
)

STEEL = Material(7850.0, 2.06e11, 0.3)
LENGTHS = [0.25, 0.35, 0.2, 0.2]
LEFT = [0.05, 0.08, 0.08, 0.04]
RIGHT = [0.05, 0.08, 0.05, 0.04]
ENDS = np.concatenate([[0], np.cumsum(LENGTHS)])
DISC, G = 30.0, 9.81
SPAN = ENDS[-1]


def diameter(z: float) -> float:
    i = min(int(np.searchsorted(ENDS, z, side="right")) - 1, 3)
    return LEFT[i] + (RIGHT[i] - LEFT[i]) * (z - ENDS[i]) / LENGTHS[i]


def area(z: float) -> float:
    return np.pi / 4 * diameter(z) ** 2


def over(f, a: float, b: float) -> float:  # type: ignore[no-untyped-def]
    cuts = [a, *(float(p) for p in ENDS if a < p < b), b]
    return sum(quad(f, p, q, epsabs=0, epsrel=1e-11)[0] for p, q in itertools.pairwise(cuts))


def weight_load(z: float) -> float:
    return 7850 * G * area(z)


WEIGHT = over(weight_load, 0, SPAN)
MOMENT_OF_WEIGHT = over(lambda z: weight_load(z) * z, 0, SPAN)
RIGHT_LOAD = (MOMENT_OF_WEIGHT + DISC * G * ENDS[2]) / SPAN
LEFT_LOAD = WEIGHT + DISC * G - RIGHT_LOAD


def shear(z: float) -> float:
    return LEFT_LOAD - over(weight_load, 0, z) - (DISC * G if z > ENDS[2] else 0)


def moment(z: float) -> float:
    hung = over(lambda s: weight_load(s) * (z - s), 0, z) if z else 0.0
    return LEFT_LOAD * z - hung - (DISC * G * (z - ENDS[2]) if z > ENDS[2] else 0)


def sag(at: float) -> float:
    kappa = 6 * 1.3 / (7 + 6 * 0.3)

    def strain(z: float) -> float:
        unit_shear = (SPAN - at) / SPAN - (1 if z > at else 0)
        unit = z * (SPAN - at) / SPAN - max(z - at, 0)
        bending = 2.06e11 * np.pi / 64 * diameter(z) ** 4
        stiff = kappa * STEEL.shear * area(z)
        return moment(z) * unit / bending + shear(z) * unit_shear / stiff

    points = [*ENDS]
    total = 0.0
    for a, b in itertools.pairwise(points):
        x, w = np.polynomial.legendre.leggauss(20)
        total += sum(w * [strain((a + b) / 2 + (b - a) / 2 * t) for t in x]) * (b - a) / 2
    return total


@pytest.fixture(scope="module")
def rotor() -> Rotor:
    return Rotor(
        tuple(
            Section(length, left, STEEL, outer_right=right)
            for length, left, right in zip(LENGTHS, LEFT, RIGHT, strict=True)
        ),
        discs=(Disc(2, DISC, 0.1, 0.06),),
        bearings=(Bearing(0, Constant(1e8)), Bearing(4, Constant(1e8))),
    )


def test_deflection_is_exact_at_stations_however_few(rotor: Rotor) -> None:
    state = static_deflection(assemble(rotor), gravity=G)
    expected = [-sag(float(z)) for z in ENDS[1:-1]]
    assert state.deflection[1:-1] == pytest.approx(expected, rel=1e-8)


def test_bearing_loads_and_moment(rotor: Rotor) -> None:
    state = static_deflection(assemble(rotor), gravity=G)
    assert state.bearing_loads == pytest.approx([LEFT_LOAD, RIGHT_LOAD], rel=1e-10)
    assert state.moment[1, 1] == pytest.approx(moment(float(ENDS[2])), rel=1e-9)
    assert state.equilibrium < 1e-10


def test_weight_is_that_of_the_drawn_volume(rotor: Rotor) -> None:
    mass = mass_properties(assemble(rotor))
    assert mass.mass * G == pytest.approx(WEIGHT + DISC * G, rel=1e-10)
    assert mass.centre == pytest.approx(
        (MOMENT_OF_WEIGHT + DISC * G * ENDS[2]) / (WEIGHT + DISC * G), rel=1e-10
    )
