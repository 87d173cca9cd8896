"""The beam element: rigid motion, symmetry, limits, order of convergence."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.errors import ModelError
from reportgen.rotor.stations.coefficients import Constant
from reportgen.rotor.stations.criticals import undamped_criticals
from reportgen.rotor.stations.element import element_matrices, shear_coefficient
from reportgen.rotor.stations.inputs import Bearing, Disc, Material, Rotor, Section
from reportgen.rotor.stations.model import assemble
from reportgen.rotor.stations.static import mass_properties

STEEL = Material(7850.0, 2.06e11)

diameters = st.floats(0.02, 0.6)


@settings(deadline=None, max_examples=40)
@given(
    st.floats(1e-4, 2.0), diameters, diameters, st.floats(0, 0.9), st.floats(0, 0.9),
)  # fmt: skip
def test_rigid_motion_of_any_cone_costs_no_force_and_weighs_its_volume(
    length: float, left: float, right: float, bore_left: float, bore_right: float
) -> None:
    section = Section(
        length, left, STEEL, inner=bore_left * left, outer_right=right,
        inner_right=bore_right * right,
    )  # fmt: skip
    e = element_matrices([section])
    lift, tilt = np.array([1.0, 0, 1, 0]), np.array([0.0, 1, length, 1])
    scale = np.abs(e.stiffness[0]).max()
    assert np.abs(e.stiffness[0] @ lift).max() < 1e-12 * scale
    assert np.abs(e.stiffness[0] @ tilt).max() < 1e-12 * scale * max(1, length)

    def cone(a: float, b: float) -> float:
        return np.pi * length / 12 * (a * a + a * b + b * b)

    volume = cone(left, right) - cone(bore_left * left, bore_right * right)
    assert lift @ e.mass[0] @ lift == pytest.approx(7850 * volume, rel=1e-10)
    assert np.all(np.linalg.eigvalsh(e.mass[0]) > 0)


def test_mass_diameter_adds_mass_and_no_stiffness() -> None:
    plain = element_matrices([Section(0.2, 0.1, STEEL)])
    sleeve = element_matrices([Section(0.2, 0.1, STEEL, mass_outer=0.2)])
    assert np.array_equal(plain.stiffness, sleeve.stiffness)
    assert sleeve.weight[0] == pytest.approx(4 * plain.weight[0])


def test_thin_ring_has_shear_coefficient_of_about_a_half() -> None:
    kappa = shear_coefficient(np.array([0.0, 0.999]), np.array([0.3, 0.3]))
    assert kappa == pytest.approx([6 * 1.3 / 8.8, 2 * 1.3 / (4 + 3 * 0.3)], rel=1e-3)


def criticals_of_bar(diameter: float, elements: int) -> np.ndarray:
    rotor = Rotor(
        (Section(1.0, diameter, STEEL, outer_right=1.3 * diameter, elements=elements),),
        bearings=(Bearing(0, Constant(1e7)), Bearing(1, Constant(1e7))),
    )
    return undamped_criticals(assemble(rotor), 1e7, 3).speeds


def test_criticals_of_a_slender_cone_converge_with_the_fourth_order() -> None:
    coarse, middle, fine = (criticals_of_bar(0.002, n) for n in (8, 16, 32))
    order = np.log2((coarse - middle) / (middle - fine))
    assert order == pytest.approx([4, 4, 4], abs=0.15)


def test_elements_shorter_than_the_diameter_converge_with_the_second_order() -> None:
    # Shear dominates there; the remaining error is already below 1e-4.
    coarse, middle, fine = (criticals_of_bar(0.1, n) for n in (32, 64, 128))
    order = np.log2((coarse - middle) / (middle - fine))
    assert order == pytest.approx([2, 2, 2], abs=0.15)
    assert np.all(np.abs(fine / middle - 1) < 1e-4)


def test_splitting_a_section_keeps_mass_properties() -> None:
    section = Section(0.7, 0.1, STEEL, inner=0.02, outer_right=0.06, inner_right=0.03)
    whole = Rotor((section,), discs=(Disc(1, 3.0, 0.02, 0.015),))
    a, b = mass_properties(assemble(whole)), mass_properties(assemble(whole.refined(5)))
    for name in ("mass", "centre", "polar_inertia", "diametral_inertia", "shaft_mass"):
        assert getattr(a, name) == pytest.approx(getattr(b, name), rel=1e-9)


@pytest.mark.parametrize(
    ("make", "words"),
    [
        (lambda: Section(0.0, 0.1, STEEL), "length of a section is 0 m"),
        (lambda: Section(0.1, 0.1, STEEL, inner=0.1), "is not below outer"),
        (lambda: Disc(0, 1.0, 0.5, 0.1), "exceeds twice the diametral"),
        (lambda: Rotor(()), "no shaft section"),
        (
            lambda: Rotor((Section(1, 0.1, STEEL),), bearings=(Bearing(2, Constant(1e7), "B"),)),
            "bearing or seal B sits at station 2, but the shaft has stations 0 to 1",
        ),
        (
            lambda: Rotor(
                (Section(1, 0.1, STEEL, position=0.0), Section(1, 0.1, STEEL, position=0.9))
            ),
            "section 2 starts at 0.9 m but the one before ends at 1 m: they overlap",
        ),
    ],
)
def test_bad_parts_are_refused_with_what_was_found(make, words: str) -> None:  # type: ignore[no-untyped-def]
    with pytest.raises(ModelError, match=words):
        make()
