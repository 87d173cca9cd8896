"""Critical speeds and amplification factors read off a recorded run."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.signal import find_peaks

from reportgen.criteria.check import finite, not_negative
from reportgen.errors import ModelError

# A local maximum that rises less than this share of the largest amplitude above its
# surroundings is taken for noise.
_PROMINENCE = 0.1
# Fewer readings than this within the half-power band, and straight lines between them no
# longer follow the peak.
_FEWEST_IN_BAND = 5


@dataclass(frozen=True)
class Record:
    """Amplitude and phase lag of the synchronous vibration against speed.

    Parameters
    ----------
    speed
        Rising or falling throughout [rad/s], shape (n,), n ≥ 5, above zero.
    amplitude
        Not negative, any measure and unit, shape (n,).
    phase
        Phase lag [rad], shape (n,), with or without jumps of a whole turn; None where
        not recorded.

    Raises
    ------
    ModelError
        If shapes differ, a number is not finite, the speed turns back, or the record is
        too short.

    Notes
    -----
    The arrays are kept in rising order of speed, the phase without jumps.
    """

    speed: NDArray[np.float64]
    amplitude: NDArray[np.float64]
    phase: NDArray[np.float64] | None = None

    def __post_init__(self) -> None:
        """Check the columns and put them in rising order of speed."""
        speed = _column("speed", self.speed)
        amplitude = _column("amplitude", self.amplitude)
        phase = None if self.phase is None else _column("phase", self.phase)
        if len({column.size for column in (speed, amplitude, phase) if column is not None}) > 1:
            raise ModelError("the columns of the record differ in length; each reading needs all")
        if speed.size < 5:
            raise ModelError(f"the record holds {speed.size} readings; a peak needs at least 5")
        if speed[0] > speed[-1]:
            speed, amplitude = speed[::-1], amplitude[::-1]
            phase = None if phase is None else phase[::-1]
        turns = np.flatnonzero(np.diff(speed) <= 0.0)
        if turns.size:
            raise ModelError(
                f"the speed of the record turns back or stands still at reading {turns[0] + 2}, in "
                "rising order; hand over one run up or one run down, one reading a speed"
            )
        if speed[0] <= 0.0:
            raise ModelError(f"the lowest speed recorded is {speed[0]:g}; it must be above zero")
        if amplitude.min() < 0.0:
            raise ModelError(f"an amplitude recorded is {amplitude.min():g}; none is below zero")
        object.__setattr__(self, "speed", speed)
        object.__setattr__(self, "amplitude", amplitude)
        object.__setattr__(self, "phase", None if phase is None else np.unwrap(phase))


@dataclass(frozen=True)
class RecordedPeak:
    """One peak of a record.

    Parameters
    ----------
    speed, amplitude
        At the top of the parabola through the three highest readings.
    amplification
        AF = N_c/(N₂ − N₁) at 0.707 of the peak; None for the reason ``reason``.
    lower, upper
        N₁ and N₂ [rad/s]; None where the curve does not fall that far.
    turn
        By how much the phase lag grows from N₁ to N₂ [rad], about 1.57 for one mode; None
        where not recorded or a half-power speed is missing.
    reason
        Why there is no amplification factor; empty where there is one.
    """

    speed: float
    amplitude: float
    amplification: float | None
    lower: float | None
    upper: float | None
    turn: float | None
    reason: str = ""


def without_runout(record: Record, amplitude: float, lag: float) -> Record:
    """Return the record less a slow-roll vector, subtracted as a vector.

    Parameters
    ----------
    record
        With its phase.
    amplitude, lag
        Slow-roll vector: amplitude as in the record, phase lag [rad].

    Raises
    ------
    ModelError
        If the record holds no phase, or a number is not finite or the amplitude negative.
    """
    if record.phase is None:
        raise ModelError("the record holds no phase; runout can only be subtracted as a vector")
    roll = not_negative("slow-roll amplitude", amplitude)
    vector = record.amplitude * np.exp(-1j * record.phase)
    vector = vector - roll * np.exp(-1j * finite("slow-roll phase", lag))
    return Record(record.speed, np.abs(vector), -np.angle(vector))


def recorded_peaks(record: Record) -> list[RecordedPeak]:
    """Return the peaks of a record in rising order of speed.

    A peak stands out by at least a tenth of the largest amplitude. A rise that goes on to
    the end of the record is no peak.
    """
    largest = float(record.amplitude.max())
    if largest == 0.0:
        return []
    places, _ = find_peaks(record.amplitude, prominence=_PROMINENCE * largest)
    tops = [int(place) for place in places]
    return [_measure(record, place, [p for p in tops if p != place]) for place in tops]


def _column(name: str, values: ArrayLike) -> NDArray[np.float64]:
    column = np.array(values, dtype=np.float64)
    if column.ndim != 1:
        raise ModelError(f"the {name} of the record has {column.ndim} dimensions; it must have one")
    bad = np.flatnonzero(~np.isfinite(column))
    if bad.size:
        raise ModelError(f"the {name} of the record is no number at reading {bad[0] + 1}")
    return column


def _measure(record: Record, place: int, others: list[int]) -> RecordedPeak:
    speed, amplitude = _top(record, place)
    level = amplitude / math.sqrt(2.0)
    lower = _crossing(record, place, level, -1)
    upper = _crossing(record, place, level, +1)
    if lower is None or upper is None:
        side = "below" if lower is None else "above"
        why = f"the record does not fall to 0.707 of the peak {side} it"
        return RecordedPeak(speed, amplitude, None, lower, upper, None, why)
    turn = None
    if record.phase is not None:
        ends = np.interp([lower, upper], record.speed, record.phase)
        turn = float(ends[1] - ends[0])
    within = int(np.count_nonzero((record.speed > lower) & (record.speed < upper)))
    if any(lower < record.speed[other] < upper for other in others):
        why = "another peak lies within its half-power band"
        return RecordedPeak(speed, amplitude, None, lower, upper, turn, why)
    if within < _FEWEST_IN_BAND:
        why = f"the half-power band holds {within} readings, too few to draw the peak"
        return RecordedPeak(speed, amplitude, None, lower, upper, turn, why)
    return RecordedPeak(speed, amplitude, speed / (upper - lower), lower, upper, turn)


def _top(record: Record, place: int) -> tuple[float, float]:
    left, centre, right = (float(n) for n in record.speed[place - 1 : place + 2])
    before, top, after = (float(a) for a in record.amplitude[place - 1 : place + 2])
    rise, fall = (top - before) / (centre - left), (after - top) / (right - centre)
    bend = (fall - rise) / (right - left)
    if bend >= 0.0:  # a flat top: the reading in its middle is as good as any
        return centre, top
    slope = rise + bend * (centre - left)
    offset = -slope / (2.0 * bend)
    return centre + offset, top + 0.5 * slope * offset


def _crossing(record: Record, place: int, level: float, step: int) -> float | None:
    inner = place
    while 0 <= inner + step < record.amplitude.size:
        outer = inner + step
        if record.amplitude[outer] <= level:
            here, there = record.amplitude[inner], record.amplitude[outer]
            part = (here - level) / (here - there)
            return float(record.speed[inner] + part * (record.speed[outer] - record.speed[inner]))
        inner = outer
    return None
