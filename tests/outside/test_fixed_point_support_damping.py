"""Best support damping against the fixed-point argument.

Source: the argument of Ormondroyd & Den Hartog (1928) for a damped absorber, which Kirk & Gunter
(1972) carry over to rotor supports; worked out here by hand for a massless support and no damping
at the disc. All response curves pass one point whatever the support damping: where the curves for
no damping and for infinite damping cross, r² = (1 + 2κ)/(2(1 + κ)), |Z| = e (1 + 2κ), κ = k_s/k.
The best damping makes that point the peak: c_s ωₙ/k = (1 + κ)√(2κ/(1 + 2κ)).

Obtained: closed form, worked out by hand.
"""

import math
from dataclasses import replace

import numpy as np
import pytest

from reportgen.rotor.onemass import (
    IsotropicSupport,
    OneMassRotor,
    magnification,
    optimum_support_damping,
)


def rotor_on(kappa, damping=1.0):
    return OneMassRotor(5.0, 2e6, 0.0, 1e-5, support=IsotropicSupport(kappa * 2e6, damping))


@pytest.mark.parametrize("kappa", [0.2, 1.0, 4.0])
def test_best_damping_and_least_peak(kappa):
    rotor = rotor_on(kappa)
    best = optimum_support_damping(rotor)
    scaled = best.damping * rotor.natural_frequency / rotor.stiffness
    expected = (1 + kappa) * math.sqrt(2 * kappa / (1 + 2 * kappa))
    assert scaled == pytest.approx(expected, rel=1e-5)
    assert best.amplitude == pytest.approx(1e-5 * (1 + 2 * kappa), rel=1e-9)
    speed = rotor.natural_frequency * math.sqrt((1 + 2 * kappa) / (2 * (1 + kappa)))
    assert best.speed == pytest.approx(speed, rel=1e-5)


@pytest.mark.parametrize("damping", [1.0, 1e3, 1e4, 1e7])
def test_every_curve_passes_the_fixed_point(damping):
    rotor = rotor_on(1.0, damping)
    at = rotor.natural_frequency * math.sqrt(0.75)
    assert float(magnification(rotor, at)) == pytest.approx(3.0, rel=1e-12)


def test_no_other_damping_has_a_lower_peak():
    rotor = replace(rotor_on(1.0), damping_ratio=0.03)
    best = optimum_support_damping(rotor)
    speeds = np.linspace(1.0, 3.0 * rotor.natural_frequency, 20001)
    for factor in (0.8, 0.95, 1.05, 1.25):
        own = IsotropicSupport(2e6, factor * best.damping)
        assert magnification(replace(rotor, support=own), speeds).max() * 1e-5 > best.amplitude
