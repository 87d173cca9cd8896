"""How added cross-coupled stiffness moves the damping of the rotor."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike
from scipy.optimize import brentq

from reportgen.errors import ModelError
from reportgen.rotor.stations.campbell import Sense, log_decrement, whirl_sense
from reportgen.rotor.stations.coefficients import Constant, Real
from reportgen.rotor.stations.dynamics import DynamicStiffness
from reportgen.rotor.stations.eigenpairs import (
    Eigenpairs,
    left_vectors,
    lowest_pairs,
    motion_of,
    oscillates,
)
from reportgen.rotor.stations.inputs import Rotor, seal
from reportgen.rotor.stations.model import Model, assemble
from reportgen.rotor.stations.shaft import Complex


def with_cross_coupling(rotor: Rotor, station: int, stiffness: float) -> Rotor:
    """Give the rotor with cross-coupled stiffness q [N/m] added at a station.

    K = [[0, q], [−q, 0]]: q > 0 drives forward whirl.
    """
    added = Constant([[0.0, stiffness], [-stiffness, 0.0]])
    return replace(rotor, bearings=(*rotor.bearings, seal(station, added, "added cross-coupling")))


@dataclass(frozen=True, eq=False)
class CrossCouplingSweep:
    """Least stable mode against added cross-coupled stiffness at one station and speed.

    ``stiffness`` [N/m], ``decrement`` (log decrement of the least stable oscillating mode),
    ``frequency`` [rad/s] and ``sense`` of it, one for each; ``threshold`` [N/m] where the
    decrement falls through zero, None if it does not within ``stiffness``.
    """

    station: int
    speed: float
    stiffness: Real
    decrement: Real
    frequency: Real
    sense: tuple[Sense, ...]
    threshold: float | None


def cross_coupling_sweep(
    rotor: Rotor, speed: float, station: int, stiffness: ArrayLike, modes: int = 8
) -> CrossCouplingSweep:
    """Find the least log decrement at each of a row of added cross-coupled stiffnesses.

    Parameters
    ----------
    rotor
        Without the addition.
    speed
        Ω [rad/s].
    station
        Where it acts.
    stiffness
        Rising [N/m].
    modes
        Lowest modes looked at.
    """
    row = np.atleast_1d(np.asarray(stiffness, dtype=np.float64))
    if not np.all(np.isfinite(row)) or np.any(np.diff(row) <= 0):
        raise ModelError("added cross-coupled stiffnesses must be finite and rise, in N/m")
    states = [_least_stable(rotor, speed, station, float(q), modes) for q in row]
    decrement = np.array([state[0] for state in states])
    falls = np.flatnonzero((decrement[:-1] > 0) & (decrement[1:] <= 0))
    threshold = None
    if falls.size:
        j = int(falls[0])
        threshold = float(
            brentq(
                lambda q: _least_stable(rotor, speed, station, q, modes)[0],
                row[j],
                row[j + 1],
                rtol=1e-8,
            )
        )
    return CrossCouplingSweep(
        station,
        speed,
        row,
        decrement,
        np.array([state[1] for state in states]),
        tuple(state[2] for state in states),
        threshold,
    )


def _least_stable(
    rotor: Rotor, speed: float, station: int, stiffness: float, modes: int
) -> tuple[float, float, Sense]:
    model = assemble(with_cross_coupling(rotor, station, stiffness))
    pairs = lowest_pairs(model, np.array([speed]), modes)
    swing = np.flatnonzero(oscillates(pairs.exponents))
    if swing.size == 0:
        raise ModelError(f"no oscillating mode at {speed:.6g} rad/s; nothing to judge")
    values = log_decrement(pairs.exponents[swing])
    worst = int(swing[values.argmin()])
    lam = complex(pairs.exponents[worst])
    return float(values.min()), lam.imag, whirl_sense(pairs.shaft[worst], lam)


def cross_coupling_sensitivity(model: Model, pairs: Eigenpairs, station: int) -> Complex:
    """Give dλ/dq of each pair for cross-coupled stiffness q added at a station [1/(s N/m)].

    dλ/dq = −yᵀ(∂Z/∂q)x / (yᵀ(∂Z/∂λ)x), with right and left vectors x and y.
    """
    node = model.node(station)
    left = left_vectors(model, pairs)
    x, y = pairs.shaft[:, node], left.shaft[:, node]
    # In (f, b) the added block is diag(−i q, i q).
    top = -1j * y[:, 0] * x[:, 0] + 1j * y[:, 2] * x[:, 2]
    z = DynamicStiffness(model, pairs.exponents, pairs.speeds)
    rate = z.apply(motion_of(pairs.shaft, pairs.pedestals), rate=True)
    bottom = (left.shaft.transpose(1, 2, 0) * rate.shaft[:, :, 0]).sum((0, 1))
    bottom += (left.pedestals.transpose(1, 2, 0) * rate.pedestals[:, :, 0]).sum((0, 1))
    return np.asarray(-top / bottom)
