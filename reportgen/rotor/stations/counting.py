"""How many eigenvalues lie in a window, counted without finding them."""

from __future__ import annotations

from itertools import pairwise

import numpy as np

from reportgen.errors import ModelError
from reportgen.rotor.stations.dynamics import DynamicStiffness
from reportgen.rotor.stations.harmonic import CHUNK
from reportgen.rotor.stations.model import Model
from reportgen.rotor.stations.shaft import Complex

# Steps of the argument along the contour: beyond this a step is halved.
_LARGEST_TURN = 1.0
_MOST_HALVINGS = 40


def _phase(model: Model, points: Complex, speed: float) -> Complex:
    out = np.empty(points.size, dtype=np.complex128)
    for begin in range(0, points.size, CHUNK):
        at = slice(begin, begin + CHUNK)
        turning = np.full(points[at].size, speed)
        with np.errstate(all="ignore"):
            out[at] = DynamicStiffness(model, points[at], turning).determinant_phase()
    return out


def _edge(start: complex, end: complex, known: Complex) -> Complex:
    """Points of one edge, without its end: geometric from both ends and close to known roots."""
    part = np.concatenate([np.geomspace(1e-4, 0.5, 12), np.linspace(0, 1, 13)[:-1]])
    part = np.concatenate([part, 1 - np.geomspace(1e-4, 0.5, 12)])
    along = (known - start) / (end - start)
    for reach in (-3, -1, 0, 1, 3):
        part = np.concatenate([part, along.real + reach * np.abs(along.imag)])
    part = np.unique(part[(part >= 0) & (part < 1)])
    return np.asarray(start + (end - start) * part)


def count_in_window(
    model: Model,
    speed: float,
    decay: tuple[float, float],
    frequency: tuple[float, float],
    known: Complex | None = None,
) -> int:
    """Count eigenvalues with Re λ and Im λ in a window by the principle of the argument.

    det Z(λ) has no poles, so its argument turns once round for each root inside the contour.
    The contour is halved wherever a step turns far, or its halves do not add up to it.

    Parameters
    ----------
    model
        The rotor.
    speed
        Ω [rad/s].
    decay, frequency
        Lowest and highest Re λ and Im λ [1/s].
    known
        Roots near which the contour is followed more closely from the start; they take no
        other part in the count.

    Raises
    ------
    ModelError
        If the contour passes so close to a root that the turns cannot be told.
    """
    (left, right), (low, high) = decay, frequency
    hints = np.zeros(0, dtype=np.complex128) if known is None else known
    corners = [left + 1j * low, right + 1j * low, right + 1j * high, left + 1j * high]
    edges = [_edge(a, b, hints) for a, b in pairwise([*corners, corners[0]])]
    points = np.append(np.concatenate(edges), corners[0])
    phase = _phase(model, points, speed)
    start, end, at_start, at_end = points[:-1], points[1:], phase[:-1], phase[1:]
    total = 0.0
    for _ in range(_MOST_HALVINGS):
        middle = (start + end) / 2
        at_middle = _phase(model, middle, speed)
        whole = np.angle(at_end / at_start)
        first, second = np.angle(at_middle / at_start), np.angle(at_end / at_middle)
        good = (np.abs(first) < _LARGEST_TURN) & (np.abs(second) < _LARGEST_TURN)
        good &= np.abs(first + second - whole) < 1e-6
        total += float((first + second)[good].sum())
        if good.all():
            return round(total / (2 * np.pi))
        bad = ~good
        start, end, at_start, at_end = (
            np.concatenate([start[bad], middle[bad]]),
            np.concatenate([middle[bad], end[bad]]),
            np.concatenate([at_start[bad], at_middle[bad]]),
            np.concatenate([at_middle[bad], at_end[bad]]),
        )
    raise ModelError(
        "an eigenvalue lies on the edge of the window in which modes are counted; move the window"
    )
