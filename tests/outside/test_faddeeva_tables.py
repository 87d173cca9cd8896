"""Kernel of the exact passage against tables of the Faddeeva function and of Fresnel integrals.

Source: Abramowitz & Stegun, Handbook of Mathematical Functions, table 7.8 (w(z) to six decimals),
values from memory; NIST DLMF 7.2(ii)-(iii) and 7.5.1 for what they are values of.

Obtained: from memory.
"""

import cmath
import math

import numpy as np
import pytest

from reportgen.rotor.passage_kernel import swept

TABLE_7_8 = {
    0.0 + 0.1j: 0.896457,
    0.0 + 1.0j: 0.427584,
    0.5 + 0.5j: 0.533157 + 0.230488j,
    1.0 + 1.0j: 0.304744 + 0.208219j,
    2.0 + 0.0j: 0.018316 + 0.340026j,
}


@pytest.mark.parametrize(("argument", "tabulated"), TABLE_7_8.items())
@pytest.mark.parametrize("acceleration", [2.0, -2.0])
def test_kernel_holds_the_tabulated_faddeeva_function(argument, tabulated, acceleration):
    kappa = cmath.exp(math.copysign(0.25, acceleration) * 1j * math.pi)
    p = np.array(2.0 * argument / (1j * kappa))
    value = complex(swept(p, acceleration)) / (kappa * math.sqrt(math.pi) / 2.0)
    # Half a unit of the sixth decimal, in each part.
    assert value.real == pytest.approx(complex(tabulated).real, rel=0, abs=6e-7)
    assert value.imag == pytest.approx(complex(tabulated).imag, rel=0, abs=6e-7)


@pytest.mark.parametrize("acceleration", [0.3, -7.0])
def test_at_resonance_the_kernel_is_a_whole_fresnel_integral(acceleration):
    # C(∞) = S(∞) = 1/2 (DLMF 7.2.9): the integral of exp(iax²/2) over 0 to ∞.
    half = math.sqrt(math.pi / abs(acceleration)) / 2.0
    expected = complex(half, math.copysign(half, acceleration))
    assert complex(swept(np.array(0j), acceleration)) == pytest.approx(expected, rel=1e-14)
