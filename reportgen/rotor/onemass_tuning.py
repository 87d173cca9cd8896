"""What a designer may tune: the speed of self-balance by a bow, the damping of the support."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np
from scipy.optimize import minimize_scalar

from reportgen.errors import ModelError
from reportgen.rotor.onemass_model import OneMassRotor
from reportgen.rotor.onemass_peak import resonance_peak
from reportgen.rotor.onemass_response import response


@dataclass(frozen=True)
class SelfBalance:
    """Speed at which bow and unbalance cancel.

    Parameters
    ----------
    speed
        Speed where their vector sum is least [rad/s]; None if they only add.
    residual
        Amplitude of the disc left at that speed [m] (0-peak); None with the speed.
    exists
        Whether the sum vanishes there: only for a bow opposite to the unbalance.
    reason
        Why it does not; otherwise empty.
    """

    speed: float | None
    residual: float | None
    exists: bool
    reason: str = ""


def self_balanced_speed(rotor: OneMassRotor) -> SelfBalance:
    """Speed at which a residual bow cancels the unbalance.

    Parameters
    ----------
    rotor
        The rotor, on rigid supports.

    Returns
    -------
    SelfBalance
        The exciting vector is k b + m e Ω²: it is least at Ω = ωₙ √(−b cos β / e) with β the angle
        of the bow, and vanishes there if β = π.

    Raises
    ------
    ModelError
        If bow or eccentricity is zero, the rotor is on flexible supports, or the two would cancel
        exactly at an undamped critical speed.

    References
    ----------
    Nicholas, J. C., Gunter, E. J. & Allaire, P. E. (1976), Journal of Engineering for Power 98,
    171-181.
    """
    if rotor.support is not None:
        raise ModelError("the self-balanced speed is given for rigid supports only")
    if rotor.bow == 0.0 or rotor.eccentricity == 0.0:
        raise ModelError("self-balance needs both a bow and an eccentricity; one of them is 0")
    against = -rotor.bow_vector.real / rotor.eccentricity
    if against <= 1e-12 * rotor.bow / rotor.eccentricity:
        reason = "the bow points within 90° of the unbalance: the two add at every speed"
        return SelfBalance(None, None, exists=False, reason=reason)
    speed = rotor.natural_frequency * math.sqrt(against)
    residual = float(np.abs(response(rotor, speed)))
    if abs(rotor.bow_vector.imag) > 1e-12 * rotor.bow:
        reason = "the bow is not opposite to the unbalance: the part across it remains"
        return SelfBalance(speed, residual, exists=False, reason=reason)
    return SelfBalance(speed, residual, exists=True)


@dataclass(frozen=True)
class SupportOptimum:
    """Support damping that makes the highest peak of the disc as low as it can be.

    Parameters
    ----------
    damping
        Support damping, total of both bearings [N·s/m].
    amplitude
        Highest peak of the disc with it [m] (0-peak).
    speed
        Speed of that peak [rad/s].
    """

    damping: float
    amplitude: float
    speed: float


def optimum_support_damping(rotor: OneMassRotor) -> SupportOptimum:
    """Support damping for the lowest peak response of the disc over all speeds.

    Too little damping leaves the support free to resonate, too much locks it and leaves the rotor
    to its own damping; in between the highest peak is least.

    Parameters
    ----------
    rotor
        The rotor with a flexible support; the damping the support has now is not used.

    Returns
    -------
    SupportOptimum
        For a massless support and no damping at the disc it is c_s = (k/ωₙ)(1 + κ)√(2κ/(1 + 2κ))
        with κ = k_s/k, and the peak e (1 + 2κ). Damping to 1e-5, amplitude to 1e-9, relative.

    Raises
    ------
    ModelError
        If the rotor has no flexible support or no unbalance or bow, or if within six decades
        either way of k/ωₙ no damping gives a least peak.

    References
    ----------
    Kirk, R. G. & Gunter, E. J. (1972), Journal of Engineering for Industry 94, 221-232.
    """
    own = rotor.support
    if own is None:
        raise ModelError("optimum support damping needs a flexible support; the rotor has none")
    scale = rotor.stiffness / rotor.natural_frequency

    def highest(decades: float) -> float:
        peak = resonance_peak(_with_damping(rotor, scale * 10.0**decades))
        return math.log(peak.amplitude) if peak.amplitude else math.inf

    grid = np.linspace(-6.0, 6.0, 241)
    heights = [highest(float(decades)) for decades in grid]
    best = int(np.argmin(heights))
    if best in (0, grid.size - 1) or math.isinf(heights[best]):
        raise ModelError(
            "no support damping gives a least peak; check the stiffness and mass of the support"
        )
    found = minimize_scalar(
        highest, bounds=(float(grid[best - 1]), float(grid[best + 1])), options={"xatol": 1e-9}
    )
    damping = scale * 10.0 ** float(found.x)
    peak = resonance_peak(_with_damping(rotor, damping))
    if peak.amplitude is None or peak.speed is None:
        raise ModelError("at the best support damping the response has no peak at any speed")
    return SupportOptimum(damping=damping, amplitude=peak.amplitude, speed=peak.speed)


def _with_damping(rotor: OneMassRotor, damping: float) -> OneMassRotor:
    if rotor.support is None:
        raise ModelError("the rotor has no flexible support")
    return replace(rotor, support=replace(rotor.support, damping=damping))
