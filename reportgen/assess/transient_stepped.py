"""Second computation of a prescribed passage: the equation of motion stepped through time.

The first computation is a closed form. Here the force is sampled along any speed programme and
taken as straight between samples, for which a digital filter is exact; two step lengths remove
the leading error, of the step squared.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from scipy.integrate import solve_ivp
from scipy.signal import cont2discrete, lfilter, lfiltic

from reportgen.assess.transient_second import prescribed_record
from reportgen.rotor import passage
from reportgen.rotor.passage_integrated import passage_integrated
from reportgen.rotor.passage_programme import speed_range

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from reportgen.rotor.onemass import OneMassRotor

    Floats = NDArray[np.float64]
    Complexes = NDArray[np.complex128]

_PER_TURN = 64
_MOST_SAMPLES = 1_000_000
_FORGOTTEN = 30.0  # decay times after which a start is forgotten: e⁻³⁰
_MOST_CYCLES = 2_500  # of a stepwise integration: about two seconds


@dataclass(frozen=True, eq=False)
class Stepped:
    """Sampled |z| in m over time in s, how it was made, and its relative error."""

    time: Floats
    size: Floats
    method: str
    tolerance: float
    because: str


def stepped(
    rotor: OneMassRotor, programme: passage.Programme, near: float | None = None
) -> Stepped | None:
    """Return |z| along a programme by stepping; None where it takes too many steps.

    On flexible supports by a stepwise integrator of high order, with internal damping by a
    multistep one. On rigid supports a programme too long to step whole is stepped around the
    instant ``near`` (s), from steady whirl so long before it that the start is forgotten.
    """
    first, last = programme.start_time, programme.end_time
    fastest = max(speed_range(programme)[1], rotor.natural_frequency)
    cycles = (last - first) * fastest / (2.0 * math.pi)
    if rotor.internal_damping:
        record = prescribed_record(rotor, programme)
        if record is None:
            return None
        method = "Newton's law in the frame at rest, multistep integration"
        size = np.abs(record.displacement)
        return Stepped(record.time, size, method, 1e-5, "48 samples a turn, parabola between")
    if rotor.support is not None:
        if cycles > _MOST_CYCLES:
            return None
        times = np.linspace(first, last, math.ceil(cycles * _PER_TURN) + 2)
        run = passage_integrated(rotor, programme, times, rtol=1e-9)
        method = "equations of motion integrated by an explicit Runge-Kutta method"
        return Stepped(times, run.amplitude, method, 1e-5, "64 samples a turn, parabola between")
    if near is not None and 2 * cycles * _PER_TURN > _MOST_SAMPLES and rotor.damping_ratio:
        memory = _FORGOTTEN / (rotor.damping_ratio * rotor.natural_frequency)
        first, last = max(first, near - memory), min(last, near + 0.3 * memory)
        cycles = (last - first) * fastest / (2.0 * math.pi)
    count = 2 * math.ceil(cycles * _PER_TURN) + 9
    if count > _MOST_SAMPLES:
        return None
    fine = _record(rotor, programme, first, last, count)
    coarse = _record(rotor, programme, first, last, (count + 1) // 2)
    size = np.abs((4.0 * fine[::2] - coarse) / 3.0)
    return Stepped(
        np.linspace(first, last, (count + 1) // 2),
        size,
        "equation of motion stepped through time",
        1e-4,
        "fourth order in a step of 1/64 turn; second order where the acceleration jumps",
    )


def top(size: Floats) -> float:
    """Return the largest value, between samples by the parabola through three."""
    i = int(np.argmax(size))
    if not 0 < i < size.size - 1:
        return float(size[i])
    left, middle, right = (float(v) for v in size[i - 1 : i + 2])
    bend = left - 2.0 * middle + right
    return middle - (right - left) ** 2 / (8.0 * bend) if bend < 0.0 else middle


def _record(
    rotor: OneMassRotor, programme: passage.Programme, first: float, last: float, count: int
) -> Complexes:
    m, c, k = rotor.mass, rotor.damping, rotor.stiffness
    bow = k * rotor.bow_vector
    times, step = np.linspace(first, last, count, retstep=True)
    samples = np.empty(count, dtype=np.complex128)
    pieces = programme.segments
    starts = np.array([piece.start_time for piece in pieces])
    owner = np.clip(np.searchsorted(starts, times, side="right") - 1, 0, len(pieces) - 1)
    for number in np.unique(owner):
        piece, mine = pieces[number], owner == number
        elapsed = times[mine] - piece.start_time
        speed, angle = piece.speed(elapsed), piece.start_angle + piece.turned(elapsed)
        inertia = m * rotor.eccentricity * (speed**2 - 1j * piece.acceleration)
        samples[mine] = (inertia + bow) * np.exp(1j * angle)
    before, elapsed = pieces[owner[0]], first - pieces[owner[0]].start_time
    w = float(before.speed(np.asarray(elapsed)))
    turned = before.start_angle + float(before.turned(np.asarray(elapsed)))
    start = (m * rotor.eccentricity * w**2 + bow) / (k - m * w**2 + 1j * c * w)
    start *= np.exp(1j * turned)
    slope = (samples[1] - samples[0]) / step
    # the filter looks two samples back: the first is the start, the second one step on
    second = solve_ivp(
        lambda t, y: [y[1], (samples[0] + slope * t - c * y[1] - k * y[0]) / m],
        (0.0, float(step)),
        np.array([start, 1j * w * start]),
        method="DOP853",
        rtol=1e-12,
        atol=1e-18,
    ).y[0, -1]
    system: Any = ([1.0], [m, c, k])
    numerator, denominator, _ = cont2discrete(system, step, method="foh")
    b, a = np.atleast_1d(np.squeeze(numerator)), np.asarray(denominator)
    past = lfiltic(b, a, y=[second, start], x=[samples[1], samples[0]])
    rest, _ = lfilter(b, a, samples[2:], zi=past)
    return np.concatenate([[start, second], rest])
