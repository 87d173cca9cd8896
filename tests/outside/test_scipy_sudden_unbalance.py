"""Whirl after a sudden unbalance against scipy.signal.lsim, a general-purpose simulator.

Values computed by ``scipy.signal.lsim`` on two real planes with sampled forces.

Obtained: computed by a general-purpose library.
"""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from scipy.signal import lsim

from reportgen.assess.transient_side import OneMassSide
from reportgen.assess.transient_sudden import find_sudden
from reportgen.rotor import onemass

MASS, STIFFNESS, RATIO, SPEED = 80.0, 1.2e6, 0.05, 210.0


class Given:
    """A sudden unbalance as a case states it."""

    name, speed, amount, angle = "Loss", SPEED, 4e-3, math.radians(70)


def test_the_overshoot_is_that_of_a_simulation() -> None:
    rotor = onemass.OneMassRotor(
        mass=MASS, stiffness=STIFFNESS, damping_ratio=RATIO, eccentricity=2e-5
    )
    side = OneMassSide(rotor, None, 0.0, None, (), 1.0, SPEED)
    given: Any = Given
    found = find_sudden(side, given)

    c = 2 * RATIO * math.sqrt(MASS * STIFFNESS)
    time = np.linspace(0.0, 0.6, 60_001)
    force = MASS * 2e-5 + 4e-3 * np.exp(1j * Given.angle)
    turning = SPEED**2 * force * np.exp(1j * SPEED * time)
    before = MASS * 2e-5 * SPEED**2 / (STIFFNESS - MASS * SPEED**2 + 1j * c * SPEED)
    plane = ([[0, 1], [-STIFFNESS / MASS, -c / MASS]], [[0], [1 / MASS]], [[1, 0]], [[0]])
    x = lsim(plane, turning.real, time, [before.real, (1j * SPEED * before).real])[1]
    y = lsim(plane, turning.imag, time, [before.imag, (1j * SPEED * before).imag])[1]
    assert found.peak == pytest.approx(np.hypot(x, y).max(), rel=1e-5)
    assert found.before == pytest.approx(abs(before), rel=1e-9)
