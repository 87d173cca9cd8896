"""Second computation of a run: Newton's law in two planes, in the frame at rest.

The first computation integrates Lagrange's equations in the frame that turns with the shaft, by
an explicit Runge-Kutta method. Here the forces on the disc's centre and their moments about it are
written down in the frame at rest and integrated by a multistep method (LSODA). Nothing is shared
but the torque tables.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from scipy.integrate import solve_ivp

from reportgen.rotor.onemass_response import response, support_response
from reportgen.rotor.passage_programme import Programme, speed_range

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from reportgen.rotor.onemass import OneMassRotor

    Floats = NDArray[np.float64]

Torque = Callable[[float], float]
PER_TURN = 48
"""Samples in the shortest turn or cycle of a record; a maximum lies within 1e-3 of one."""
MOST_SAMPLES = 500_000


@dataclass(frozen=True, eq=False)
class RestRecord:
    """Motion at even instants: time [s], speed [rad/s], z [m] and ż [m/s], shape (n,) each."""

    time: Floats
    speed: Floats
    angle: Floats
    displacement: NDArray[np.complex128]
    velocity: NDArray[np.complex128]


def rest_record(
    rotor: OneMassRotor,
    inertia: float,
    net: Torque,
    start_speed: float,
    duration: float,
    top_speed: float,
) -> RestRecord | None:
    """Return the motion under torque, sampled evenly; None where that takes too many samples.

    Parameters
    ----------
    rotor
        The rotor.
    inertia
        Moment of inertia of all that turns, kg·m².
    net
        Drive less load against speed, N·m.
    start_speed
        Speed at the start in rad/s, where the rotor is in steady whirl.
    duration
        Time in s.
    top_speed
        Highest speed met, in rad/s; sets the sampling.
    """
    fastest = max(top_speed, rotor.natural_frequency)
    count = math.ceil(duration * fastest / (2.0 * math.pi) * PER_TURN) + 2
    if count > MOST_SAMPLES:
        return None
    times = np.linspace(0.0, duration, count)
    rates, start = _equations(rotor, inertia, net, start_speed)
    found = solve_ivp(
        rates,
        (0.0, duration),
        start,
        method="LSODA",
        t_eval=times,
        rtol=1e-8,
        atol=1e-8 * _scale(rotor, start.size),
    )
    return _record(found.t, found.y)


def prescribed_record(rotor: OneMassRotor, programme: Programme) -> RestRecord | None:
    """Return the motion along a prescribed programme by the same equations, piece by piece.

    None where it takes too many samples.
    """
    pieces = programme.segments
    fastest = max(speed_range(programme)[1], rotor.natural_frequency)
    rate = fastest / (2.0 * math.pi) * PER_TURN
    if (programme.end_time - programme.start_time) * rate > MOST_SAMPLES:
        return None
    parts: list[RestRecord] = []
    state: Floats | None = None
    for piece in pieces:
        # an inertia that no whirl moves, and the torque that gives it the piece's acceleration
        inertia = 1e15 * rotor.mass * max(rotor.eccentricity, abs(rotor.bow), 1e-12) ** 2
        torque = inertia * piece.acceleration
        rates, first = _equations(rotor, inertia, lambda _, t=torque: t, piece.start_speed)  # type: ignore[misc]
        if state is not None:
            first = state
        count = max(math.ceil(piece.duration * rate), 16) + 1
        found: Any = solve_ivp(
            rates,
            (0.0, piece.duration),
            first,
            method="LSODA",
            t_eval=np.linspace(0.0, piece.duration, count),
            rtol=1e-9,
            atol=1e-9 * _scale(rotor, first.size),
        )
        y = found.y
        state = y[:, -1].copy()
        state[-1] = piece.end_speed
        parts.append(_record(piece.start_time + found.t, y))
    names = ("time", "speed", "angle", "displacement", "velocity")
    # where two pieces meet, the instant is kept once
    return RestRecord(
        *(
            np.concatenate([getattr(p, name)[0 if n == 0 else 1 :] for n, p in enumerate(parts)])
            for name in names
        )
    )


def _record(time: Floats, y: Floats) -> RestRecord:
    return RestRecord(
        time, y[-1], y[-2], np.asarray(y[0] + 1j * y[2]), np.asarray(y[1] + 1j * y[3])
    )


def _equations(
    rotor: OneMassRotor, inertia: float, net: Torque, start_speed: float
) -> tuple[Callable[[float, Any], list[float]], Floats]:
    """Return the rates of (x, ẋ, y, ẏ, [support likewise], θ, θ̇) and the steady start."""
    m, k, c, ci = rotor.mass, rotor.stiffness, rotor.damping, rotor.internal_damping
    e, b, b0 = rotor.eccentricity, rotor.bow, rotor.bow_angle
    support = rotor.support
    ks = cs = ms = 0.0
    if support is not None:
        ks, cs, ms = support.stiffness, support.damping, support.mass
        if ms == cs + ci == 0.0:  # a spring alone: in series with the shaft
            k, support = k * ks / (k + ks), None

    def rates(_: float, state: Any) -> list[float]:
        x, vx, y, vy, *foot, angle, spin = state.tolist()
        cos, sin = math.cos(angle), math.sin(angle)
        bx, by = b * math.cos(angle + b0), b * math.sin(angle + b0)
        px = py = ux = uy = 0.0
        if support is not None:
            px, ux, py, uy = foot
        # the spring's stretch, and the slip that the turning shaft's own damping sees
        sx, sy = x - px - bx, y - py - by
        if support is not None and ms == 0.0:
            both = cs + ci
            ux = (k * sx + ci * (vx + spin * (y - py)) - ks * px) / both
            uy = (k * sy + ci * (vy - spin * (x - px)) - ks * py) / both
        dx, dy = vx - ux + spin * (y - py), vy - uy - spin * (x - px)
        shaft_x, shaft_y = -k * sx - ci * dx, -k * sy - ci * dy
        fx, fy = shaft_x - c * vx, shaft_y - c * vy
        # moments about the mass centre: of the force at the shaft's centre, of the bent spring,
        # of the turning damper
        moment = -e * (cos * fy - sin * fx)
        moment += k * (bx * sy - by * sx) + ci * ((x - px) * dy - (y - py) * dx)
        turn = (net(spin) + moment) / inertia
        ax = fx / m + e * (spin * spin * cos + turn * sin)
        ay = fy / m + e * (spin * spin * sin - turn * cos)
        if support is None:
            return [vx, ax, vy, ay, spin, turn]
        if ms == 0.0:
            return [vx, ax, vy, ay, ux, 0.0, uy, 0.0, spin, turn]
        bear_x, bear_y = -shaft_x - ks * px - cs * ux, -shaft_y - ks * py - cs * uy
        return [vx, ax, vy, ay, ux, bear_x / ms, uy, bear_y / ms, spin, turn]

    z = complex(response(rotor, start_speed))
    v = 1j * start_speed * z
    start = [z.real, v.real, z.imag, v.imag]
    if support is not None:
        foot = complex(support_response(rotor, start_speed))
        slide = 1j * start_speed * foot
        start += [foot.real, slide.real, foot.imag, slide.imag]
    return rates, np.array([*start, 0.0, start_speed])


def _scale(rotor: OneMassRotor, count: int) -> Floats:
    """Return the size of each part of the state, for tolerances."""
    size = max(rotor.eccentricity, abs(rotor.bow), 1e-12)
    scale = np.full(count, size * max(rotor.natural_frequency, 1.0))
    scale[: count - 2 : 2] = size
    scale[-2:] = 1.0, rotor.natural_frequency
    return scale


def highest(record: RestRecord) -> tuple[float, float, float]:
    """Return amplitude in m, time in s and speed in rad/s of the largest |z| of a record."""
    size = np.abs(record.displacement)
    i = int(np.argmax(size))
    if not 0 < i < size.size - 1:
        return float(size[i]), float(record.time[i]), float(record.speed[i])
    left, middle, right = (float(v) for v in size[i - 1 : i + 2])
    bend = left - 2.0 * middle + right
    off = 0.5 * (left - right) / bend if bend < 0.0 else 0.0
    time = float(record.time[i] + off * (record.time[1] - record.time[0]))
    top = middle - 0.25 * (left - right) * off
    return top, time, float(np.interp(time, record.time, record.speed))


def dissipated(rotor: OneMassRotor, record: RestRecord) -> float | None:
    """Return the energy in J that the damping took, summed over a record.

    None on flexible supports and with internal damping, whose share is not in the record.
    """
    if rotor.support is not None or rotor.internal_damping:
        return None
    return float(np.trapezoid(rotor.damping * np.abs(record.velocity) ** 2, record.time))


def passes(rotor: OneMassRotor, inertia: float, net: Torque, critical: float) -> bool:
    """Tell whether a run from steady whirl gets from 0.85 to 1.2 times the critical speed.

    It is looked at window by window, each long enough for a transient whirl to die out; a window
    in which the speed gains less than 1e-4 of the critical speed is a stall.

    Parameters
    ----------
    rotor, inertia, net
        As of :func:`rest_record`; the rotor has damping.
    critical
        Critical speed in rad/s.
    """
    start_speed, target = 0.85 * critical, 1.2 * critical
    rates, state = _equations(rotor, inertia, net, start_speed)
    window = 8.0 / (rotor.damping_ratio * rotor.natural_frequency)

    def there(_: float, state: Any) -> float:
        return float(state[-1]) - target

    there.terminal = True  # type: ignore[attr-defined]
    while True:
        found: Any = solve_ivp(
            rates,
            (0.0, window),
            state,
            method="LSODA",
            events=there,
            rtol=1e-7,
            atol=1e-7 * _scale(rotor, state.size),
        )
        if found.t_events[0].size:
            return True
        if found.y[-1, -1] - state[-1] < 1e-4 * critical:
            return False
        state = found.y[:, -1]
