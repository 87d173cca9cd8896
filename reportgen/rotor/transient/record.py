"""Amplitudes between an integrator's steps: peaks and time above a limit."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from reportgen.rotor.transient.coupled import SPEED, Complexes, Floats

_PER_STEP = 8


@dataclass(frozen=True)
class Peak:
    """Highest amplitude on the way.

    Parameters
    ----------
    amplitude
        [m] (0-peak).
    time
        [s].
    speed
        Speed of rotation at that instant [rad/s].
    """

    amplitude: float
    time: float
    speed: float


@dataclass(frozen=True, eq=False)
class Fine:
    """Amplitude [m] and speed [rad/s] at instants [s] eight to a step, shape (n,) each."""

    time: Floats
    amplitude: Floats
    speed: Floats


def refined(time: Floats, states: Complexes, rates: Complexes, motions: int) -> Fine:
    """Fill in the amplitude of the disc between steps.

    Hermite interpolation of order 5 on p, ṗ and p̈ in the turning frame; the rate of ṗ = v − iθ̇p
    follows from the equations. Its error, (Δh)⁶/46,080 of the part that beats at Δ, stays below
    1e-5 for the step lengths that the integrator takes.
    """
    if time.size < 2 or motions < 2:
        return Fine(time, np.abs(states[:, 0]), states[:, SPEED].real)
    p, w, spin = states[:, 0], states[:, SPEED].real, rates[:, SPEED].real
    rate = rates[:, 0]
    second = rates[:, 1] - 1j * (spin * p + w * rate)
    share = np.arange(_PER_STEP) / _PER_STEP
    steps = np.diff(time)
    amplitude = np.abs(_quintic(p, rate, second, steps, share)).ravel()
    speed = _cubic(w, spin, steps, share).ravel()
    instants = (time[:-1, None] + steps[:, None] * share).ravel()
    return Fine(
        np.append(instants, time[-1]),
        np.append(amplitude, abs(p[-1])),
        np.append(speed, w[-1]),
    )


def _quintic(
    p: Complexes, rate: Complexes, second: Complexes, steps: Floats, share: Floats
) -> Complexes:
    s = share[None, :]
    h = steps[:, None]
    t = 1.0 - s
    value = p[:-1, None] * t**3 * (1 + 3 * s + 6 * s**2) + p[1:, None] * s**3 * (
        1 + 3 * t + 6 * t**2
    )
    value = value + h * rate[:-1, None] * t**3 * s * (1 + 3 * s)
    value = value - h * rate[1:, None] * s**3 * t * (1 + 3 * t)
    value = value + 0.5 * h**2 * second[:-1, None] * t**3 * s**2
    return np.asarray(value + 0.5 * h**2 * second[1:, None] * s**3 * t**2)


def _cubic(w: Floats, rate: Floats, steps: Floats, share: Floats) -> Floats:
    s, h = share[None, :], steps[:, None]
    t = 1.0 - s
    value = w[:-1, None] * t**2 * (1 + 2 * s) + w[1:, None] * s**2 * (1 + 2 * t)
    return np.asarray(value + h * (rate[:-1, None] * t**2 * s - rate[1:, None] * s**2 * t))


def highest(fine: Fine) -> Peak:
    """Highest amplitude, by the parabola through the best instant and its neighbours."""
    best = int(np.argmax(fine.amplitude))
    if best in (0, fine.time.size - 1):
        return _peak_at(fine, float(fine.time[best]), float(fine.amplitude[best]))
    three = slice(best - 1, best + 2)
    time, value = vertex(fine.time[three], fine.amplitude[three])
    return _peak_at(fine, time, value)


def _peak_at(fine: Fine, time: float, amplitude: float) -> Peak:
    return Peak(amplitude, time, float(np.interp(time, fine.time, fine.speed)))


def vertex(time: Floats, value: Floats) -> tuple[float, float]:
    """Place and height of the top of the parabola through three points, the middle one highest."""
    t0, t1, t2 = (float(t) for t in time)
    a, b, c = (float(v) for v in value)
    left, right = (b - a) / (t1 - t0), (c - b) / (t2 - t1)
    bend = (right - left) / (t2 - t0)
    if bend >= 0.0:
        return t1, b
    top = 0.5 * (t0 + t1) - left / (2.0 * bend)
    top = min(max(top, t0), t2)
    return top, b + (top - t1) * (left + bend * (top - t0))


def time_above(time: Floats, amplitude: NDArray[np.float64], limit: float) -> float:
    """Time for which an amplitude, straight between instants, exceeds a limit [s]."""
    a, b = amplitude[:-1] - limit, amplitude[1:] - limit
    steps = np.diff(time)
    with np.errstate(divide="ignore", invalid="ignore"):
        share = np.where(a * b < 0.0, np.maximum(a, b) / np.abs(b - a), 0.0)
    share = np.where((a >= 0.0) & (b >= 0.0) & (a + b > 0.0), 1.0, share)
    return float((share * steps).sum())
