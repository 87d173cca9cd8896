"""Second computation of a passage by stations: the whole rotor stepped by Newmark's rule.

The first computation reduces the rotor on modes and steps those exactly. Here the full matrices
of the rotor, assembled another way, are stepped as they are by the rule of constant average
acceleration (Newmark 1959), without any reduction, over the part of the run around the peak.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from reportgen.rotor.stations.dense import DenseMatrices, dense_matrices
from reportgen.rotor.stations.response import Bow, Unbalance, bow_shape

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from reportgen.rotor.stations.model import Model
    from reportgen.rotor.transient.programme import SpeedProgramme

    Floats = NDArray[np.float64]
    Complexes = NDArray[np.complex128]

PER_CYCLE = 120
_MOST_STEPS = 80_000
_SAME_SPEED = 2e-3  # share by which the speed may move before the matrices are made again


@dataclass(frozen=True, eq=False)
class Whole:
    """Motion of all coordinates at even instants: time [s], shape (n,), motion (n, N)."""

    model: Model
    time: Floats
    motion: Floats

    def displacement(self, station: int) -> Complexes:
        """Return x + iy in m at a station of the rotor."""
        at = 4 * self.model.node(station)
        return np.asarray(self.motion[:, at] + 1j * self.motion[:, at + 2])


def whole_motion(
    model: Model,
    programme: SpeedProgramme,
    unbalance: Sequence[Unbalance],
    bow: Bow | None,
    span: tuple[float, float],
    *,
    at_rest: bool = False,
) -> Whole | None:
    """Return the motion over a span of a programme; None where it takes too many steps.

    It begins in steady whirl at the speed there, or at rest.
    """
    first, last = span
    top = float(np.max(programme.speed(np.linspace(first, last, 101))))
    count = math.ceil((last - first) * top / (2.0 * math.pi) * PER_CYCLE)
    if not 16 < count <= _MOST_STEPS:
        return None
    step = (last - first) / count
    time = np.asarray(first + step * np.arange(count + 1), np.float64)
    speed, gain = programme.speed(time), programme.acceleration(time)
    turning = np.exp(1j * programme.angle(time))
    u, bent = _loads(model, unbalance, bow)
    matrices = dense_matrices(model, float(speed[0]))
    size = matrices.mass.shape[0]
    forces = _forces(_sides(u, size), _sides(bent, size), speed, gain, turning)
    q, v = np.zeros(size), np.zeros(size)
    if not at_rest:
        w = float(speed[0])
        load = _sides(u * w**2 + bent, size)
        still = matrices.stiffness - w**2 * matrices.mass + 1j * w * matrices.damping
        whirl = np.linalg.solve(still, load) * turning[0]
        q, v = whirl.real.copy(), (1j * w * whirl).real.copy()
    motion = np.empty((count + 1, size))
    motion[0] = q
    a = _acceleration(matrices, forces(0), q, v)
    at, inverse = float(speed[0]), _effective(matrices, step)
    for j in range(1, count + 1):
        if abs(speed[j] - at) > _SAME_SPEED * max(abs(at), 1e-6):
            at = float(speed[j])
            matrices = dense_matrices(model, at)
            inverse = _effective(matrices, step)
        ahead = 4.0 / step**2 * q + 4.0 / step * v + a
        slide = 2.0 / step * q + v
        new = inverse @ (forces(j) + matrices.mass @ ahead + matrices.damping @ slide)
        rate = 2.0 / step * (new - q) - v
        a = 4.0 / step**2 * (new - q) - 4.0 / step * v - a
        q, v = new, rate
        motion[j] = q
    return Whole(model, time, motion)


def _loads(
    model: Model, unbalance: Sequence[Unbalance], bow: Bow | None
) -> tuple[Complexes, Complexes]:
    """Return unbalance in kg·m and what bends a straight shaft to its bow in N, as (n, 2)."""
    u = np.zeros((model.stations, 2), dtype=np.complex128)
    for part in unbalance:
        u[model.node(part.station), 0] += part.amount * np.exp(1j * part.angle)
    bent = np.zeros((model.stations, 2), dtype=np.complex128)
    if bow is not None:
        bent = np.asarray(model.stiffness.times(bow_shape(model, bow)))
    return u, np.asarray(bent)


def _sides(load: Complexes, size: int) -> Complexes:
    """Return loads (n, 2) in the order of the full matrices; pedestals carry none."""
    n4 = 4 * load.shape[0]
    out = np.zeros(size, dtype=np.complex128)
    out[0:n4:4], out[1:n4:4] = load[:, 0], load[:, 1]
    out[2:n4:4], out[3:n4:4] = -1j * load[:, 0], -1j * load[:, 1]
    return out


def _forces(
    u: Complexes, bent: Complexes, speed: Floats, gain: Floats, turning: Complexes
) -> Callable[[int], Floats]:
    inertia = (speed**2 - 1j * gain) * turning

    def at(j: int) -> Floats:
        return np.asarray((u * inertia[j] + bent * turning[j]).real)

    return at


def _acceleration(matrices: DenseMatrices, force: Floats, q: Floats, v: Floats) -> Floats:
    rest = force - matrices.damping @ v - matrices.stiffness @ q
    # a pedestal without mass has no acceleration of its own: the least that fits will do
    return np.asarray(np.linalg.lstsq(matrices.mass, rest, rcond=1e-13)[0])


def _effective(matrices: DenseMatrices, step: float) -> Floats:
    whole = matrices.stiffness + 2.0 / step * matrices.damping + 4.0 / step**2 * matrices.mass
    return np.asarray(np.linalg.inv(whole))
