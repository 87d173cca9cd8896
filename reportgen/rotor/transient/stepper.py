"""Stepping the coupled equations until something happens: a speed reached, a capture, the end."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from scipy.integrate import DOP853
from scipy.optimize import brentq

from reportgen.errors import ModelError
from reportgen.rotor.transient.coupled import ANGLE, SPEED, Complexes, CoupledRotor, Torque

REACHED, CAPTURED, OUT_OF_TIME = "reached", "captured", "out of time"

_STILL = 1e-6
"""A speed whose best has risen by less than this share in two windows hangs."""


@dataclass(frozen=True)
class Leg:
    """One leg of a run: torques and the speed [rad/s] at which it ends.

    the speed counts as caught after two ``window`` [s] without progress, of which the second
    tells where it hangs; ``longest`` the time after which to give up [s].
    """

    drive: Torque
    load: Torque
    until: float
    window: float
    longest: float


@dataclass
class Track:
    """States and rates at the ends of the steps taken, in order of time."""

    time: list[float] = field(default_factory=list)
    state: list[Complexes] = field(default_factory=list)
    rate: list[Complexes] = field(default_factory=list)

    def add(self, time: float, state: Complexes, rate: Complexes) -> None:
        """Keep one step's end."""
        self.time.append(time)
        self.state.append(state.copy())
        self.rate.append(rate.copy())


def run_leg(
    coupled: CoupledRotor,
    leg: Leg,
    track: Track,
    rtol: float,
    progress: Callable[[float], None] | None = None,
) -> str:
    """Integrate one leg from the last state of a track, and tell how it ended.

    Explicit Runge-Kutta of order 8 (Dormand & Prince; Hairer, Nørsett & Wanner 1993); the end is
    placed on its interpolant to 1e-12.
    """
    rates = coupled.rates(leg.drive, leg.load)
    begin, first = track.time[-1], track.state[-1]
    way = 1.0 if leg.until > first[SPEED].real else -1.0
    turns = _Turns(first[ANGLE].real, progress)
    track.rate[-1] = rates(begin, first)
    solver: Any = DOP853(
        rates,
        begin,
        first,
        begin + leg.longest,
        rtol=rtol,
        atol=rtol * coupled.scale(),  # type: ignore[arg-type]
        max_step=leg.window / 20.0,
    )
    best, since = first[SPEED].real, begin
    while solver.status == "running":
        message = solver.step()
        if solver.status == "failed":
            raise ModelError(f"the integration of the coupled equations stopped: {message}")
        speed = float(solver.y[SPEED].real)
        if way * (speed - leg.until) >= 0.0:
            _end_at(leg.until, solver, rates, track)
            return REACHED
        track.add(solver.t, solver.y, solver.f)
        turns.show(solver.y[ANGLE].real)
        if way * (speed - best) > _STILL * abs(best):
            best, since = speed, solver.t
        elif solver.t - since > 2.0 * leg.window:
            return CAPTURED
    return OUT_OF_TIME


def _end_at(
    speed: float,
    solver: Any,
    rates: Callable[[float, Complexes], Complexes],
    track: Track,
) -> None:
    dense = solver.dense_output()

    def off(time: float) -> float:
        return float(dense(time)[SPEED].real) - speed

    last = float(solver.t)
    if off(last) != 0.0:
        last = float(brentq(off, solver.t_old, solver.t, xtol=1e-12 * max(1.0, abs(solver.t))))
    state = np.asarray(dense(last), dtype=np.complex128)
    track.add(last, state, rates(last, state))


class _Turns:
    """Tell a progress callback the turns done, now and then."""

    def __init__(self, angle: float, progress: Callable[[float], None] | None) -> None:
        self.angle, self.progress, self.calls = angle, progress, 0

    def show(self, angle: float) -> None:
        self.calls += 1
        if self.progress is not None and self.calls % 200 == 0:
            self.progress((float(angle) - self.angle) / (2.0 * math.pi))
