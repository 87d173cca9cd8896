"""Exact steps of the reduced rotor over a fixed time, tabulated against speed.

Within a step the speed-dependent matrices and the speed are those at its middle, the angle there
is exact: an exponential integrator of order 2 (midpoint Magnus; Hochbruck & Ostermann 2010) whose
error is that of the slow change of speed alone. However high the modes kept, the step need not
follow them.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import scipy.linalg
from scipy.interpolate import CubicSpline

from reportgen.errors import ModelError
from reportgen.rotor.transient.coupled import Complexes, Floats
from reportgen.rotor.transient.reduced import Reduced

_MOST_NODES = 1025
_EXACT = 3e-9
"""Error of the tabulated step, against one computed directly, relative to its largest entry."""


@dataclass(frozen=True, eq=False)
class Propagator:
    """Steps of one length h of the state (ω_j η_j, η̇_j), shape (2N,).

    x(t + h) = E x(t) + Re{[v_u (Ω² − iΩ̇) + v_b] e^{iθ}}, Ω and θ in the middle of the step.
    """

    reduced: Reduced
    step: float
    scale: Floats
    nodes: int
    _spline: CubicSpline | None
    _one: Floats

    def at(self, speeds: Floats) -> tuple[Floats, Complexes]:
        """E (S, 2N, 2N) and v (S, 2N, 2) at speeds [rad/s]."""
        w = np.atleast_1d(np.asarray(speeds, dtype=np.float64))
        if self._spline is None:
            table = np.broadcast_to(self._one, (w.size, *self._one.shape))
        else:
            table = self._spline(w)
        size = 2 * self.reduced.size
        packed = table.reshape(w.size, size, size + 4)
        v = packed[:, :, size : size + 2] + 1j * packed[:, :, size + 2 :]
        return np.ascontiguousarray(packed[:, :, :size]), v

    def state(self, eta: Floats, rate: Floats) -> Floats:
        """Give the state from modal coordinates and their rates."""
        return np.concatenate([self.scale * eta, rate])

    def coordinates(self, states: Floats) -> tuple[Floats, Floats]:
        """Give modal coordinates and rates, (..., N) each, from states (..., 2N)."""
        n = self.reduced.size
        return states[..., :n] / self.scale, states[..., n:]


def propagator(
    reduced: Reduced, loads: tuple[Complexes, Complexes], step: float, low: float, high: float
) -> Propagator:
    """Tabulate steps of one length [s] for speeds between two speeds [rad/s].

    The matrix exponentials are taken at some speeds and interpolated by cubic splines; speeds are
    added until a direct computation half-way between agrees to 3e-9.

    Raises
    ------
    ModelError
        If 1,025 speeds do not suffice (coefficient tables that jump).
    """
    floor = 1e-3 * float(reduced.frequencies.max())
    scale = np.maximum(reduced.frequencies, floor)
    if high - low <= 1e-12 * max(high, 1.0):
        one = _packed(reduced, loads, step, scale, np.array([0.5 * (low + high)]))[0]
        return Propagator(reduced, step, scale, 1, None, one)
    knots = reduced.table_speeds()
    knots = knots[(knots > low) & (knots < high)]
    nodes = np.unique(np.concatenate([np.linspace(low, high, 17), knots]))
    values = _packed(reduced, loads, step, scale, nodes)
    while True:
        spline = CubicSpline(nodes, values)
        middles = 0.5 * (nodes[1:] + nodes[:-1])
        direct = _packed(reduced, loads, step, scale, middles)
        size = np.abs(direct).max(axis=(0, 1))
        off = np.abs(spline(middles) - direct) / np.where(size > 0.0, size, 1.0)
        if float(off.max()) < _EXACT:
            return Propagator(reduced, step, scale, nodes.size, spline, direct[0])
        nodes = np.concatenate([nodes, middles])
        if nodes.size > _MOST_NODES:
            raise ModelError(
                f"{_MOST_NODES} speeds do not suffice to follow the bearings' coefficients between "
                f"{low:.6g} and {high:.6g} rad/s; smooth the tables or pass a narrower range"
            )
        order = np.argsort(nodes)
        nodes = nodes[order]
        values = np.concatenate([values, direct])[order]


def _packed(
    reduced: Reduced,
    loads: tuple[Complexes, Complexes],
    step: float,
    scale: Floats,
    speeds: Floats,
) -> Floats:
    """Real table [E, Re v, Im v] at speeds, shape (S, 2N, 2N + 4).

    v is the upper right block of the exponential of [[A, B], [0, iΩ]] h (Van Loan 1978), turned
    back by half a step; no resonance shows in it, damped or not.
    """
    N = reduced.size
    M, C, K = reduced.matrices(speeds)
    inverse = np.linalg.inv(M)
    whole = np.zeros((speeds.size, 2 * N + 2, 2 * N + 2), dtype=np.complex128)
    whole[:, :N, N : 2 * N] = np.diag(scale)
    whole[:, N : 2 * N, :N] = -(inverse @ K) / scale
    whole[:, N : 2 * N, N : 2 * N] = -(inverse @ C)
    whole[:, N : 2 * N, 2 * N] = inverse @ loads[0]
    whole[:, N : 2 * N, 2 * N + 1] = inverse @ loads[1]
    for j in (2 * N, 2 * N + 1):
        whole[:, j, j] = 1j * speeds
    # The loads are scaled to the matrix, lest their size rule the exponential's own scaling.
    top = np.abs(whole[:, N : 2 * N, 2 * N :]).max(axis=(0, 1))
    top = np.where(top > 0.0, top, 1.0) / float(np.abs(scale).max())
    whole[:, N : 2 * N, 2 * N :] /= top
    got = scipy.linalg.expm(whole * step)
    back = np.exp(-0.5j * speeds * step)[:, None, None]
    v = got[:, : 2 * N, 2 * N :] * back * top
    return np.concatenate([got[:, : 2 * N, : 2 * N].real, v.real, v.imag], axis=2)


def steps_of(span: float, top_speed: float, lowest: float, per_turn: int) -> tuple[int, float]:
    """Give number and length [s] of the steps over a time span [s].

    ``per_turn`` steps go to a turn at the top speed, or to a cycle of the lowest mode if faster.
    """
    fastest = max(top_speed, lowest)
    count = max(math.ceil(span * fastest * per_turn / (2.0 * math.pi)), 16)
    return count, span / count
