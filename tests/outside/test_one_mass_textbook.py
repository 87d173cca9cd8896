"""One-mass rotor against textbook closed forms, evaluated by hand.

Source: Den Hartog, J. P., Mechanical Vibrations, 4th ed., rotating unbalance and logarithmic
decrement; Kimball (1924) and Gunter (1966) for the onset of whirl by internal damping; formulas
from memory, numbers worked out beside each.

Obtained: from memory.
"""

import math

import numpy as np
import pytest

from reportgen.rotor import damping
from reportgen.rotor.onemass import (
    OneMassRotor,
    amplification_factor,
    bearing_force,
    internal_damping_onset,
    magnification,
    phase_lag,
    resonance_peak,
    response,
    self_balanced_speed,
    static_sag,
)


def unit(zeta, **more):
    return OneMassRotor(1.0, 1.0, zeta, 1.0, **more)


def test_magnification_and_phase_by_hand():
    # ζ = 0.1: r = 0.5: 0.25/√(0.75² + 0.1²) = 0.330409; r = 1: 5; r = 2: 4/√(9 + 0.16) = 1.321637.
    assert magnification(unit(0.1), [0.5, 1.0, 2.0]) == pytest.approx(
        [0.330409, 5.0, 1.321637], abs=6e-7, rel=0
    )
    # atan(0.1/0.75) = 7.5946°; 90°; 180° − atan(0.4/3) = 172.4054°.
    assert np.degrees(phase_lag(unit(0.1), [0.5, 1.0, 2.0])) == pytest.approx(
        [7.5946, 90.0, 172.4054], abs=6e-5, rel=0
    )


def test_far_above_the_critical_the_mass_centre_settles():
    assert complex(response(unit(0.05), 1e4)) == pytest.approx(-1.0, abs=2e-5)


def test_peak_by_hand():
    # ζ = 0.2: r = 1/√0.92 = 1.042572; 1/(0.4·√0.96) = 2.551552.
    peak = resonance_peak(unit(0.2))
    assert peak.speed == pytest.approx(1.042572, abs=6e-7)
    assert peak.amplitude == pytest.approx(2.551552, abs=6e-7)


def test_half_power_factor_by_hand():
    # r⁴/((1 − x)² + 4ζ²x) = P²/2 in y = 1/x: y² − (2 − 4ζ²)y + 1 − 2/P² = 0, P² = 1/(4ζ²(1 − ζ²)):
    # y = 1 − 2ζ² ± 2ζ√(1 − ζ²)  →  ζ = 0.05: y = 1.094875, 0.895125.
    found = amplification_factor(unit(0.05))
    lower, upper, top = 1 / math.sqrt(1.094875), 1 / math.sqrt(0.895125), 1 / math.sqrt(0.995)
    assert found.lower == pytest.approx(lower, abs=1e-6)
    assert found.upper == pytest.approx(upper, abs=1e-6)
    assert found.factor == pytest.approx(top / (upper - lower), rel=2e-5)


def test_onset_of_internal_damping_whirl():
    # Equal external and internal damping: twice the critical speed.
    rotor = OneMassRotor(2.0, 8e4, 0.05, internal_damping=2 * 0.05 * math.sqrt(8e4 * 2.0))
    assert internal_damping_onset(rotor) == pytest.approx(2 * 200.0, rel=1e-12)


def test_forces_and_sag_by_hand():
    # m = 2 kg, k = 8e4 N/m (ωₙ = 200), ζ = 0.1 (c = 80), e = 10 µm, Ω = 200: |Z| = 50 µm;
    # shaft 4 N; ground 50e-6·√(8e4² + 16e3²) = 4.07922 N; sag 2·9.80665/8e4 = 0.245166 mm.
    rotor = OneMassRotor(2.0, 8e4, 0.1, 1e-5)
    forces = bearing_force(rotor, 200.0)
    assert abs(complex(forces.shaft)) == pytest.approx(4.0, rel=1e-12)
    assert abs(complex(forces.ground)) == pytest.approx(4.07922, abs=6e-6)
    assert static_sag(rotor) == pytest.approx(0.245166e-3, abs=6e-10)


def test_opposite_bow_cancels_unbalance_at_the_self_balanced_speed():
    # Nicholas, Gunter & Allaire (1976): r = √(b/e) for a bow opposite to the unbalance.
    rotor = unit(0.05, bow=0.36, bow_angle=math.pi)
    found = self_balanced_speed(rotor)
    assert found.exists
    assert found.speed == pytest.approx(0.6, rel=1e-12)
    assert found.residual == pytest.approx(0.0, abs=1e-15)


def test_damping_from_records_by_hand():
    # Amplitude halved in one cycle: δ = ln 2 = 0.693147, ζ = 0.693147/√(4π² + 0.480453) = 0.109653.
    delta = damping.decrement_from_amplitudes([4.0, 2.0])
    assert delta == pytest.approx(0.693147, abs=6e-7)
    assert damping.ratio_from_decrement(delta) == pytest.approx(0.10965, abs=1e-5)
    # 100 % to 25 % over four cycles: δ = ln 4/4.
    assert damping.decrement_from_amplitudes([1.0, 0.25], cycles=4) == pytest.approx(
        0.346574, abs=6e-7
    )
    assert damping.ratio_from_amplification(10.0) == pytest.approx(0.05)
    assert damping.ratio_from_half_power(1000.0, 960.0, 1040.0) == pytest.approx(0.04)
