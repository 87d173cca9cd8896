"""Overhung rotor of 18 elements with published synchronous whirl speeds.

Source: Nelson & McVaugh (1976), The dynamics of rotor-bearing systems using finite
elements, J. Eng. Ind. 98, 593-600: geometry (radii in centimetres), disc, undamped
isotropic bearings of 4.378e7 N/m, and the whirl speeds at spin ratio 1. All from memory;
that six remembered speeds agree with the remembered geometry supports both. The paper's
element has no shear flexibility, so the shear modulus is made very large here. Tolerance
0.7 %: the digits of the radii (three) and the paper's coarse mesh.

Obtained: from memory.
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
    assemble,
    campbell,
    synchronous_crossings,
    undamped_criticals,
)

ENDS = [0, 1.27, 5.08, 7.62, 8.89, 10.16, 10.67, 11.43, 12.70, 13.46, 16.51, 19.05, 22.86,
        26.67, 28.70, 30.48, 31.50, 34.54, 35.50]  # fmt: skip
OUTER = [0.51, 1.02, 0.76, 2.03, 2.03, 3.30, 3.30, 2.54, 2.54, 1.27, 1.27, 1.52, 1.52, 1.27,
         1.27, 3.81, 2.03, 2.03]  # fmt: skip
INNER = {6: 1.52, 7: 1.78, 17: 1.52}
BACKWARD = [15470, 46612, 64752]
FORWARD = [17159, 49983, 96457]
K = 4.378e7


@pytest.fixture(scope="module")
def rotor() -> Rotor:
    metal = Material(7806.0, 2.078e11, shear_modulus=1e17)
    return Rotor(
        tuple(
            Section(length / 100, 2 * radius / 100, metal, inner=2 * INNER.get(i, 0.0) / 100)
            for i, (length, radius) in enumerate(zip(np.diff(ENDS), OUTER, strict=True))
        ),
        discs=(Disc(4, 1.401, 0.002, 0.00136),),
        bearings=(Bearing(10, Constant(K)), Bearing(14, Constant(K))),
    )


def test_published_synchronous_speeds_by_the_direct_eigenproblem(rotor: Rotor) -> None:
    model = assemble(rotor)
    rpm = 30 / np.pi
    backward = undamped_criticals(model, K, 3, "backward").speeds * rpm
    forward = undamped_criticals(model, K, 3, "forward").speeds * rpm
    assert backward == pytest.approx(BACKWARD, rel=7e-3)
    assert forward == pytest.approx(FORWARD, rel=7e-3)


def test_crossings_of_the_campbell_diagram_meet_the_same_speeds(rotor: Rotor) -> None:
    chart = campbell(assemble(rotor), np.linspace(0, 1.1e4, 40), 6)
    crossings = list(synchronous_crossings(chart))
    backward = [c.speed * 30 / np.pi for c in crossings if c.sense == "backward"]
    forward = [c.speed * 30 / np.pi for c in crossings if c.sense == "forward"]
    assert backward[:3] == pytest.approx(BACKWARD, rel=7e-3)
    assert forward[:3] == pytest.approx(FORWARD, rel=7e-3)
