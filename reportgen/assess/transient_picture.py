"""What of a long record is drawn: its envelope, spectra at some instants, a piece of the orbit."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]
Motion = Callable[[Floats], Complexes]

_BINS = 420
_SPECTRA = 22
_CYCLES = 14.0  # cycles of the lowest mode in a window: its resolution is about a tenth of it
_SAMPLES = 1024


@dataclass(frozen=True, eq=False)
class Waterfall:
    """Amplitude spectra of the motion in the x direction at some instants of a run.

    Parameters
    ----------
    time, speed
        Middle of each window, and the speed there, shape (n,).
    frequency
        Angular frequencies in rad/s, shape (m,).
    level
        Amplitude (0-peak) of each, by a Hann window, shape (n, m).
    window
        Length of a window in s.
    """

    time: Floats
    speed: Floats
    frequency: Floats
    level: Floats
    window: float


def envelope(time: Floats, size: Floats, bins: int = _BINS) -> tuple[Floats, Floats]:
    """Return the largest and the smallest value of each interval at their instants, in order.

    The largest value of the whole is among them.
    """
    if time.size <= 2 * bins:
        return time, size
    edges = np.linspace(0, time.size, bins + 1).astype(int)
    top = np.maximum.reduceat(size, edges[:-1])
    keep = {0, time.size - 1}
    for start, end, high in zip(edges[:-1], edges[1:], top, strict=True):
        part = size[start:end]
        keep.add(start + int(np.argmin(part)))
        keep.add(start + int(np.flatnonzero(part == high)[0]))
    chosen = np.array(sorted(keep))
    return time[chosen], size[chosen]


def time_above(time: Floats, size: Floats, limit: float) -> float:
    """Return the time in s for which a size, straight between samples, exceeds a limit."""
    a, b = size[:-1] - limit, size[1:] - limit
    high, low = np.maximum(a, b), np.minimum(a, b)
    with np.errstate(divide="ignore", invalid="ignore"):
        share = np.where(low >= 0.0, 1.0, np.where(high <= 0.0, 0.0, high / (high - low)))
    return float((share * np.diff(time)).sum())


def waterfall(
    motion: Motion,
    speed: Callable[[Floats], Floats],
    span: tuple[float, float],
    natural: float,
    top_speed: float,
) -> Waterfall | None:
    """Return spectra of the x direction at even instants of a run.

    Parameters
    ----------
    motion
        Gives z in m at instants in s.
    speed
        Gives the speed in rad/s at instants.
    span
        Start and end of the run in s.
    natural
        Lowest natural frequency in rad/s; sets the window.
    top_speed
        Highest speed in rad/s; sets how far the spectra go.

    Returns
    -------
    Waterfall or None
        None of a run that is shorter than a few windows.
    """
    first, last = span
    window = min(_CYCLES * 2.0 * math.pi / natural, (last - first) / 4.0)
    if window * natural < 2.0 * math.pi * 3.0:
        return None
    highest = 1.25 * max(top_speed, natural)
    count = max(_SAMPLES, 2 ** math.ceil(math.log2(window * highest * 2.4 / (2.0 * math.pi))))
    middles = np.linspace(first + 0.5 * window, last - 0.5 * window, _SPECTRA)
    offsets = (np.arange(count) / count - 0.5) * window
    times = np.clip((middles[:, None] + offsets).ravel(), first, last)
    x = np.asarray(motion(times)).real.reshape(_SPECTRA, count)
    hann = 0.5 + 0.5 * np.cos(2.0 * math.pi * offsets / window)
    padded = 4 * count  # lines between those of the bare window, for a smooth curve
    level = np.abs(np.fft.rfft(x * hann, padded, axis=1)) * 2.0 / hann.sum()
    frequency = 2.0 * math.pi * np.arange(level.shape[1]) * count / (padded * window)
    kept = frequency <= highest
    return Waterfall(
        middles, np.asarray(speed(middles)), frequency[kept], level[:, kept], float(window)
    )


def orbit_span(
    peak_time: float, peak_speed: float, natural: float, span: tuple[float, float]
) -> Floats:
    """Return instants, six turns before and six after the largest amplitude."""
    turns = 6.0 * 2.0 * math.pi / max(peak_speed, 0.05 * natural)
    low, high = max(peak_time - turns, span[0]), min(peak_time + turns, span[1])
    return np.linspace(low, high, 721)


def steady_grid(low: float, high: float, critical: float | None, width: float) -> Floats:
    """Return speeds between two speeds, close together around the critical one."""
    even = np.linspace(low, high, 201)
    if critical is None:
        return even
    near = critical + max(width, 1e-4 * critical) * np.sinh(np.linspace(-3.5, 3.5, 181))
    return np.unique(np.concatenate([even, near[(near > low) & (near < high)]]))
