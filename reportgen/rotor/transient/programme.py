"""Speed against time as every passage reads it: given, tabulated, or from a run under torque."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Protocol

import numpy as np
from numpy.typing import ArrayLike
from scipy.interpolate import CubicHermiteSpline, PPoly

from reportgen.errors import ModelError
from reportgen.rotor.passage_programme import Programme, speed_range
from reportgen.rotor.transient.coupled import Floats
from reportgen.rotor.transient.torque_result import TorqueRun


class SpeedProgramme(Protocol):
    """Speed [rad/s], angle [rad] and angular acceleration [rad/s²] at instants [s]."""

    @property
    def start_time(self) -> float:
        """Time at the start [s]."""
        ...

    @property
    def end_time(self) -> float:
        """Time at the end [s]."""
        ...

    @property
    def speeds(self) -> tuple[float, float]:
        """Least and greatest speed [rad/s]."""
        ...

    def speed(self, times: ArrayLike) -> Floats:
        """Speed of rotation at instants [rad/s]."""
        ...

    def angle(self, times: ArrayLike) -> Floats:
        """Angle of the rotor at instants [rad]."""
        ...

    def acceleration(self, times: ArrayLike) -> Floats:
        """Angular acceleration at instants [rad/s²]; that of the later piece where two meet."""
        ...


class Prescribed:
    """A programme of piecewise-constant acceleration.

    Parameters
    ----------
    programme
        `ConstantAcceleration`, or `PiecewiseAcceleration` for a table of speed against time.
    """

    def __init__(self, programme: Programme) -> None:
        self.pieces = programme.segments
        self._starts = np.array([piece.start_time for piece in self.pieces])
        self._speeds = np.array([piece.start_speed for piece in self.pieces])
        self._rates = np.array([piece.acceleration for piece in self.pieces])
        self._angles = np.array([piece.start_angle for piece in self.pieces])
        self.speeds = speed_range(programme)

    @property
    def start_time(self) -> float:
        """Time at the start [s]."""
        return self.pieces[0].start_time

    @property
    def end_time(self) -> float:
        """Time at the end [s]."""
        return self.pieces[-1].end_time

    def speed(self, times: ArrayLike) -> Floats:
        """Speed of rotation at instants [rad/s]."""
        number, elapsed = self._place(times)
        return np.asarray(self._speeds[number] + self._rates[number] * elapsed)

    def angle(self, times: ArrayLike) -> Floats:
        """Angle of the rotor at instants [rad]."""
        number, elapsed = self._place(times)
        turned = (self._speeds[number] + 0.5 * self._rates[number] * elapsed) * elapsed
        return np.asarray(self._angles[number] + turned)

    def acceleration(self, times: ArrayLike) -> Floats:
        """Angular acceleration at instants [rad/s²]."""
        return np.asarray(self._rates[self._place(times)[0]])

    def _place(self, times: ArrayLike) -> tuple[np.ndarray, Floats]:
        instants = np.asarray(times, dtype=np.float64)
        number = np.searchsorted(self._starts, instants, side="right") - 1
        number = np.clip(number, 0, len(self.pieces) - 1)
        return number, instants - self._starts[number]


@dataclass(frozen=True, eq=False)
class Recorded:
    """Speed known at instants with its rate, smooth between: a run under torque, or a record.

    Parameters
    ----------
    time
        Instants [s], increasing, shape (n,).
    rate
        Speed at them [rad/s].
    gain
        Angular acceleration at them [rad/s²].
    start_angle
        Angle at the first [rad].
    """

    time: ArrayLike
    rate: ArrayLike
    gain: ArrayLike
    start_angle: float = 0.0
    _curve: CubicHermiteSpline = field(init=False, repr=False)
    _turned: PPoly = field(init=False, repr=False)
    _gained: PPoly = field(init=False, repr=False)

    def __post_init__(self) -> None:
        time, rate, gain = (np.asarray(v, np.float64) for v in (self.time, self.rate, self.gain))
        if time.ndim != 1 or time.size < 2 or rate.shape != time.shape or gain.shape != time.shape:
            raise ModelError("a record needs two or more instants with speed and acceleration")
        if not all(np.all(np.isfinite(v)) for v in (time, rate, gain)):
            raise ModelError("a record holds a value that is not finite")
        if np.any(np.diff(time) <= 0.0):
            row = int(np.argmax(np.diff(time) <= 0.0)) + 2
            raise ModelError(
                f"instant {row} of the record does not come after instant {row - 1}; sort the "
                "rows by time and drop repeated times"
            )
        curve = CubicHermiteSpline(time, rate, gain)
        object.__setattr__(self, "_curve", curve)
        object.__setattr__(self, "_turned", curve.antiderivative())
        object.__setattr__(self, "_gained", curve.derivative())

    @property
    def start_time(self) -> float:
        """Time at the start [s]."""
        return float(np.asarray(self.time)[0])

    @property
    def end_time(self) -> float:
        """Time at the end [s]."""
        return float(np.asarray(self.time)[-1])

    @property
    def speeds(self) -> tuple[float, float]:
        """Least and greatest speed [rad/s]."""
        rate = np.asarray(self.rate)
        return float(rate.min()), float(rate.max())

    def speed(self, times: ArrayLike) -> Floats:
        """Speed of rotation at instants [rad/s]."""
        return np.asarray(self._curve(np.asarray(times, np.float64)))

    def angle(self, times: ArrayLike) -> Floats:
        """Angle of the rotor at instants [rad]."""
        return np.asarray(self.start_angle + self._turned(np.asarray(times, np.float64)))

    def acceleration(self, times: ArrayLike) -> Floats:
        """Angular acceleration at instants [rad/s²]."""
        return np.asarray(self._gained(np.asarray(times, np.float64)))


def of_run(run: TorqueRun) -> Recorded:
    """Give the speed programme that a one-mass run under torque followed, whirl and all."""
    return Recorded(run.time, run.speed, run.acceleration, float(run.angle[0]))
