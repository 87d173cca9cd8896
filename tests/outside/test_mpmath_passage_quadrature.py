"""Exact passage from rest against Duhamel's integral by mpmath quadrature.

Source: computed by mpmath (tanh-sinh, 25 digits) from the convolution of the
excitation with the impulse response; the integrand is the equation of motion's own.

Obtained: computed by a general-purpose library.
"""

import mpmath as mp
import numpy as np
import pytest

from reportgen.rotor.onemass import OneMassRotor
from reportgen.rotor.passage import AT_REST, ConstantAcceleration, passage


def duhamel(zeta, w0, a, time, bow):
    with mp.workdps(25):
        zeta, w0, a = (mp.mpf(str(value)) for value in (zeta, w0, a))
        swing = mp.sqrt(1 - zeta**2)

        def integrand(s):
            speed, angle = w0 + a * s, w0 * s + a * s**2 / 2
            impulse = mp.exp(-zeta * (time - s)) * mp.sin(swing * (time - s)) / swing
            return impulse * (speed**2 - 1j * a + bow) * mp.exp(1j * angle)

        return complex(mp.quad(integrand, mp.linspace(0, time, int(time / 2) + 2)))


@pytest.mark.parametrize(
    ("zeta", "w0", "a", "times"),
    [
        (0.0, 0.2, 0.05, (6.0, 25.0)),
        (0.05, 0.0, 0.05, (15.0, 30.0)),
        (0.3, 2.5, -0.08, (12.0, 25.0)),
        (0.02, 0.5, 3.0, (0.4, 4.0)),
    ],
)
def test_passage_from_rest_is_duhamels_integral(zeta, w0, a, times):
    bow = 0.3 - 0.4j
    rotor = OneMassRotor(1.0, 1.0, zeta, 1.0, bow=abs(bow), bow_angle=float(np.angle(bow)))
    programme = ConstantAcceleration(w0, w0 + a * times[-1], a)
    found = passage(rotor, programme, times, AT_REST).displacement
    expected = [duhamel(zeta, w0, a, time, bow) for time in times]
    # A few hundred roundings of amplitudes that reach about 10.
    assert found == pytest.approx(expected, rel=0, abs=1e-12)
