"""A passage of the rotor by stations: the reduced rotor stepped through a speed programme."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from reportgen.errors import ModelError
from reportgen.rotor.stations.model import Model
from reportgen.rotor.stations.response import Bow, Unbalance
from reportgen.rotor.transient.coupled import Complexes, Floats
from reportgen.rotor.transient.programme import SpeedProgramme
from reportgen.rotor.transient.propagate import Propagator, propagator, steps_of
from reportgen.rotor.transient.reduced import Reduced, exciting_loads, reduce_model, steady_modal

PER_TURN = 24
"""Steps to a turn at the highest speed; a parabola through three places a maximum to 10⁻⁴."""
MOST_STEPS = 1_500_000
"""About half a minute; the coordinates of more would not be kept."""
_CHUNK = 64
_BETWEEN = 16


@dataclass(frozen=True, eq=False)
class StationRun:
    """Motion of a reduced rotor at even instants.

    Parameters
    ----------
    reduced
        The rotor in modal coordinates, N of them.
    time, speed, angle
        Instants [s], speed [rad/s] and angle [rad] there, shape (n,).
    coordinates, rates
        Modal coordinates and their rates, shape (n, N).
    """

    reduced: Reduced
    time: Floats
    speed: Floats
    angle: Floats
    coordinates: Floats
    rates: Floats

    def displacement(self, station: int) -> Complexes:
        """Give x + iy [m] at a station of the rotor, shape (n,)."""
        x, y = self.reduced.station_rows(station) @ self.coordinates.T
        return np.asarray(x + 1j * y)

    def forces(self) -> Complexes:
        """Give the forces of the shaft on bearings and seals, x + iy [N], (B, n); no weight."""
        out = np.empty((len(self.reduced.model.supports), self.time.size), dtype=np.complex128)
        for number, support in enumerate(self.reduced.model.supports):
            rows = self.reduced.rows[number]
            moved, rate = self.coordinates @ rows.T, self.rates @ rows.T
            for at in range(0, self.time.size, _CHUNK):
                part = slice(at, at + _CHUNK)
                matrices = support.bearing.coefficients.at(self.speed[part])
                force = np.einsum("sij,sj->si", matrices.stiffness, moved[part])
                force += np.einsum("sij,sj->si", matrices.damping, rate[part])
                out[number, part] = force[:, 0] + 1j * force[:, 1]
        return out


def station_run(
    model: Model,
    programme: SpeedProgramme,
    unbalance: Sequence[Unbalance],
    bow: Bow | None,
    pairs: int,
    reference_speed: float,
    *,
    per_turn: int = PER_TURN,
    at_rest: bool = False,
    progress: Callable[[float], None] | None = None,
) -> StationRun:
    """Step a rotor by stations through a speed programme, from steady whirl or from rest.

    Parameters
    ----------
    model
        The rotor.
    programme
        Speed against time.
    unbalance, bow
        What makes it whirl.
    pairs
        Modes kept in each plane.
    reference_speed
        Speed at which the supports' stiffness is taken for the modes [rad/s].
    per_turn
        Steps to a turn at the highest speed.
    at_rest
        Begin without motion, in place of the steady whirl at the first speed.
    progress
        Called now and then with the share done.

    Raises
    ------
    ModelError
        If the programme needs more than 1.5 million steps, a speed lies outside a coefficient
        table, or as in `reduce_model`.
    """
    reduced = reduce_model(model, pairs, reference_speed)
    loads = exciting_loads(reduced, unbalance, bow)
    low, high = programme.speeds
    span = programme.end_time - programme.start_time
    count, step = steps_of(span, high, float(reduced.frequencies.min()), per_turn)
    if count > MOST_STEPS:
        raise ModelError(
            f"the passage takes {count:.3g} steps, more than {MOST_STEPS:,}: make it faster, or "
            "begin and end it nearer to the critical speed"
        )
    exact = propagator(reduced, loads, step, low, high)
    time = np.asarray(programme.start_time + step * np.arange(count + 1), np.float64)
    first = np.asarray([programme.start_time])
    w0, turned = float(programme.speed(first)[0]), np.exp(1j * programme.angle(first)[0])
    steady = steady_modal(reduced, np.asarray([w0]), *loads)[0] * turned
    state = exact.state(steady.real, (1j * w0 * steady).real)
    if at_rest:
        state = np.zeros_like(state)
    states = np.empty((count + 1, state.size))
    states[0] = state
    for at in range(0, count, _CHUNK):
        middle = time[at : min(at + _CHUNK, count)] + 0.5 * step
        w, alpha = programme.speed(middle), programme.acceleration(middle)
        turning = np.exp(1j * programme.angle(middle))
        E, v = _steps(exact, np.clip(w, low, high))
        inertia = (w**2 - 1j * alpha) * turning
        kick = (v[:, :, 0] * inertia[:, None] + v[:, :, 1] * turning[:, None]).real
        for j in range(middle.size):
            state = E[j] @ state + kick[j]
            states[at + j + 1] = state
        if progress is not None:
            progress((at + middle.size) / count)
    coordinates, rates = exact.coordinates(states)
    ends = np.clip(programme.speed(time), low, high)
    return StationRun(reduced, time, ends, programme.angle(time), coordinates, rates)


def _steps(exact: Propagator, speeds: Floats) -> tuple[Floats, Complexes]:
    """Give the steps at speeds in order of time, straight between every sixteenth.

    Over sixteen steps the speed changes by less than a thousandth: what the bend of the
    coefficients does in it stays below 10⁻⁷.
    """
    if exact.nodes == 1 or speeds.size <= 2 * _BETWEEN:
        return exact.at(speeds)
    knots = np.unique(np.append(np.arange(0, speeds.size, _BETWEEN), speeds.size - 1))
    E, v = exact.at(speeds[knots])
    at = np.arange(speeds.size)
    left = np.clip(np.searchsorted(knots, at, side="right") - 1, 0, knots.size - 2)
    share = ((at - knots[left]) / (knots[left + 1] - knots[left]))[:, None, None]
    return (
        E[left] + share * (E[left + 1] - E[left]),
        np.asarray(v[left] + share * (v[left + 1] - v[left])),
    )
