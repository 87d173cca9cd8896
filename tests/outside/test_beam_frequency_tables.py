"""Uniform Euler beam tables.

Source: Blevins (1979), Formulas for Natural Frequency and Mode Shape, table 8-1, λL of
the single-span beam; values from memory, checked here against the frequency equations
(cos λ cosh λ = ±1) solved by a general-purpose root finder.

Obtained: from memory.
"""

from __future__ import annotations

import numpy as np
import pytest
from scipy.optimize import brentq

from reportgen.rotor.stations.coefficients import Constant
from reportgen.rotor.stations.criticals import undamped_criticals
from reportgen.rotor.stations.inputs import Bearing, Material, Rotor, Section
from reportgen.rotor.stations.model import assemble

# So slender that shear and rotary inertia change the result by less than 1e-5.
L, D, E, RHO = 1.0, 1e-3, 2.06e11, 7850.0
UNIT = np.sqrt(E * (np.pi * D**4 / 64) / (RHO * np.pi * D**2 / 4)) / L**2


def speeds(bearings: tuple[Bearing, ...], stiffness: float) -> np.ndarray:
    rotor = Rotor((Section(L, D, Material(RHO, E), elements=30),), bearings=bearings)
    return undamped_criticals(assemble(rotor), stiffness, 3).speeds


def pinned(station: int) -> Bearing:
    return Bearing(station, Constant(1e6))


def test_simply_supported() -> None:
    expected = UNIT * (np.pi * np.arange(1, 4)) ** 2
    assert speeds((pinned(0), pinned(1)), 1e6) == pytest.approx(expected, rel=5e-5)


def test_free_free_leaves_out_two_rigid_body_modes() -> None:
    assert speeds((), 0.0) == pytest.approx(UNIT * np.array([4.7300, 7.8532, 10.9956]) ** 2, 1e-4)


def test_table_values_recalled_are_roots_of_the_frequency_equations() -> None:
    free = [brentq(lambda v: np.cos(v) * np.cosh(v) - 1, b - 0.5, b + 0.5) for b in (4.7, 7.9, 11)]
    held = brentq(lambda v: np.cos(v) * np.cosh(v) + 1, 1.5, 2.2)
    assert [*free, held] == pytest.approx([4.7300, 7.8532, 10.9956, 1.8751], abs=5e-5)


def test_cantilever_held_by_two_supports_close_together() -> None:
    # Two stiff supports 2 mm apart hold position and slope; the free part is 1 m.
    gap = 2e-3
    rotor = Rotor(
        (Section(gap, D, Material(RHO, E)), Section(L, D, Material(RHO, E), elements=30)),
        bearings=(pinned(0), pinned(1)),
    )
    got = undamped_criticals(assemble(rotor), 1e9, 1).speeds
    # The held part yields by a third of its length in slope: a first-order excess length.
    assert got == pytest.approx(UNIT * 1.8751**2 / (1 + gap / 3) ** 2, rel=2e-4)
