"""Passage of the one-mass rotor by step-by-step integration: the second way to the same motion.

The equations of motion are integrated as they stand, in the displacement of the disc and of the
shaft ends, by the explicit Runge-Kutta method of order 8 of Dormand & Prince (Hairer, Nørsett &
Wanner 1993). Nothing is shared with the closed form. It also covers internal damping, which the
closed form does not: its force −c_i (ż − iθ̇z) has a coefficient that changes with the speed.
"""

from __future__ import annotations

import cmath
import math

import numpy as np
from numpy.typing import ArrayLike
from scipy.integrate import solve_ivp

from reportgen.errors import ModelError
from reportgen.rotor.onemass_model import IsotropicSupport, OneMassRotor
from reportgen.rotor.onemass_response import response, support_response
from reportgen.rotor.passage_exact import Passage, WhirlState, instants_within
from reportgen.rotor.passage_kernel import Complexes
from reportgen.rotor.passage_programme import Programme, Segment

MOST_CYCLES = 200_000
"""Turns and free cycles in one integration; more would take hours."""


def passage_integrated(
    rotor: OneMassRotor,
    programme: Programme,
    times: ArrayLike,
    start: WhirlState | None = None,
    rtol: float = 1e-10,
) -> Passage:
    """Whirl of the disc through a speed programme, by numerical integration.

    Parameters
    ----------
    rotor
        The rotor, with internal damping if it has any.
    programme
        The speed programme.
    times
        Instants within the programme [s], shape (n,), in increasing order.
    start
        Motion at its start; the steady whirl at the start speed if not given.
    rtol
        Error allowed in a step, relative, within [1e-12, 1e-3].

    Returns
    -------
    Passage
        As from `passage`. The error grows with the number of cycles; at 1e-10 it stays near 1e-8
        of the peak over some hundred turns.

    Raises
    ------
    ModelError
        If the instants do not increase or leave the programme, `rtol` is out of range, or the
        programme holds more than 200,000 turns and free cycles.
    """
    if not 1e-12 <= rtol <= 1e-3:
        raise ModelError(f"rtol is {rtol:g}; it must be within 1e-12 and 1e-3")
    instants = instants_within(times, programme)
    if np.any(np.diff(instants) < 0.0):
        raise ModelError("times must be in increasing order")
    _require_feasible(rotor, programme)
    state = _first(rotor, programme, start)
    size = max(rotor.eccentricity, rotor.bow, float(np.abs(state[0])), 1e-12)
    scale = np.array([1.0, rotor.natural_frequency, 1.0, rotor.natural_frequency])[: state.size]
    columns, speeds, angles = [], [], []
    for number, piece in enumerate(programme.segments):
        after = instants > piece.start_time if number else instants >= piece.start_time
        mine = instants[after & (instants <= piece.end_time)] - piece.start_time
        mine = np.minimum(mine, piece.duration)
        solution = solve_ivp(
            _Motion(rotor, piece),
            (0.0, piece.duration),
            state,
            method="DOP853",
            t_eval=np.unique(np.append(mine, piece.duration)),
            rtol=rtol,
            atol=rtol * size * scale,
        )
        if not solution.success:
            raise ModelError(f"the integration stopped: {solution.message}")
        state = solution.y[:, -1]
        columns.append(solution.y[:2, np.searchsorted(solution.t, mine)])
        speeds.append(piece.speed(mine))
        angles.append(piece.start_angle + piece.turned(mine))
    motion = np.concatenate(columns, axis=1)
    return Passage(instants, np.concatenate(speeds), np.concatenate(angles), motion[0], motion[1])


class _Motion:
    """Right-hand side of the equations of motion on one piece of a programme."""

    def __init__(self, rotor: OneMassRotor, piece: Segment) -> None:
        self.rotor, self.piece = rotor, piece
        self.damping, self.bow = rotor.damping, rotor.bow_vector

    def __call__(self, elapsed: float, state: Complexes) -> Complexes:
        rotor, piece = self.rotor, self.piece
        speed = piece.start_speed + piece.acceleration * elapsed
        turned = (piece.start_speed + 0.5 * piece.acceleration * elapsed) * elapsed
        turning = cmath.exp(1j * (piece.start_angle + turned))
        v = complex(state[1])
        unbalance = rotor.mass * rotor.eccentricity * (speed**2 - 1j * piece.acceleration)
        ends, own_rates = self._shaft(state, speed, self.bow * turning)
        acceleration = (unbalance * turning - self.damping * v - ends) / rotor.mass
        return np.array([v, acceleration, *own_rates])

    def _shaft(
        self, state: Complexes, speed: float, bow: complex
    ) -> tuple[complex, tuple[complex, ...]]:
        """Force of the shaft on its ends, and the rates of the shaft ends' own motion."""
        rotor, own = self.rotor, self.rotor.support
        k, inner = rotor.stiffness, rotor.internal_damping
        z, v = complex(state[0]), complex(state[1])
        if own is None:
            return k * (z - bow) + inner * (v - 1j * speed * z), ()
        if _is_bare(rotor, own):
            return k * own.stiffness / (k + own.stiffness) * (z - bow), ()
        y = complex(state[2])
        carried = k * (z - y - bow) + inner * (v - 1j * speed * (z - y))
        if own.mass > 0.0:
            u = complex(state[3])
            force = carried - inner * u
            return force, (u, (force - own.stiffness * y - own.damping * u) / own.mass)
        u = (carried - own.stiffness * y) / (own.damping + inner)
        return carried - inner * u, (u,)


def _is_bare(rotor: OneMassRotor, own: IsotropicSupport) -> bool:
    return own.mass == 0.0 and own.damping + rotor.internal_damping == 0.0


def _first(rotor: OneMassRotor, programme: Programme, start: WhirlState | None) -> Complexes:
    piece = programme.segments[0]
    if start is None:
        turning = cmath.exp(1j * piece.start_angle)
        z = complex(response(rotor, piece.start_speed)) * turning
        y = complex(support_response(rotor, piece.start_speed)) * turning
        spin = 1j * piece.start_speed
        start = WhirlState(z, spin * z, y, spin * y)
    motion = [start.displacement, start.velocity]
    if rotor.support is not None and not _is_bare(rotor, rotor.support):
        motion.append(start.support_displacement)
        if rotor.support.mass > 0.0:
            motion.append(start.support_velocity)
    return np.array(motion, dtype=np.complex128)


def _require_feasible(rotor: OneMassRotor, programme: Programme) -> None:
    first, last = programme.segments[0], programme.segments[-1]
    turned = last.start_angle + float(last.turned(np.asarray(last.duration))) - first.start_angle
    free = rotor.natural_frequency * (last.end_time - first.start_time)
    cycles = (turned + free) / (2.0 * math.pi)
    if cycles > MOST_CYCLES:
        raise ModelError(
            f"the programme holds {cycles:.3g} turns and free cycles; integration covers "
            f"{MOST_CYCLES:,}. Use the closed form or shorten the programme"
        )
