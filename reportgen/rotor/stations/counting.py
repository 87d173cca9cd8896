"""How many eigenvalues lie in a window, counted without finding them."""

from __future__ import annotations

from itertools import pairwise

import numpy as np

from reportgen.errors import ModelError
from reportgen.rotor.stations.coefficients import Real
from reportgen.rotor.stations.dynamics import DynamicStiffness
from reportgen.rotor.stations.harmonic import CHUNK
from reportgen.rotor.stations.model import Model
from reportgen.rotor.stations.shaft import Complex

# Steps of the argument along the contour: beyond this a step is halved.
_LARGEST_TURN = 1.2
_MOST_POINTS = 60_000


def _phase(model: Model, points: Complex, speed: float) -> Complex:
    out = np.empty(points.size, dtype=np.complex128)
    for begin in range(0, points.size, CHUNK):
        at = slice(begin, begin + CHUNK)
        turning = np.full(points[at].size, speed)
        with np.errstate(all="ignore"):
            out[at] = DynamicStiffness(model, points[at], turning).determinant_phase()
    return out


def count_in_window(
    model: Model, speed: float, decay: tuple[float, float], frequency: tuple[float, float]
) -> int:
    """Count eigenvalues with Re λ and Im λ in a window by the principle of the argument.

    det Z(λ) has no poles, so its argument turns once round for each root inside the contour.

    Parameters
    ----------
    model
        The rotor.
    speed
        Ω [rad/s].
    decay, frequency
        Lowest and highest Re λ and Im λ [1/s].

    Raises
    ------
    ModelError
        If the contour passes so close to a root that the turns cannot be told.
    """
    (left, right), (low, high) = decay, frequency
    corners = np.array([left + 1j * low, right + 1j * low, right + 1j * high, left + 1j * high])
    ends = np.append(corners, corners[0])
    points = np.concatenate(
        [a + (b - a) * np.linspace(0, 1, 48, endpoint=False) for a, b in pairwise(ends)]
    )
    points = np.append(points, corners[0])
    phase = _phase(model, points, speed)
    while True:
        turn: Real = np.angle(phase[1:] / phase[:-1])
        wide = np.flatnonzero(np.abs(turn) > _LARGEST_TURN)
        if wide.size == 0:
            return round(float(turn.sum()) / (2 * np.pi))
        if points.size > _MOST_POINTS or not np.all(np.isfinite(turn)):
            raise ModelError(
                "an eigenvalue lies on the edge of the window in which modes are counted; "
                "move the window"
            )
        middle = (points[wide] + points[wide + 1]) / 2
        points = np.insert(points, wide + 1, middle)
        phase = np.insert(phase, wide + 1, _phase(model, middle, speed))
