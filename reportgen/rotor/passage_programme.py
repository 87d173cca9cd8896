"""Speed programmes of piecewise-constant angular acceleration."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.errors import ModelError
from reportgen.rotor import onemass_checks as check


@dataclass(frozen=True)
class Segment:
    """One piece of a programme, at constant angular acceleration.

    Parameters
    ----------
    start_time
        Time at its start [s].
    duration
        Its length [s], greater than 0.
    start_speed
        Speed at its start [rad/s].
    acceleration
        Angular acceleration [rad/s²], of either sign or 0.
    start_angle
        Angle of the rotor at its start [rad].
    """

    start_time: float
    duration: float
    start_speed: float
    acceleration: float
    start_angle: float

    @property
    def end_time(self) -> float:
        """Time at its end [s]."""
        return self.start_time + self.duration

    @property
    def end_speed(self) -> float:
        """Speed at its end [rad/s]."""
        return self.start_speed + self.acceleration * self.duration

    def speed(self, elapsed: NDArray[np.float64]) -> NDArray[np.float64]:
        """Speed after a time within the segment [rad/s]."""
        return np.asarray(self.start_speed + self.acceleration * elapsed)

    def turned(self, elapsed: NDArray[np.float64]) -> NDArray[np.float64]:
        """Angle turned since the start of the segment [rad]."""
        return np.asarray((self.start_speed + 0.5 * self.acceleration * elapsed) * elapsed)


@dataclass(frozen=True)
class ConstantAcceleration:
    """From one speed to another at constant angular acceleration.

    Parameters
    ----------
    start_speed, end_speed
        Speeds [rad/s], 0 or more and different.
    acceleration
        Angular acceleration [rad/s²], positive on run-up, negative on coast-down, not 0.
    start_time
        Time at the start [s].
    start_angle
        Angle of the unbalance from the horizontal at the start [rad].
    hold
        Time for which the end speed is held afterwards [s], 0 or more.

    Raises
    ------
    ModelError
        If a value is outside its range or the acceleration leads away from the end speed.
    """

    start_speed: float
    end_speed: float
    acceleration: float
    start_time: float = 0.0
    start_angle: float = 0.0
    hold: float = 0.0

    def __post_init__(self) -> None:
        check.not_negative("start speed", self.start_speed, "rad/s")
        check.not_negative("end speed", self.end_speed, "rad/s")
        check.finite("acceleration", self.acceleration, "rad/s²")
        check.finite("start time", self.start_time, "s")
        check.finite("start angle", self.start_angle, "rad")
        check.not_negative("hold", self.hold, "s")
        if self.acceleration == 0.0:
            raise ModelError("acceleration is 0: the speed stays; use the steady response")
        change = self.end_speed - self.start_speed
        if change * self.acceleration <= 0.0:
            raise ModelError(
                f"an acceleration of {self.acceleration:g} rad/s² does not lead from "
                f"{self.start_speed:g} to {self.end_speed:g} rad/s; change its sign or the speeds"
            )

    @property
    def segments(self) -> tuple[Segment, ...]:
        """The pieces of the programme in order of time."""
        duration = (self.end_speed - self.start_speed) / self.acceleration
        ramp = Segment(
            self.start_time, duration, self.start_speed, self.acceleration, self.start_angle
        )
        if self.hold == 0.0:
            return (ramp,)
        angle = self.start_angle + float(ramp.turned(np.asarray(duration)))
        return (ramp, Segment(ramp.end_time, self.hold, self.end_speed, 0.0, angle))

    @property
    def end_time(self) -> float:
        """Time at the end of the programme, with the hold [s]."""
        return self.segments[-1].end_time


@dataclass(frozen=True)
class PiecewiseAcceleration:
    """Speed that runs in straight lines between given points of time.

    Parameters
    ----------
    breakpoints
        Pairs of time [s], strictly increasing, and speed [rad/s], 0 or more; two or more pairs.
        Equal speeds in a row are a dwell.
    start_angle
        Angle of the unbalance from the horizontal at the start [rad].

    Raises
    ------
    ModelError
        If the pairs are fewer than two, not finite, not in order, or hold a negative speed; the
        message names the first pair at fault.
    """

    breakpoints: Sequence[tuple[float, float]]
    start_angle: float = 0.0
    segments: tuple[Segment, ...] = field(init=False, repr=False, compare=False)

    def __post_init__(self) -> None:
        check.finite("start angle", self.start_angle, "rad")
        pairs = _pairs(self.breakpoints)
        object.__setattr__(self, "breakpoints", tuple((t, w) for t, w in pairs.tolist()))
        object.__setattr__(self, "segments", tuple(_chain(pairs, self.start_angle)))

    @property
    def start_time(self) -> float:
        """Time of the first breakpoint [s]."""
        return self.segments[0].start_time

    @property
    def end_time(self) -> float:
        """Time of the last breakpoint [s]."""
        return self.breakpoints[-1][0]


Programme = ConstantAcceleration | PiecewiseAcceleration


def even_times(programme: Programme, count: int) -> NDArray[np.float64]:
    """Evenly spaced instants over a whole programme.

    Parameters
    ----------
    programme
        The speed programme.
    count
        Number of instants, 2 or more.

    Returns
    -------
    ndarray of float
        Times [s], both ends included.

    Raises
    ------
    ModelError
        If fewer than two instants are asked for.
    """
    if count < 2:
        raise ModelError(f"{count} instants were asked for; a programme needs 2 or more")
    return np.linspace(programme.start_time, programme.end_time, count)


def speed_range(programme: Programme) -> tuple[float, float]:
    """Least and greatest speed of a programme [rad/s]."""
    speeds = [s for piece in programme.segments for s in (piece.start_speed, piece.end_speed)]
    return min(speeds), max(speeds)


def _pairs(breakpoints: ArrayLike) -> NDArray[np.float64]:
    try:
        pairs = np.array(breakpoints, dtype=np.float64)
    except (TypeError, ValueError):
        raise ModelError("breakpoints must be pairs of time [s] and speed [rad/s]") from None
    if pairs.ndim != 2 or pairs.shape[1] != 2 or pairs.shape[0] < 2:
        raise ModelError("breakpoints must be two or more pairs of time [s] and speed [rad/s]")
    for number, (time, speed) in enumerate(pairs.tolist(), start=1):
        check.finite(f"time of breakpoint {number}", time, "s")
        check.not_negative(f"speed of breakpoint {number}", speed, "rad/s")
    back = np.flatnonzero(np.diff(pairs[:, 0]) <= 0.0)
    if back.size:
        at = int(back[0])
        raise ModelError(
            f"breakpoint {at + 2} at {pairs[at + 1, 0]:g} s does not come after breakpoint "
            f"{at + 1} at {pairs[at, 0]:g} s; sort the rows by time and drop repeated times"
        )
    return pairs


def _chain(pairs: NDArray[np.float64], angle: float) -> list[Segment]:
    pieces = []
    for (t0, w0), (t1, w1) in zip(pairs[:-1].tolist(), pairs[1:].tolist(), strict=True):
        pieces.append(Segment(t0, t1 - t0, w0, (w1 - w0) / (t1 - t0), angle))
        angle += 0.5 * (w0 + w1) * (t1 - t0)
    return pieces
