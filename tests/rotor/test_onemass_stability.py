"""Onset of whirl by internal damping against the eigenvalues of the rotor at speed."""

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.errors import ModelError
from reportgen.rotor.onemass import (
    IsotropicSupport,
    OneMassRotor,
    hysteretic_damping_onset,
    internal_damping_onset,
    self_balanced_speed,
)


def growth(rotor, speed):
    """Largest real part of the eigenvalues of the free motion, from its own matrices."""
    own, k, ci = rotor.support, rotor.stiffness, rotor.internal_damping
    shaft = k - 1j * ci * speed
    mass = np.diag([rotor.mass, own.mass])
    damping = np.array([[rotor.damping + ci, -ci], [-ci, own.damping + ci]])
    stiffness = np.array([[shaft, -shaft], [-shaft, own.stiffness + shaft]])
    inverse = np.linalg.inv(mass)
    matrix = np.block([[np.zeros((2, 2)), np.eye(2)], [-inverse @ stiffness, -inverse @ damping]])
    return np.linalg.eigvals(matrix).real.max()


@settings(deadline=None, max_examples=40)
@given(
    zeta=st.floats(0.001, 0.3),
    inner=st.floats(0.01, 1.0),
    k=st.floats(0.3, 10.0),
    c=st.floats(0.0, 2.0),
    m=st.floats(0.05, 2.0),
)
def test_on_flexible_supports_the_whirl_starts_to_grow_at_the_onset(zeta, inner, k, c, m):
    rotor = OneMassRotor(1.0, 1.0, zeta, internal_damping=inner, support=IsotropicSupport(k, c, m))
    onset = internal_damping_onset(rotor)
    assert math.isfinite(onset)
    assert growth(rotor, onset) == pytest.approx(0.0, abs=1e-9)
    assert growth(rotor, 0.999 * onset) < 0.0
    assert growth(rotor, 1.001 * onset) > 0.0
    assert all(growth(rotor, share * onset) < 0.0 for share in (0.1, 0.3, 0.6, 0.9))


def test_stiff_support_gives_the_rigid_onset():
    rotor = OneMassRotor(1.0, 1.0, 0.05, internal_damping=0.02)
    stiff = replace(rotor, support=IsotropicSupport(1e6, 0.0, 0.0))
    assert internal_damping_onset(stiff) == pytest.approx(internal_damping_onset(rotor), rel=1e-5)
    assert internal_damping_onset(rotor) == pytest.approx(6.0)


def test_damped_flexible_support_raises_the_onset():
    rotor = OneMassRotor(1.0, 1.0, 0.0, internal_damping=0.02)
    assert internal_damping_onset(rotor) == pytest.approx(1.0)
    assert internal_damping_onset(replace(rotor, support=IsotropicSupport(2.0, 1.0, 0.1))) > 3.0


def test_without_internal_damping_there_is_no_onset():
    assert internal_damping_onset(OneMassRotor(1.0, 1.0, 0.05)) == math.inf


def test_hysteretic_onset_is_the_critical_speed_or_none():
    rotor = OneMassRotor(1.0, 4.0, 0.05)
    assert hysteretic_damping_onset(rotor, 0.11) == pytest.approx(2.0)
    assert hysteretic_damping_onset(rotor, 0.09) == math.inf
    with pytest.raises(ModelError, match="loss factor"):
        hysteretic_damping_onset(rotor, -0.1)
    with pytest.raises(ModelError, match="rigid supports only"):
        hysteretic_damping_onset(replace(rotor, support=IsotropicSupport(1.0)), 0.1)


def test_self_balance_tells_what_a_slanting_bow_leaves():
    rotor = OneMassRotor(1.0, 1.0, 0.05, 1.0, bow=0.5, bow_angle=2.5)
    found = self_balanced_speed(rotor)
    assert not found.exists
    assert "across" in found.reason
    assert found.speed == pytest.approx(math.sqrt(-0.5 * math.cos(2.5)))
    assert found.residual > 0.0
    beside = self_balanced_speed(replace(rotor, bow_angle=0.5))
    assert beside.speed is None
    assert "add" in beside.reason
    with pytest.raises(ModelError, match="both a bow and an eccentricity"):
        self_balanced_speed(replace(rotor, bow=0.0))
