"""Second computation of a passage: the equation of motion stepped through time.

The first computation is a closed form. Here the force is sampled, taken as straight between
samples (first-order hold), and the rotor is a digital filter that is exact for such a force.
The error falls with the square of the step; two step sizes remove its leading term.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

import numpy as np
from scipy.integrate import solve_ivp
from scipy.signal import cont2discrete, lfilter, lfiltic

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from reportgen.rotor.onemass import OneMassRotor
    from reportgen.rotor.passage import ConstantAcceleration

_PER_TURN = 64  # samples in the shortest period of force or rotor
_SETTLED = 30.0  # decay times after which a start from steady whirl is forgotten: e⁻³⁰
_MOST_SAMPLES = 8_000_000


def stepped_peak(
    rotor: OneMassRotor, programme: ConstantAcceleration, near: float
) -> float | None:
    """Return the largest |z| in m around the time ``near``, by stepping.

    The stepping starts from the steady whirl at the programme's start, or, in a long
    programme, so long before ``near`` that its start is forgotten. None where the record
    would be too long to step.

    Parameters
    ----------
    rotor
        On rigid supports, without internal damping.
    programme
        Speed programme.
    near
        Time in s from the start at which the first computation finds the peak.
    """
    duration = (programme.end_speed - programme.start_speed) / programme.acceleration
    decay = rotor.damping_ratio * rotor.natural_frequency
    memory = _SETTLED / decay if decay else math.inf
    first, last = max(0.0, near - memory), min(duration, near + 0.3 * memory)
    fastest = max(programme.start_speed, programme.end_speed, rotor.natural_frequency)
    count = math.ceil((last - first) * fastest / (2 * math.pi) * _PER_TURN) + 8
    if count > _MOST_SAMPLES:
        return None
    coarse = _record(rotor, programme, first, last, count)
    fine = _record(rotor, programme, first, last, 2 * count - 1)[::2]
    size = np.abs((4 * fine - coarse) / 3)
    return _top(size)


def _top(size: NDArray[np.float64]) -> float:
    """Return the largest value, between samples by the parabola through three."""
    i = int(np.argmax(size))
    if not 0 < i < size.size - 1:
        return float(size[i])
    left, middle, right = size[i - 1 : i + 2]
    return float(middle - (right - left) ** 2 / (8 * (left - 2 * middle + right)))


def _record(
    rotor: OneMassRotor, programme: ConstantAcceleration, first: float, last: float, count: int
) -> NDArray[np.complex128]:
    m, c, k = rotor.mass, rotor.damping, rotor.stiffness
    a, w = programme.acceleration, programme.start_speed + programme.acceleration * first
    bow = k * rotor.bow * complex(math.cos(rotor.bow_angle), math.sin(rotor.bow_angle))

    def force(t: Any) -> Any:
        speed = w + a * t
        turn = np.exp(1j * (w * t + 0.5 * a * t * t))
        return (m * rotor.eccentricity * (speed**2 - 1j * a) + bow) * turn

    start = (m * rotor.eccentricity * w**2 + bow) / (k - m * w**2 + 1j * c * w)
    times, step = np.linspace(0.0, last - first, count, retstep=True)
    samples = force(times)

    def hold(t: float) -> complex:
        return complex(samples[0] + (samples[1] - samples[0]) * t / step)

    # the filter looks two samples back: the first of them is the start, the second one step on
    second = solve_ivp(
        lambda t, y: [y[1], (hold(t) - c * y[1] - k * y[0]) / m],
        (0.0, float(step)),
        np.array([start, 1j * w * start]),
        method="DOP853",
        rtol=1e-12,
        atol=1e-18,
    ).y[0, -1]
    numerator, denominator, _ = cont2discrete(([1.0], [m, c, k]), step, method="foh")
    b, den = np.atleast_1d(np.squeeze(numerator)), np.asarray(denominator)
    past = lfiltic(b, den, y=[second, start], x=[samples[1], samples[0]])
    rest, _ = lfilter(b, den, samples[2:], zi=past)
    return np.concatenate([[start, second], rest])
