"""The one-mass rotor at constant speed (Föppl 1895, Jeffcott 1919).

A disc of mass m at the middle of a massless shaft of stiffness k, its mass centre a distance e
off the shaft centre. The displacement of the shaft centre is z = x + i·y, the rotor turns
counter-clockwise by the angle θ, and the unbalance lies along the real axis of the frame that
turns with the rotor. With a residual bow b (Nicholas, Gunter & Allaire 1976) and the shaft ends at
y_s, which is zero on rigid supports:

    m z̈ + c ż + k (z − y_s − b e^{iθ}) = m e (Ω² − i Ω̇) e^{iθ}
    m_s ÿ_s + c_s ẏ_s + k_s y_s + k (y_s − z + b e^{iθ}) = 0

At constant speed z = Z e^{iΩt}; every function here gives Z, the displacement in the turning frame.

Internal (rotating) damping opposes the velocity seen from the turning frame, c_i (ż − iΩz). At
constant speed and on isotropic supports the whirl is a circle described at the rotor's own speed:
the bent shaft turns as a rigid body, its fibres keep their length, and that velocity is zero.
Internal damping therefore changes no result in this module; it decides stability
(`reportgen.rotor.onemass_stability`).
"""

from reportgen.rotor.onemass_model import IsotropicSupport, OneMassRotor
from reportgen.rotor.onemass_peak import (
    AmplificationFactor,
    Peak,
    amplification_factor,
    resonance_peak,
    resonance_peaks,
    small_damping_amplification,
)
from reportgen.rotor.onemass_response import (
    STANDARD_GRAVITY,
    Forces,
    bearing_force,
    lag_of,
    magnification,
    phase_lag,
    response,
    static_sag,
    support_response,
)
from reportgen.rotor.onemass_stability import (
    hysteretic_damping_onset,
    internal_damping_onset,
)
from reportgen.rotor.onemass_tuning import (
    SelfBalance,
    SupportOptimum,
    optimum_support_damping,
    self_balanced_speed,
)

__all__ = [
    "STANDARD_GRAVITY",
    "AmplificationFactor",
    "Forces",
    "IsotropicSupport",
    "OneMassRotor",
    "Peak",
    "SelfBalance",
    "SupportOptimum",
    "amplification_factor",
    "bearing_force",
    "hysteretic_damping_onset",
    "internal_damping_onset",
    "lag_of",
    "magnification",
    "optimum_support_damping",
    "phase_lag",
    "resonance_peak",
    "resonance_peaks",
    "response",
    "self_balanced_speed",
    "small_damping_amplification",
    "static_sag",
    "support_response",
]
