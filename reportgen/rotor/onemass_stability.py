"""Speed at which damping in the turning shaft makes the forward whirl of the one-mass rotor grow.

Damping that turns with the shaft opposes the velocity seen from the shaft. A free forward whirl at
ν < Ω lags the shaft, so that force pushes it on: it feeds the whirl as soon as it outweighs the
damping that stands still.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.polynomial import Polynomial

from reportgen.rotor import onemass_checks as check
from reportgen.rotor.onemass_model import OneMassRotor


def internal_damping_onset(rotor: OneMassRotor) -> float:
    """Speed where the forward whirl loses stability, viscous damping in the turning shaft.

    Parameters
    ----------
    rotor
        The rotor with `internal_damping` c_i.

    Returns
    -------
    float
        Onset speed [rad/s]. On rigid supports Ω = ωₙ (1 + c/c_i). On flexible isotropic supports
        the least Ω at which a root of the characteristic equation lies on the imaginary axis.
        Infinite if there is no internal damping.

    Notes
    -----
    With shaft κ = k + c_i (s − iΩ) in series with the supports S(s), the free whirl satisfies
    m s² + c s + κS/(κ + S) = 0. At s = iν that fixes κ = XS/(S − X) with X = mν² − icν; its real
    part is k, an equation for ν alone, and its imaginary part c_i (ν − Ω) then gives Ω.

    References
    ----------
    Kimball, A. L. (1924), General Electric Review 27, 244-251 (internal friction drives whirl);
    Gunter, E. J. (1966), NASA SP-113 (flexible supports raise the onset).
    """
    if rotor.internal_damping == 0.0:
        return math.inf
    omega_n = rotor.natural_frequency
    if rotor.support is None:
        return omega_n * (1.0 + rotor.damping / rotor.internal_damping)
    # In ν/ωₙ, forces over k.
    own, k = rotor.support, rotor.stiffness
    x = Polynomial([0.0, -2j * rotor.damping_ratio, 1.0])
    s = Polynomial([own.stiffness / k, 1j * own.damping * omega_n / k, -own.mass / rotor.mass])
    product, difference = x * s, s - x
    conjugate = Polynomial(np.conj(difference.coef))
    equation = Polynomial(np.real((product * conjugate - difference * conjugate).coef)).trim(0.0)
    roots = equation.roots()
    whirls = roots.real[(np.abs(roots.imag) <= 1e-9 * np.abs(roots)) & (roots.real > 1e-12)]
    ratio = rotor.internal_damping * omega_n / k
    onsets = [
        float(nu) - float(np.imag(product(nu) / difference(nu))) / ratio
        for nu in whirls
        if abs(difference(nu)) > 0.0
    ]
    return omega_n * min((onset for onset in onsets if onset > 0.0), default=math.inf)


def hysteretic_damping_onset(rotor: OneMassRotor, loss_factor: float) -> float:
    """Speed where the forward whirl loses stability, hysteretic damping in the turning shaft.

    Variant: the shaft force is k (1 + iη sgn(ν − Ω)) z for a circular whirl at ν, so its part
    across the displacement has the size kη whatever the rate, and its sense alone turns over
    where the rotor overtakes the whirl. `internal_damping` (viscous) is not used.

    Parameters
    ----------
    rotor
        The rotor, on rigid supports.
    loss_factor
        η [-], energy lost per cycle over 2π times the greatest strain energy, 0 or more.

    Returns
    -------
    float
        ωₙ [rad/s] if η > 2ζ: above the critical speed a whirl at ωₙ gains k η against the loss
        c ωₙ. Infinite if η ≤ 2ζ, at every speed.

    Raises
    ------
    ModelError
        If η is negative or not finite, or the rotor is on flexible supports.

    References
    ----------
    Ehrich, F. F. (1964), Journal of Applied Mechanics 31, 279-282 (shaft whirl by hysteresis).
    """
    check.not_negative("loss factor", loss_factor)
    check.rigid(rotor.support is None, "the hysteretic onset")
    if loss_factor > 2.0 * rotor.damping_ratio:
        return rotor.natural_frequency
    return math.inf
