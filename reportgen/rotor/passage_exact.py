"""Exact whirl of the one-mass rotor while its speed changes at piecewise-constant acceleration."""

from __future__ import annotations

import cmath
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.errors import ModelError
from reportgen.rotor import onemass_checks as check
from reportgen.rotor.onemass_model import OneMassRotor
from reportgen.rotor.passage_kernel import Complexes, Flags, Floats, dwelt, is_past, swept
from reportgen.rotor.passage_modes import Modes, modes_of
from reportgen.rotor.passage_programme import Programme, Segment

LEAST_ACCELERATION = 1e-10
GREATEST_ACCELERATION = 1e8
"""Range of |Ω̇|/ωₙ² covered; below it the angle runs to so many turns that its digits are lost."""


@dataclass(frozen=True)
class WhirlState:
    """Motion of the rotor at one instant, in the frame at rest.

    Parameters
    ----------
    displacement, velocity
        Of the disc, z [m] and ż [m/s].
    support_displacement, support_velocity
        Of the shaft ends [m], [m/s]; not used on rigid supports, the velocity not on massless ones.
    """

    displacement: complex
    velocity: complex
    support_displacement: complex = 0.0
    support_velocity: complex = 0.0

    def __post_init__(self) -> None:
        for name in ("displacement", "velocity", "support_displacement", "support_velocity"):
            if not cmath.isfinite(complex(getattr(self, name))):
                raise ModelError(f"start {name.replace('_', ' ')} is not a finite number")


AT_REST = WhirlState(0.0, 0.0)
"""Disc on the bearing line, not moving."""


@dataclass(frozen=True)
class Passage:
    """Whirl while the speed changes.

    Parameters
    ----------
    time
        Instants [s], shape (n,).
    speed
        Speed of rotation [rad/s], shape (n,).
    angle
        Angle of the unbalance from the horizontal [rad], shape (n,).
    displacement
        z = x + i·y of the disc [m], frame at rest, complex, shape (n,).
    velocity
        ż [m/s], complex, shape (n,).
    """

    time: NDArray[np.float64]
    speed: NDArray[np.float64]
    angle: NDArray[np.float64]
    displacement: NDArray[np.complex128]
    velocity: NDArray[np.complex128]

    @property
    def amplitude(self) -> NDArray[np.float64]:
        """Distance of the disc from the bearing line |z| [m] (0-peak)."""
        return np.asarray(np.abs(self.displacement))


def passage(
    rotor: OneMassRotor,
    programme: Programme,
    times: ArrayLike,
    start: WhirlState | None = None,
) -> Passage:
    """Whirl of the disc through a speed programme, in closed form.

    Solves m z̈ + c ż + k (z − y_s − b e^{iθ}) = m e (θ̇² − i θ̈) e^{iθ}, with y_s = 0 on rigid
    supports and the supports' own equation otherwise, for θ̈ constant on each piece of the
    programme. The external damping c acts against the frame at rest; the bow b turns with the
    shaft. Each mode's Duhamel integral of the quadratic phase is a Faddeeva function.

    Parameters
    ----------
    rotor
        The rotor, any damping ratio from 0, without internal damping.
    programme
        `ConstantAcceleration` or `PiecewiseAcceleration`; the state is carried over from piece to
        piece.
    times
        Instants within the programme [s], shape (n,), in any order.
    start
        Motion at the start of the programme; the steady whirl at the start speed if not given.

    Returns
    -------
    Passage
        Relative to the peak, exact to about 1e-16 times the angle turned in rad (1e-10 after
        150,000 turns), because the angle itself is a rounded number.

    Raises
    ------
    ModelError
        If an instant lies outside the programme, |θ̈|/ωₙ² outside [1e-10, 1e8], the rotor has
        internal damping, or the steady start is at an undamped critical speed.

    References
    ----------
    Lewis, F. M. (1932), Transactions of the ASME 54, 253-261 (the problem and its integral);
    Poppe, G. P. M. & Wijers, C. M. J. (1990), ACM TOMS 16, 38-46 (the Faddeeva function).
    """
    track = Track(rotor, programme, start)
    instants = instants_within(times, programme)
    speed, angle = np.empty(instants.size), np.empty(instants.size)
    displacement = np.empty(instants.size, dtype=np.complex128)
    velocity = np.empty(instants.size, dtype=np.complex128)
    owner = track.owner(instants)
    for number, piece in enumerate(programme.segments):
        mine = owner == number
        if not np.any(mine):
            continue
        elapsed = instants[mine] - piece.start_time
        speed[mine] = piece.speed(elapsed)
        angle[mine] = piece.start_angle + piece.turned(elapsed)
        displacement[mine], velocity[mine] = track.motion(number, elapsed)
    return Passage(instants, speed, angle, displacement, velocity)


