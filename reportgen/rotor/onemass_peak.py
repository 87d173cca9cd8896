"""Peaks of the steady response over speed, and the amplification factor by half-power points.

|Z(Ω)|² is a quotient of two real polynomials in Ω, N/D, on rigid and on flexible supports and with
bow. Its peaks are therefore among the real roots of N'D − ND', and its half-power points among
those of 2N − P²D with P the peak: no search over speed can step over one. The roots are taken in
r = Ω/ωₙ and polished on the response itself.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.polynomial import Polynomial
from numpy.typing import NDArray
from scipy.optimize import brentq

from reportgen.errors import ModelError
from reportgen.rotor import onemass_checks as check
from reportgen.rotor.onemass_model import OneMassRotor
from reportgen.rotor.onemass_response import lag_of, response


@dataclass(frozen=True)
class Peak:
    """A maximum of the amplitude over speed.

    Parameters
    ----------
    speed
        Speed of the peak [rad/s]; None if there is no peak.
    amplitude
        Amplitude of the disc at the peak [m] (0-peak); infinite without damping, None if there is
        no peak.
    phase
        Lag behind the unbalance at the peak [rad]; None if there is no peak.
    exists
        Whether the amplitude has a maximum at a finite speed above zero.
    reason
        Why there is no peak, or what is particular about it; otherwise empty.
    """

    speed: float | None
    amplitude: float | None
    phase: float | None
    exists: bool
    reason: str = ""


@dataclass(frozen=True)
class AmplificationFactor:
    """Sharpness of a response peak by its half-power points.

    Parameters
    ----------
    critical_speed
        Speed of the peak N_c [rad/s]; None if there is no peak.
    lower, upper
        Speeds N₁ < N_c < N₂ where the amplitude is 1/√2 of the peak [rad/s]; None where the
        response never falls to that on that side.
    factor
        N_c/(N₂ − N₁) [-]; None if a point is missing.
    exists
        Whether the factor is defined.
    reason
        Why it is not; otherwise empty.
    """

    critical_speed: float | None
    lower: float | None
    upper: float | None
    factor: float | None
    exists: bool
    reason: str = ""


def resonance_peak(rotor: OneMassRotor) -> Peak:
    """Highest peak of the steady response over speed.

    Parameters
    ----------
    rotor
        The rotor; it must have unbalance or bow.

    Returns
    -------
    Peak
        On rigid supports without bow in closed form: r = 1/√(1 − 2ζ²), |Z| = e/(2ζ√(1 − ζ²)) for
        0 < ζ < 1/√2, and no peak above. Otherwise from the stationary points of the exact quotient
        (speed to 1e-9, amplitude to 1e-12, relative).

    Raises
    ------
    ModelError
        If the rotor has neither unbalance nor bow.

    References
    ----------
    Jeffcott, H. H. (1919), Philosophical Magazine 37, 304-314.
    """
    if rotor.support is None and rotor.bow == 0.0:
        return _closed_form(rotor)
    peaks = resonance_peaks(rotor)
    if not peaks:
        return Peak(None, None, None, exists=False, reason=_no_peak(rotor))
    return max(peaks, key=lambda peak: peak.amplitude or 0.0)


def resonance_peaks(rotor: OneMassRotor) -> tuple[Peak, ...]:
    """Every peak of the steady response, in order of speed.

    Parameters
    ----------
    rotor
        The rotor; it must have unbalance or bow.

    Returns
    -------
    tuple of Peak
        Empty if the response has no maximum at a finite speed above zero.

    Raises
    ------
    ModelError
        If the rotor has neither unbalance nor bow.
    """
    _require_excitation(rotor)
    if rotor.support is None and rotor.bow == 0.0:
        peak = _closed_form(rotor)
        return (peak,) if peak.exists else ()
    numerator, denominator = _square_of_response(rotor)
    unbounded = undamped_criticals(rotor)
    found = [
        Peak(speed, math.inf, math.pi / 2.0, exists=True, reason=_UNDAMPED) for speed in unbounded
    ]
    slope = numerator.deriv() * denominator - numerator * denominator.deriv()
    for ratio in positive_roots(slope):
        if any(abs(ratio * rotor.natural_frequency - s) < 1e-6 * s for s in unbounded):
            continue
        stationary = _polished(rotor, ratio, slope)
        if stationary is not None:
            found.append(stationary)
    return tuple(sorted(found, key=lambda peak: peak.speed or 0.0))


def amplification_factor(rotor: OneMassRotor) -> AmplificationFactor:
    """Amplification factor AF = N_c/(N₂ − N₁) of the highest peak by its half-power points.

    Parameters
    ----------
    rotor
        The rotor; it must have unbalance or bow.

    Returns
    -------
    AmplificationFactor
        For small ζ it tends to 1/(2ζ). On rigid supports the upper point exists only while the
        peak is more than √2 times the eccentricity, because |Z| falls to e, not to zero.

    Raises
    ------
    ModelError
        If the rotor has neither unbalance nor bow.
    """
    peak = resonance_peak(rotor)
    if not peak.exists or peak.speed is None or peak.amplitude is None:
        return AmplificationFactor(None, None, None, None, exists=False, reason=peak.reason)
    if math.isinf(peak.amplitude):
        return AmplificationFactor(
            peak.speed, None, None, None, exists=False, reason=f"{_UNDAMPED}: no half-power points"
        )
    numerator, denominator = _square_of_response(rotor)
    crossings = positive_roots(2.0 * numerator - peak.amplitude**2 * denominator)
    speeds = [r * rotor.natural_frequency for r in crossings]
    lower = max((s for s in speeds if s < peak.speed), default=None)
    upper = min((s for s in speeds if s > peak.speed), default=None)
    if lower is None or upper is None:
        side = "below" if lower is None else "above"
        reason = f"the amplitude does not fall to 0.707 of its peak {side} the peak"
        return AmplificationFactor(peak.speed, lower, upper, None, exists=False, reason=reason)
    lower, upper = _half_power(rotor, lower, peak), _half_power(rotor, upper, peak)
    factor = peak.speed / (upper - lower)
    return AmplificationFactor(peak.speed, lower, upper, factor, exists=True)


def small_damping_amplification(damping_ratio: float) -> float:
    """Amplification factor of a lightly damped resonance, 1/(2ζ).

    Parameters
    ----------
    damping_ratio
        ζ [-], within (0, 1/√2). The half-power factor is 1 % below at ζ = 0.05, 4 % at ζ = 0.1.

    Returns
    -------
    float
        1/(2ζ) [-].

    Raises
    ------
    ModelError
        If ζ is not within (0, 1/√2).
    """
    ratio = check.positive("damping ratio", damping_ratio)
    if 2.0 * ratio**2 >= 1.0:
        raise ModelError(f"at a damping ratio of {ratio:g} there is no resonance peak to amplify")
    return 1.0 / (2.0 * ratio)


NO_DAMPING = 1e-12
"""Damping ratio below which a rotor counts as undamped: its peak is lost in rounding."""

_UNDAMPED = "without damping the amplitude grows without bound"


def _closed_form(rotor: OneMassRotor) -> Peak:
    _require_excitation(rotor)
    zeta = rotor.damping_ratio
    if 2.0 * zeta**2 >= 1.0:
        return Peak(None, None, None, exists=False, reason=_no_peak(rotor))
    ratio = 1.0 / math.sqrt(1.0 - 2.0 * zeta**2)
    speed = ratio * rotor.natural_frequency
    if zeta < NO_DAMPING:
        return Peak(speed, math.inf, math.pi / 2.0, exists=True, reason=_UNDAMPED)
    amplitude = rotor.eccentricity / (2.0 * zeta * math.sqrt(1.0 - zeta**2))
    return Peak(speed, amplitude, math.atan2(2.0 * zeta * ratio, 1.0 - ratio**2), exists=True)


def _no_peak(rotor: OneMassRotor) -> str:
    if rotor.support is None and rotor.bow == 0.0:
        return (
            f"damping ratio {rotor.damping_ratio:g} is 1/√2 or more: the amplitude rises with "
            "speed to the eccentricity and has no peak"
        )
    return "the amplitude has no maximum at a finite speed above zero"


def _require_excitation(rotor: OneMassRotor) -> None:
    if rotor.eccentricity == 0.0 and rotor.bow == 0.0:
        raise ModelError("the rotor has neither unbalance nor bow; there is no response to search")


def quotient(rotor: OneMassRotor) -> tuple[Polynomial, Polynomial]:
    """Response Z as numerator [m] and denominator [-], complex polynomials in r = Ω/ωₙ."""
    bow, e = rotor.bow_vector, rotor.eccentricity
    disc = Polynomial([0.0, 2j * rotor.damping_ratio, -1.0])
    unbalance = Polynomial([0.0, 0.0, e])
    if rotor.support is None:
        return unbalance + bow, disc + 1.0
    own, k, w = rotor.support, rotor.stiffness, rotor.natural_frequency
    ends = Polynomial([own.stiffness / k, 1j * own.damping * w / k, -own.mass / rotor.mass])
    return (ends + 1.0) * unbalance + ends * bow, disc + ends + disc * ends


def _square_of_response(rotor: OneMassRotor) -> tuple[Polynomial, Polynomial]:
    """|Z|² as numerator [m²] and denominator [-], real polynomials in r."""
    numerator, denominator = quotient(rotor)
    return _square(numerator), _square(denominator)


def _square(polynomial: Polynomial) -> Polynomial:
    conjugate = Polynomial(np.conj(polynomial.coef))
    return Polynomial(np.real((polynomial * conjugate).coef))


def positive_roots(polynomial: Polynomial) -> list[float]:
    """Real positive roots; near-double ones may show as a pair off the axis, so allow for that."""
    trimmed = polynomial.trim(0.0)
    roots: NDArray[np.complex128] = np.asarray(trimmed.roots(), dtype=np.complex128)
    near = (roots.real > 1e-9) & (np.abs(roots.imag) <= 1e-7 * np.abs(roots))
    return sorted(float(r) for r in roots.real[near])


def _polished(rotor: OneMassRotor, ratio: float, slope: Polynomial) -> Peak | None:
    """Peak at a stationary point, or None where that point is a minimum or a flat."""
    step = 1e-5 * ratio
    below, above = float(slope(ratio - step)), float(slope(ratio + step))
    if not below > 0.0 > above:
        return None
    ratio = _root(lambda r: float(slope(r)), ratio - step, ratio + step)
    speed = ratio * rotor.natural_frequency
    value = response(rotor, speed)
    return Peak(speed, float(np.abs(value)), float(lag_of(value)), exists=True)


def _root(function: Callable[[float], float], below: float, above: float) -> float:
    return float(brentq(function, below, above, xtol=1e-15 * above, rtol=1e-14))


def _half_power(rotor: OneMassRotor, guess: float, peak: Peak) -> float:
    """Half-power point polished on the response: expanded squares lose digits at small damping."""
    speed, amplitude = peak.speed or 0.0, peak.amplitude or 0.0
    half_way = 0.5 * (guess - speed)

    def excess(at: float) -> float:
        return float(np.abs(response(rotor, at))) / amplitude - math.sqrt(0.5)

    ends = sorted((max(guess - half_way, 0.0), max(guess + half_way, 0.0)))
    if excess(ends[0]) * excess(ends[1]) >= 0.0:
        return guess
    return _root(excess, *ends)


def undamped_criticals(rotor: OneMassRotor) -> list[float]:
    """Speeds where the response has no bound [rad/s]; empty as soon as anything damps."""
    if rotor.damping_ratio >= NO_DAMPING:
        return []
    if rotor.support is None:
        return [rotor.natural_frequency]
    own = rotor.support
    if own.damping * rotor.natural_frequency >= NO_DAMPING * rotor.stiffness:
        return []
    kappa, mu = own.stiffness / rotor.stiffness, own.mass / rotor.mass
    # (1 − x)(κ − μx) − x = 0 in x = r²
    squares = Polynomial([kappa, -(1.0 + kappa + mu), mu]).trim(0.0).roots()
    return [rotor.natural_frequency * math.sqrt(float(x)) for x in np.sort(np.real(squares))]
