"""Peaks of a response curve, their half-power speeds, amplification factor and phase."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from reportgen.errors import ModelError
from reportgen.rotor.stations.coefficients import Real
from reportgen.rotor.stations.response import Bow, Response, unbalance_response

_HALF_POWER = 2.0  # of 1/A² against its value at the peak: A falls to 0.707


@dataclass(frozen=True)
class Peak:
    """A peak of amplitude over speed.

    Attributes
    ----------
    speed
        N_c [rad/s].
    amplitude
        There [m, 0-peak] (or the unit of the curve).
    phase
        Of the motion against the unbalance reference there [rad], in (−π, π]; a lag is
        negative.
    lower, upper
        Half-power speeds N₁, N₂ [rad/s]; None where the curve does not fall so far.
    amplification
        AF = N_c / (N₂ − N₁); None where N₁ or N₂ is missing.
    one_sided
        AF from the side that is there, N_c / (2 |N − N_c|), where one of N₁, N₂ is missing.
    reason
        Why there is no AF, in words; empty where there is one.
    """

    speed: float
    amplitude: float
    phase: float
    lower: float | None
    upper: float | None
    amplification: float | None
    one_sided: float | None
    reason: str


def find_peaks(speeds: ArrayLike, amplitude: ArrayLike, least: float = 1e-3) -> list[Peak]:
    """Find the peaks of a complex response curve, highest precision at moderate spacing.

    Near a resonance 1/A² is a parabola in speed, so peak and half-power speeds are
    interpolated in 1/A².

    Parameters
    ----------
    speeds
        Rising [rad/s], (S,), S ≥ 5.
    amplitude
        Complex (or real) response, (S,).
    least
        Peaks below this share of the largest amplitude are left out.

    Raises
    ------
    ModelError
        If there are fewer than five points or speeds do not rise.
    """
    w = np.asarray(speeds, dtype=np.float64)
    z = np.asarray(amplitude, dtype=np.complex128)
    if w.ndim != 1 or w.size < 5 or z.shape != w.shape or np.any(np.diff(w) <= 0):
        raise ModelError("a response curve needs at least five points with rising speeds")
    a = np.abs(z)
    if not np.all(np.isfinite(a)):
        raise ModelError("a response curve must be finite")
    top = a.max()
    inner = np.arange(1, w.size - 1)
    at = inner[(a[1:-1] > a[:-2]) & (a[1:-1] >= a[2:]) & (a[1:-1] > least * top)]
    inverse = 1 / np.maximum(a, 1e-9 * max(top, 1e-300)) ** 2
    return [_peak(w, z, inverse, int(i)) for i in at]


def _peak(w: Real, z: np.ndarray, inverse: Real, i: int) -> Peak:
    # Parabola through three points of 1/A².
    (h1, h2) = w[i] - w[i - 1], w[i + 1] - w[i]
    d1, d2 = (inverse[i] - inverse[i - 1]) / h1, (inverse[i + 1] - inverse[i]) / h2
    curve = (d2 - d1) / (h1 + h2)
    slope = d1 + curve * h1
    off = float(np.clip(-slope / (2 * curve), -h1, h2)) if curve > 0 else 0.0
    least = float(inverse[i] + slope * off + curve * off**2)
    if not least > 0:
        off, least = 0.0, float(inverse[i])
    speed = float(w[i] + off)
    near = slice(max(i - 1, 0), i + 2)
    turned = np.unwrap(np.angle(z[near]))
    phase = float(np.angle(np.exp(1j * np.interp(speed, w[near], turned))))
    lower = _fall(w[: i + 1][::-1], inverse[: i + 1][::-1], least)
    upper = _fall(w[i:], inverse[i:], least)
    factor = one_sided = None
    reason = ""
    if lower is not None and upper is not None:
        factor = speed / (upper - lower)
    else:
        side = "below" if lower is None else "above"
        reason = f"the response does not fall to 0.707 of the peak {side} it"
        if lower is None and upper is None:
            reason = "the response falls to 0.707 of the peak on neither side"
        else:
            known = lower if lower is not None else upper
            assert known is not None
            one_sided = speed / (2 * abs(known - speed))
    return Peak(speed, float(least**-0.5), phase, lower, upper, factor, one_sided, reason)


def _fall(w: Real, inverse: Real, least: float) -> float | None:
    """First speed away from the peak at which 1/A² is twice ``least``; None if it turns first."""
    goal = _HALF_POWER * least
    over = np.flatnonzero(inverse >= goal)
    if over.size == 0:
        return None
    j = int(over[0])
    # A rise of amplitude above the peak before that is another peak's flank.
    if np.any(inverse[1:j] < 0.98 * least) or j == 0:
        return None
    part = (goal - inverse[j - 1]) / (inverse[j] - inverse[j - 1])
    if j >= 1 and j + 1 < w.size:
        # One Newton step on the parabola through the next point.
        h, g = w[j] - w[j - 1], w[j + 1] - w[j]
        d = (inverse[j] - inverse[j - 1]) / h
        c = ((inverse[j + 1] - inverse[j]) / g - d) / (h + g)
        u = part * h
        for _ in range(3):
            value = inverse[j - 1] + d * u + c * u * (u - h) - goal
            u -= value / (d + c * (2 * u - h))
        part = float(np.clip(u / h, 0, 1))
    return float(w[j - 1] + part * (w[j] - w[j - 1]))


def response_peaks(
    response: Response, station: int, angle: float, bow: Bow | None = None, passes: int = 2
) -> list[Peak]:
    """Find the peaks at a probe, solving again at closer speeds around each.

    Parameters
    ----------
    response
        Over a row of speeds that brackets the peaks.
    station, angle
        Of the probe, see :meth:`Response.probe`.
    bow
        The one the response was found with, if any.
    passes
        Rounds of closer speeds.
    """
    speeds, curve = response.speeds, response.probe(station, angle)
    found = find_peaks(speeds, curve)
    for _ in range(passes):
        extra = [_closer(speeds, p) for p in found]
        if not extra:
            return found
        new = np.setdiff1d(np.concatenate(extra), speeds)
        if new.size == 0:
            return found
        more = unbalance_response(response.model, new, list(response.unbalance), bow)
        speeds = np.concatenate([speeds, new])
        curve = np.concatenate([curve, more.probe(station, angle)])
        order = np.argsort(speeds)
        speeds, curve = speeds[order], curve[order]
        found = find_peaks(speeds, curve)
    return found


def _closer(speeds: Real, peak: Peak) -> Real:
    spans = []
    for centre in (peak.speed, peak.lower, peak.upper):
        if centre is None:
            continue
        i = int(np.clip(np.searchsorted(speeds, centre), 1, speeds.size - 1))
        lo, hi = speeds[max(i - 2, 0)], speeds[min(i + 1, speeds.size - 1)]
        spans.append(np.linspace(lo, hi, 17))
    return np.concatenate(spans)
