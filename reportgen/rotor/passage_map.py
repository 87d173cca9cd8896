"""Peak of the passage over damping and acceleration, and the acceleration a limit asks for.

On rigid supports the passage of a rotor without bow depends on ζ, a = Ω̇/ωₙ² and the speed it
starts from alone, all amplitudes over e. The map evaluates the closed form of `passage_exact` for
all pairs at once, the ramp going on until the highest amplitude is past.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.optimize import brentq

from reportgen.errors import ModelError
from reportgen.rotor import onemass_checks as check
from reportgen.rotor.onemass_model import OneMassRotor
from reportgen.rotor.onemass_peak import resonance_peak, resonance_peaks
from reportgen.rotor.passage_exact import LEAST_ACCELERATION
from reportgen.rotor.passage_kernel import Complexes, Floats, is_past, swept
from reportgen.rotor.passage_modes import modes_of
from reportgen.rotor.passage_peak import PassagePeak, passage_peak
from reportgen.rotor.passage_programme import ConstantAcceleration

GREATEST_DAMPING = 0.7
FASTEST_RUN_UP = 0.3
FASTEST_COAST_DOWN = 0.05
"""Range of the map: faster than this the rotor crosses the critical within a fraction of a turn."""

_BLOCK = 256
_COARSE, _FINE, _ROUNDS = 30, 7, 4


def peak_map(
    damping_ratio: ArrayLike,
    acceleration: ArrayLike,
    natural_frequency: float = 1.0,
    start_speed: float | None = None,
) -> NDArray[np.float64]:
    """Highest amplitude over eccentricity for every pair of damping and acceleration.

    Parameters
    ----------
    damping_ratio
        ζ [-], shape (n,), within [0, 0.7].
    acceleration
        Angular accelerations, all run-up (positive) or all coast-down (negative) [rad/s²], shape
        (m,); over ωₙ² within [1e-10, 0.3] on run-up and [1e-10, 0.05] on coast-down.
    natural_frequency
        ωₙ [rad/s].
    start_speed
        Speed at which the ramp starts from the steady whirl [rad/s]: 0 if not given on run-up,
        twice the critical and more on coast-down. The ramp goes on, to 0 on coast-down, until
        the highest amplitude is past.

    Returns
    -------
    ndarray of float
        Peak/e [-], shape (n, m), to 1e-6 relative.

    Raises
    ------
    ModelError
        If a value is out of range or the start is not before the critical speed.
    """
    zeta = _line(damping_ratio, "damping ratio")
    omega_n = check.positive("natural frequency", natural_frequency, "rad/s")
    scaled = _line(acceleration, "acceleration") / omega_n**2
    _require_range(zeta, scaled)
    pairs_zeta = np.repeat(zeta, scaled.size)
    pairs_scaled = np.tile(scaled, zeta.size)
    start, end = _ramp(pairs_zeta, pairs_scaled, start_speed, omega_n)
    blocks = [
        _peaks(*(values[at : at + _BLOCK] for values in (pairs_zeta, pairs_scaled, start, end)))
        for at in range(0, pairs_zeta.size, _BLOCK)
    ]
    flat = np.concatenate(blocks) if blocks else np.empty(0)
    return flat.reshape(zeta.size, scaled.size)


def ramp_peaks(
    damping_ratio: Floats, acceleration: Floats, start: Floats, end: Floats
) -> tuple[Floats, Floats]:
    """Highest amplitude of many rotors, each on a ramp of its own that ends at its end speed.

    Parameters
    ----------
    damping_ratio
        ζ [-], shape (n,).
    acceleration
        Angular acceleration over ωₙ² [-], shape (n,), all of one sign.
    start, end
        Speeds over ωₙ at which the ramp starts from the steady whirl and ends, shape (n,).

    Returns
    -------
    peak, at_end
        Highest amplitude, and the one at the end speed, over e [-], shape (n,); to 1e-6.
    """
    peaks, ends = [np.empty(0)], [np.empty(0)]
    for at in range(0, damping_ratio.size, _BLOCK):
        block = [v[at : at + _BLOCK] for v in (damping_ratio, acceleration, start, end)]
        last = _Ramp(*block[:3]).amplitude(block[3][:, None])[:, 0]
        peaks.append(np.maximum(_peaks(*block), last))
        ends.append(last)
    return np.concatenate(peaks), np.concatenate(ends)


@dataclass(frozen=True)
class LeastAcceleration:
    """Acceleration needed to keep the peak of a passage below a limit.

    Parameters
    ----------
    acceleration
        Least size of the acceleration, of the sign of the passage [rad/s²]; 0 if any will do,
        None if none looked at does.
    peak
        The passage at that acceleration; None where `acceleration` is 0 or None.
    exists
        Whether some acceleration meets the limit.
    reason
        Why any or none does; otherwise empty.
    """

    acceleration: float | None
    peak: PassagePeak | None
    exists: bool
    reason: str = ""


def least_acceleration(
    rotor: OneMassRotor,
    limit: float,
    start_speed: float,
    end_speed: float,
    fastest: float | None = None,
) -> LeastAcceleration:
    """Least constant acceleration at which the passage stays below an amplitude.

    Parameters
    ----------
    rotor
        The rotor, as in `passage`.
    limit
        Amplitude not to be exceeded [m] (0-peak).
    start_speed, end_speed
        Speeds of the passage [rad/s], on either side of the critical speed. The end speed is held
        for two beats with the critical speed afterwards, so that a peak after arrival counts.
    fastest
        Size of the fastest acceleration looked at [rad/s²]; 0.05·ωₙ² if not given.

    Returns
    -------
    LeastAcceleration
        The limit holds from this acceleration to the fastest, on a grid of ten a decade; the
        acceleration itself to 1e-6 relative.

    Raises
    ------
    ModelError
        If the limit is not above 0, the speeds are not on either side of every critical speed, or
        as in `passage_peak`.
    """
    check.positive("limit", limit, "m")
    criticals = [peak.speed for peak in resonance_peaks(rotor) if peak.speed is not None]
    if not criticals:
        raise ModelError(f"there is no critical speed to pass: {resonance_peak(rotor).reason}")
    low, high = sorted((start_speed, end_speed))
    if not low < min(criticals) <= max(criticals) < high:
        raise ModelError(
            f"the critical speeds {', '.join(f'{speed:.6g}' for speed in criticals)} rad/s do not "
            f"all lie between {low:g} and {high:g} rad/s: this is no passage"
        )
    sign = math.copysign(1.0, end_speed - start_speed)
    square = rotor.natural_frequency**2
    top = 0.05 * square if fastest is None else check.positive("fastest", fastest, "rad/s²")
    nearest = min(abs(end_speed - speed) for speed in criticals)

    def at(log: float) -> PassagePeak:
        ramp = ConstantAcceleration(
            start_speed, end_speed, sign * math.exp(log), hold=4.0 * math.pi / nearest
        )
        return passage_peak(rotor, ramp)

    step = math.log(10.0) / 10.0
    log = math.log(top)
    if at(log).amplitude > limit:
        reason = f"even {sign * top:g} rad/s², the fastest looked at, exceeds the limit"
        return LeastAcceleration(None, None, exists=False, reason=reason)
    slowest = math.log(_slowest(rotor, limit) * square)
    while at(log - step).amplitude <= limit:
        log -= step
        if log - step < slowest:
            reason = "every slower acceleration meets the limit too, down to the steady whirl"
            return LeastAcceleration(0.0, None, exists=True, reason=reason)
    root = float(brentq(lambda x: at(x).amplitude - limit, log - step, log, xtol=1e-7))
    return LeastAcceleration(sign * math.exp(root), at(root), exists=True)


def _slowest(rotor: OneMassRotor, limit: float) -> float:
    """Least θ̈/ωₙ² to look at.

    A slow passage may exceed the steady peak by a little, so a limit above the steady peak is
    looked at too, until the speed stays still for long against the decay of the slowest mode.
    """
    steady = resonance_peak(rotor).amplitude
    if steady is None or steady > limit:
        return 10.0 * LEAST_ACCELERATION
    decay = float(np.abs(modes_of(rotor).rate.real).min())
    return max(10.0 * LEAST_ACCELERATION, min(1e-3 * decay**2, 1e-2))


def _line(values: ArrayLike, name: str) -> Floats:
    line = np.atleast_1d(np.asarray(values, dtype=np.float64))
    if line.ndim != 1 or not np.all(np.isfinite(line)):
        raise ModelError(f"{name} must be a number or a one-dimensional array of finite numbers")
    return line


def _require_range(zeta: Floats, scaled: Floats) -> None:
    if zeta.size and not (zeta.min() >= 0.0 and zeta.max() <= GREATEST_DAMPING):
        raise ModelError(f"the map covers damping ratios from 0 to {GREATEST_DAMPING:g}")
    if not scaled.size:
        return
    if np.any(scaled > 0.0) and np.any(scaled < 0.0):
        raise ModelError("the map takes run-up or coast-down, not both signs of acceleration")
    size = np.abs(scaled)
    top = FASTEST_RUN_UP if scaled[0] > 0.0 else FASTEST_COAST_DOWN
    if size.min() < LEAST_ACCELERATION or size.max() > top:
        raise ModelError(
            f"accelerations over ωₙ² run from {size.min():.3g} to {size.max():.3g} in size; the "
            f"map covers {LEAST_ACCELERATION:g} to {top:g}"
        )


def _ramp(
    zeta: Floats, scaled: Floats, start_speed: float | None, omega_n: float
) -> tuple[Floats, Floats]:
    """Start and end of each ramp over ωₙ."""
    critical = 1.0 / np.sqrt(1.0 - 2.0 * zeta**2)
    beyond = 1.5 * critical + 8.0 * np.sqrt(np.abs(scaled)) + 0.5
    up = not scaled.size or scaled[0] > 0.0
    if start_speed is None:
        start = np.zeros_like(zeta) if up else beyond
    else:
        given = check.not_negative("start speed", start_speed, "rad/s") / omega_n
        start = np.full_like(zeta, given)
    if np.any(start >= critical) if up else np.any(start <= critical):
        side = "below" if up else "above"
        raise ModelError(f"the start speed must lie {side} the critical speed of every damping")
    return start, (beyond if up else np.zeros_like(zeta))


def _peaks(zeta: Floats, scaled: Floats, start: Floats, end: Floats) -> Floats:
    """Highest |z|/e of each ramp."""
    ramp = _Ramp(zeta, scaled, start)
    width = np.sqrt(np.abs(scaled)) + zeta
    low, high = np.minimum(start, end), np.maximum(start, end)
    # Dense about the critical, wide enough for the delay of the peak and the first beat after it.
    spread = np.sinh(np.linspace(-3.5, 3.5, _COARSE))
    speeds = np.clip(1.0 + width[:, None] * spread, low[:, None], high[:, None])
    speeds = np.sort(np.concatenate([speeds, start[:, None]], axis=1), axis=1)
    values = ramp.amplitude(speeds)
    rows = np.arange(zeta.size)
    for _ in range(_ROUNDS):
        top = np.argmax(values, axis=1)
        last = speeds.shape[1] - 1
        below = speeds[rows, np.maximum(top - 1, 0)]
        above = speeds[rows, np.minimum(top + 1, last)]
        speeds = below[:, None] + (above - below)[:, None] * np.linspace(0.0, 1.0, _FINE)
        values = ramp.amplitude(speeds)
    return _vertex(values)


def _vertex(values: Floats) -> Floats:
    """Top of the parabola through the highest of evenly spaced values and its neighbours."""
    top = np.argmax(values, axis=1)
    rows, last = np.arange(top.size), values.shape[1] - 1
    middle = values[rows, top]
    before, after = values[rows, np.maximum(top - 1, 0)], values[rows, np.minimum(top + 1, last)]
    curve = 2.0 * middle - before - after
    inside = (top > 0) & (top < last) & (curve > 0.0)
    gain = (after - before) ** 2 / (8.0 * np.where(inside, curve, 1.0))
    return np.asarray(np.where(inside, middle + gain, middle))


_SLOW = 3e-3
"""|Ω̇|/ωₙ² up to which the mode that no speed meets follows by its series, to 105 a⁴ < 1e-8."""


def _unpassed(offset: Complexes, scaled: Floats) -> Complexes:
    """K(p, a) of the backward mode, |p| ≥ 1: it is never met, so the series in a/p² will do."""
    x = 1j * scaled / offset**2
    return np.asarray((1.0 + x * (1.0 + 3.0 * x * (1.0 + 5.0 * x))) / offset)


class _Ramp:
    """|z|/e of many rotors on their ramps, as a function of the speed reached."""

    def __init__(self, zeta: Floats, scaled: Floats, start: Floats) -> None:
        swing = 1j * np.sqrt(1.0 - zeta**2)
        rate = np.stack([swing - zeta, -swing - zeta]).astype(np.complex128)[:, :, None]
        self.rate, self.scaled, self.start = rate, scaled[:, None], start[:, None]
        # As in passage_modes for rigid supports without bow, over e: f = ∓s²/(s₁ − s₂).
        apart = rate[0] - rate[1]
        self.drive = np.stack([-(rate[0] ** 2) / apart, rate[1] ** 2 / apart])
        offset: Complexes = np.asarray(1j * self.start - rate, dtype=np.complex128)
        self.late = is_past(offset, self.scaled)
        self.free = self.drive * (1.0 / offset - swept(offset, self.scaled, self.late))

    def amplitude(self, speed: Floats) -> Floats:
        """|z|/e at speeds over ωₙ, shape (rotors, speeds)."""
        elapsed = (speed - self.start) / self.scaled
        turned = 0.5 * (speed + self.start) * elapsed
        whirl = np.full(speed.shape, -1.0 + 0.0j)
        slow = float(np.abs(self.scaled).max()) <= _SLOW
        modes = zip(self.rate, self.drive, self.free, self.late, strict=True)
        for number, (rate, drive, free, late) in enumerate(modes):
            offset = np.asarray(1j * speed - rate, dtype=np.complex128)
            if number == 1 and slow:
                forced = drive * _unpassed(offset, self.scaled)
            else:
                forced = drive * swept(offset, self.scaled, late)
            whirl += forced + free * np.exp(rate * elapsed - 1j * turned)
        return np.asarray(np.abs(whirl))
