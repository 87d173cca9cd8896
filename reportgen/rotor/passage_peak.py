"""Highest amplitude on the way through the critical speed, refined between instants.

Between instants |z| beats at up to Ω + ωₙ, so that a plain sampling of a long programme would cost
millions of points. The smooth size of the forced motion and the sizes of the free motions add up
to a bound on |z| that never oscillates. It is taken on a coarse grid; only where it reaches the
best amplitude seen is the motion sampled finely, and the best local maxima are then narrowed down.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from reportgen.errors import ModelError
from reportgen.rotor.onemass_model import OneMassRotor
from reportgen.rotor.onemass_peak import Peak, resonance_peak, resonance_peaks
from reportgen.rotor.passage_exact import Track, WhirlState
from reportgen.rotor.passage_kernel import Floats, is_past, ringing, swept
from reportgen.rotor.passage_programme import Programme, Segment, speed_range

_PER_PERIOD = 16
_MOST_SAMPLES = 20_000_000
_CHUNK = 50_000
# A beat sampled 16 times a period is missed by at most 1 − cos(π/16) = 2 % of its part.
_CLOSE = 0.95
_COARSE_MARGIN = 1.02


@dataclass(frozen=True)
class PassagePeak:
    """Highest amplitude during a speed programme.

    Parameters
    ----------
    amplitude
        Highest distance of the disc from the bearing line [m] (0-peak).
    speed
        Speed of rotation at that instant [rad/s].
    time
        That instant [s].
    steady_peak
        Highest peak of the steady response within the programme's speeds [m] (0-peak), or at any
        speed if none is within; infinite without damping, None if there is none.
    ratio
        amplitude / steady_peak [-]; None if there is no steady peak.
    crossed
        Whether the programme takes the rotor through a critical speed (that of a steady peak) and
        past the highest amplitude. If not, `amplitude` is no passage.
    reason
        Why not, or what else is to be said; otherwise empty.
    """

    amplitude: float
    speed: float
    time: float
    steady_peak: float | None
    ratio: float | None
    crossed: bool
    reason: str = ""


def passage_peak(
    rotor: OneMassRotor, programme: Programme, start: WhirlState | None = None
) -> PassagePeak:
    """Highest amplitude of the disc during a speed programme, and whether it is a passage.

    Parameters
    ----------
    rotor
        The rotor, as in `passage`.
    programme
        The speed programme.
    start
        Motion at its start; the steady whirl at the start speed if not given.

    Returns
    -------
    PassagePeak
        Amplitude to 1e-9 relative, from the closed form at instants narrowed to 1e-5 of the
        fastest beat.

    Raises
    ------
    ModelError
        As in `passage`, if the rotor has neither unbalance nor bow, or if the search would need
        more than 20 million instants (a very long dwell without damping).
    """
    amplitude, time, speed = _highest(Track(rotor, programme, start))
    return judged_peak(rotor, programme, amplitude, time, speed)


def judged_peak(
    rotor: OneMassRotor, programme: Programme, amplitude: float, time: float, speed: float
) -> PassagePeak:
    """Set a highest amplitude beside the steady peak, and judge whether it is a passage."""
    criticals = resonance_peaks(rotor)
    low, high = speed_range(programme)
    passed = [peak for peak in criticals if low < (peak.speed or 0.0) < high]
    steady = max((peak.amplitude or 0.0 for peak in passed or criticals), default=None)
    ratio = None if steady is None else amplitude / steady
    if not criticals:
        crossed, reason = (
            False,
            f"there is no critical speed to pass: {resonance_peak(rotor).reason}",
        )
    elif not passed:
        crossed, reason = (
            False,
            (
                f"the critical speed {_listed(criticals)} rad/s is not within the programme's "
                f"{low:.6g} to {high:.6g} rad/s: this is no passage"
            ),
        )
    else:
        crossed, reason = _verdict(programme, time)
        missed = [peak for peak in criticals if peak not in passed]
        if missed and not reason:
            reason = f"the critical speed {_listed(missed)} rad/s lies outside the programme"
    return PassagePeak(amplitude, speed, time, steady, ratio, crossed, reason)


def _listed(peaks: Sequence[Peak]) -> str:
    return " and ".join(f"{peak.speed:.6g}" for peak in peaks)


def _verdict(programme: Programme, time: float) -> tuple[bool, str]:
    first, last = programme.start_time, programme.end_time
    slack = 1e-6 * (last - first)
    if time >= last - slack:
        return False, (
            "the highest amplitude is that at the end of the programme, where it may still rise; "
            "extend the programme or hold its end speed longer"
        )
    if time <= first + slack:
        return True, "the highest amplitude is that at the start; the passage stays below it"
    return True, ""


def _highest(track: Track) -> tuple[float, float, float]:
    """Highest amplitude [m], its time [s] and speed [rad/s]."""
    coarse = [_Bound(track, number) for number in range(len(track.pieces))]
    level = max(float(bound.amplitude.max()) for bound in coarse)
    best = (-1.0, 0.0, 0.0)
    for number, bound in enumerate(coarse):
        starts, ends = bound.brackets(level)
        if starts.size == 0:
            continue
        elapsed, amplitude = _narrowed(track, number, starts, ends)
        if amplitude > best[0]:
            piece = track.pieces[number]
            speed = float(piece.speed(np.asarray(elapsed)))
            best = (amplitude, piece.start_time + elapsed, speed)
    return best


class _Bound:
    """A bound on |z| over one piece that does not oscillate, on a coarse grid."""

    def __init__(self, track: Track, number: int) -> None:
        self.track, self.number = track, number
        self.piece = track.pieces[number]
        self.grid = _coarse_grid(track, self.piece)
        self.amplitude = track.distance(number, self.grid)
        forced, self.free = self._sizes()
        self.size = forced + self.free

    def _sizes(self) -> tuple[Floats, Floats]:
        modes = self.track.modes
        gain = (modes.vectors[0] * modes.drive)[:, None]
        offset, free = self.track.offset(self.number, self.grid)
        own = (modes.vectors[0] * self.track.free[self.number])[:, None]
        if self.piece.acceleration == 0.0:
            if float(np.abs(offset).min()) < 1e-12:
                # Undamped dwell on a critical: it grows without end, so any bound must too.
                return np.full(self.grid.size, np.inf), np.full(self.grid.size, np.inf)
            left = own - gain / offset * np.exp(1j * self.piece.start_angle)
            steady = np.abs((gain / offset).sum(axis=0) - modes.eccentricity)
            return steady, np.asarray(np.abs(left * free).sum(axis=0))
        scaled = self.track.scaled_acceleration(self.number)
        forced = gain * swept(offset, scaled, is_past(offset, scaled))
        whirl = np.abs(forced.sum(axis=0) - modes.eccentricity)
        turning = np.exp(1j * (self.piece.start_angle + self.piece.turned(self.grid)))
        early = ~self.track.late[self.number][:, None]
        left = own * free + np.where(early, gain * ringing(offset, scaled) * turning, 0.0)
        return whirl, np.asarray(np.abs(left).sum(axis=0))

    def brackets(self, level: float) -> tuple[Floats, Floats]:
        """Intervals, fine enough to hold one maximum each, where |z| may exceed the level."""
        grid = self.grid
        reach = np.maximum(self.size[:-1], self.size[1:]) * _COARSE_MARGIN >= level
        beats = np.maximum(self.free[:-1], self.free[1:]) > 1e-10 * level
        lengths = np.diff(grid)
        piece = self.piece
        fastest = max(piece.start_speed, piece.end_speed)
        fastest += float(np.abs(self.track.modes.rate.imag).max()) * self.track.modes.frequency
        step = 2.0 * math.pi / (_PER_PERIOD * fastest)
        pieces = np.where(beats, np.ceil(lengths / step), 1.0)[reach]
        if pieces.sum() > _MOST_SAMPLES:
            raise ModelError(
                f"the search for the peak would need {pieces.sum():.3g} instants; shorten the "
                "dwell or give the rotor damping"
            )
        starts = _subdivided(grid[:-1][reach], lengths[reach], pieces.astype(np.intp))
        ends = _subdivided(grid[:-1][reach], lengths[reach], pieces.astype(np.intp), after=1)
        return starts, ends


def _subdivided(
    starts: Floats, lengths: Floats, pieces: NDArray[np.intp], after: int = 0
) -> Floats:
    first = np.repeat(np.cumsum(pieces) - pieces, pieces)
    place = np.arange(int(pieces.sum())) - first + after
    return np.asarray(np.repeat(starts, pieces) + place * np.repeat(lengths / pieces, pieces))


def _coarse_grid(track: Track, piece: Segment) -> Floats:
    """Give times over a piece, dense where its speed passes a natural frequency."""
    if piece.acceleration == 0.0:
        longest = piece.duration
        fades = [1.0 / max(-float(s.real), 1e-9) for s in track.modes.rate]
        fade = min(max(fades) / track.modes.frequency, longest)
        early = longest * np.geomspace(max(1e-3 * fade / longest, 1e-12), 1.0, 120)
        return np.unique(np.concatenate([[0.0], early, np.linspace(0.0, longest, 60)]))
    scale = abs(piece.acceleration) / track.modes.frequency**2
    # The free motion fades in time whatever the speed does, so the start is dense as well.
    parts = [
        np.linspace(0.0, piece.duration, 200),
        piece.duration * np.geomspace(1e-6, 1.0, 100),
    ]
    for s in track.modes.rate:
        width = math.sqrt(scale) + abs(float(s.real))
        spread = width * np.sinh(np.linspace(-9.0, 9.0, 361))
        speed = (abs(float(s.imag)) + spread) * track.modes.frequency
        parts.append((speed - piece.start_speed) / piece.acceleration)
    times = np.unique(np.concatenate(parts))
    return times[(times >= 0.0) & (times <= piece.duration)]


def _narrowed(track: Track, number: int, starts: Floats, ends: Floats) -> tuple[float, float]:
    """Time and size of the highest |z| over intervals that each hold at most one maximum."""
    middles = 0.5 * (starts + ends)
    sizes = np.concatenate(
        [track.distance(number, middles[at : at + _CHUNK]) for at in range(0, middles.size, _CHUNK)]
    )
    chosen = np.flatnonzero(sizes >= _CLOSE * sizes.max())
    chosen = chosen[np.argsort(sizes[chosen])[::-1][:400]]
    duration = track.pieces[number].duration
    low = np.maximum(starts[chosen] - (ends - starts)[chosen], 0.0)
    high = np.minimum(ends[chosen] + (ends - starts)[chosen], duration)
    share = np.linspace(0.0, 1.0, 17)
    for _ in range(6):
        times = low[:, None] + (high - low)[:, None] * share
        values = track.distance(number, times.ravel()).reshape(times.shape)
        # Keep the best eighth as the field narrows.
        top = np.argmax(values, axis=1)
        rows = np.arange(low.size)
        keep = np.argsort(values[rows, top])[::-1][: max(8, low.size // 8)]
        low = times[keep, np.maximum(top[keep] - 1, 0)]
        high = times[keep, np.minimum(top[keep] + 1, share.size - 1)]
    best = np.unravel_index(int(np.argmax(values)), values.shape)
    return float(times[best]), float(values[best])