class Track:
    """The modes of a rotor along a programme: where each piece starts, and the motion within it.

    Parameters
    ----------
    rotor, programme, start
        As in `passage`.

    Raises
    ------
    ModelError
        As in `passage`.
    """

    def __init__(
        self, rotor: OneMassRotor, programme: Programme, start: WhirlState | None = None
    ) -> None:
        self.modes: Modes = modes_of(rotor)
        self.pieces: tuple[Segment, ...] = programme.segments
        self._ends = np.array([piece.end_time for piece in self.pieces[:-1]])
        for piece in self.pieces:
            _require_range(piece, rotor)
        state = self._first(start)
        self.free: list[Complexes] = []
        self.late: list[Flags] = []
        for piece in self.pieces:
            self.late.append(self._late(piece))
            self.free.append(self._free(piece, state))
            end = np.asarray([piece.duration])
            state = self._amplitudes(len(self.free) - 1, end)[:, 0]

    def owner(self, times: Floats) -> NDArray[np.intp]:
        """Give the number of the piece each instant belongs to."""
        return np.searchsorted(self._ends, times, side="left")

    def motion(self, number: int, elapsed: Floats) -> tuple[Complexes, Complexes]:
        """Displacement [m] and velocity [m/s] of the disc a time after the start of a piece."""
        modes, piece = self.modes, self.pieces[number]
        turning = np.exp(1j * (piece.start_angle + piece.turned(elapsed)))
        amplitudes = self._amplitudes(number, elapsed)
        centre = modes.eccentricity * turning
        speed = 1j * piece.speed(elapsed)
        displacement = modes.vectors[0] @ amplitudes - modes.shift[0] * turning - centre
        velocity = modes.vectors[1] @ amplitudes - modes.shift[1] * turning
        return displacement, modes.frequency * velocity - speed * centre

    def distance(self, number: int, elapsed: Floats) -> Floats:
        """|z| [m] a time after the start of a piece."""
        return np.asarray(np.abs(self.motion(number, elapsed)[0]))

    def offset(self, number: int, elapsed: Floats) -> tuple[Complexes, Complexes]:
        """iΩ − s of each mode over ωₙ, and the free motion's growth e^{sT}, shapes (n, times)."""
        piece, rate = self.pieces[number], self.modes.rate[:, None]
        speed = piece.speed(elapsed) / self.modes.frequency
        return 1j * speed - rate, np.exp(rate * (self.modes.frequency * elapsed))

    def scaled_acceleration(self, number: int) -> float:
        """θ̈/ωₙ² on a piece."""
        return self.pieces[number].acceleration / self.modes.frequency**2

    def _amplitudes(self, number: int, elapsed: Floats) -> Complexes:
        """Each mode's q, shape (n, times)."""
        piece, modes = self.pieces[number], self.modes
        offset, free = self.offset(number, elapsed)
        turning = np.exp(1j * (piece.start_angle + piece.turned(elapsed)))
        if piece.acceleration == 0.0:
            forced = dwelt(offset, modes.frequency * elapsed)
        else:
            forced = swept(offset, self.scaled_acceleration(number), self.late[number][:, None])
        return np.asarray(
            modes.drive[:, None] * forced * turning + self.free[number][:, None] * free
        )

    def _late(self, piece: Segment) -> Flags:
        """Give which modes have their critical speed behind them at the start of a piece."""
        if piece.acceleration == 0.0:
            return np.zeros(self.modes.rate.size, dtype=np.bool_)
        offset = 1j * piece.start_speed / self.modes.frequency - self.modes.rate
        return is_past(offset, piece.acceleration / self.modes.frequency**2)

    def _free(self, piece: Segment, state: Complexes) -> Complexes:
        """Free motion that joins a piece's forced motion to the state at its start."""
        if piece.acceleration == 0.0:
            return state
        modes = self.modes
        offset = 1j * piece.start_speed / modes.frequency - modes.rate
        forced = swept(offset, piece.acceleration / modes.frequency**2, self.late[-1])
        return np.asarray(state - modes.drive * forced * cmath.exp(1j * piece.start_angle))

    def _first(self, start: WhirlState | None) -> Complexes:
        """State of each mode at the start of the programme."""
        modes, piece = self.modes, self.pieces[0]
        turning = cmath.exp(1j * piece.start_angle)
        if start is None:
            offset = 1j * piece.start_speed / modes.frequency - modes.rate
            if float(np.abs(offset).min()) < 1e-12:
                raise ModelError(
                    f"the programme starts at {piece.start_speed:g} rad/s, an undamped critical "
                    "speed, where there is no steady whirl; give the start state or damping"
                )
            return np.asarray(modes.drive / offset * turning)
        speed = 1j * piece.start_speed
        centre = modes.eccentricity * turning
        state = np.array(
            [
                start.displacement + centre,
                (start.velocity + speed * centre) / modes.frequency,
                start.support_displacement,
                start.support_velocity / modes.frequency,
            ][: modes.rate.size],
            dtype=np.complex128,
        )
        return np.asarray(modes.inverse @ (state + modes.shift * turning))


def instants_within(times: ArrayLike, programme: Programme) -> Floats:
    """Give instants as an array, or refuse those outside a programme."""
    instants = np.atleast_1d(np.asarray(times, dtype=np.float64))
    if instants.ndim != 1:
        raise ModelError("times must be a one-dimensional array of instants in s")
    if not np.all(np.isfinite(instants)):
        raise ModelError("times hold a value that is not finite")
    first, last = programme.start_time, programme.end_time
    slack = 1e-12 * max(abs(first), abs(last), last - first)
    if instants.size and (instants.min() < first - slack or instants.max() > last + slack):
        raise ModelError(
            f"times run from {instants.min():g} to {instants.max():g} s, the programme from "
            f"{first:g} to {last:g} s; stay within it, or let it hold its end speed longer"
        )
    return np.clip(instants, first, last)


def _require_range(piece: Segment, rotor: OneMassRotor) -> None:
    scaled = abs(piece.acceleration) / rotor.natural_frequency**2
    if scaled == 0.0:
        return
    check.finite("acceleration", piece.acceleration, "rad/s²")
    if scaled < LEAST_ACCELERATION:
        raise ModelError(
            f"an acceleration of {piece.acceleration:g} rad/s² is so slow for this rotor that the "
            "steady response is the answer; hold the speed or change it faster"
        )
    if scaled > GREATEST_ACCELERATION:
        raise ModelError(
            f"an acceleration of {piece.acceleration:g} rad/s² is beyond what the method covers; "
            "check its unit (rad/s²)"
        )
