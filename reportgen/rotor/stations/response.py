"""Response to unbalance and to residual bow at constant speed."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import scipy.sparse as sp
import scipy.sparse.linalg as spl
from numpy.typing import ArrayLike

from reportgen.errors import ModelError
from reportgen.rotor.stations.coefficients import Real
from reportgen.rotor.stations.dynamics import Motion
from reportgen.rotor.stations.harmonic import solve_checked
from reportgen.rotor.stations.model import Model
from reportgen.rotor.stations.planes import chain_sparse
from reportgen.rotor.stations.shaft import Complex


@dataclass(frozen=True)
class Unbalance:
    """Unbalance in one plane: ``amount`` = mass × radius [kg m] at ``angle`` [rad].

    The angle is fixed in the rotor, counted with the rotation; at time zero the direction
    of angle 0 points along +x.
    """

    station: int
    amount: float
    angle: float = 0.0


@dataclass(frozen=True, eq=False)
class Bow:
    """Residual bow: complex offset x + iy of rotor stations at rest [m], fixed in the rotor.

    ``offsets`` has one value for each rotor station; slopes follow as the free shaft through
    these points would take them.
    """

    offsets: ArrayLike


@dataclass(frozen=True, eq=False)
class Response:
    """Steady whirl at S speeds: every station moves as Re(X e^{iΩt}), Re(Y e^{iΩt}).

    Amplitudes are zero-to-peak.

    Attributes
    ----------
    model, speeds
        The rotor and Ω [rad/s], shape (S,).
    forward, backward
        Complex parts f, b with x + iy = f e^{iΩt} + b̄ e^{−iΩt}; shape (n, 2, S), deflection
        [m] and slope [rad].
    pedestal_forward, pedestal_backward
        The same for pedestals [m], shape (p, S).
    residual
        Componentwise backward error of each solve, shape (S,).
    unbalance
        What caused it.
    load
        Forces on shaft stations, forward part, shape (n, 2, S) [N], [N m]; a bow enters as
        the forces that would bend a straight shaft to it.
    bow
        Bowed shape at rest, deflection and slope, (n, 2); zero without bow.
    """

    model: Model
    speeds: Real
    forward: Complex
    backward: Complex
    pedestal_forward: Complex
    pedestal_backward: Complex
    residual: Real
    unbalance: tuple[Unbalance, ...]
    load: Complex
    bow: Complex

    @property
    def x(self) -> Complex:
        """Complex horizontal amplitude at every mesh station [m], shape (n, S)."""
        return np.asarray(self.forward[:, 0] + self.backward[:, 0])

    @property
    def y(self) -> Complex:
        """Complex vertical amplitude at every mesh station [m], shape (n, S)."""
        return np.asarray(-1j * (self.forward[:, 0] - self.backward[:, 0]))

    @property
    def major(self) -> Real:
        """Semi-major axis of the orbit at every mesh station [m, 0-peak], shape (n, S)."""
        return np.abs(self.forward[:, 0]) + np.abs(self.backward[:, 0])

    def probe(self, station: int, angle: float) -> Complex:
        """Complex amplitude seen by a probe at a rotor station [m, 0-peak], shape (S,).

        Parameters
        ----------
        station
            Of the rotor.
        angle
            Of the probe from +x, with the rotation [rad].
        """
        i = self.model.node(station)
        return np.asarray(np.cos(angle) * self.x[i] + np.sin(angle) * self.y[i])


def _turning_load(model: Model, speeds: Real, unbalance: Sequence[Unbalance]) -> Complex:
    load = np.zeros((model.stations, 2, speeds.size), dtype=np.complex128)
    for part in unbalance:
        if not (np.isfinite(part.amount) and part.amount >= 0 and np.isfinite(part.angle)):
            raise ModelError(
                f"unbalance of {part.amount:g} kg m at {part.angle:g} rad; give a finite amount, "
                "zero or above, and turn the angle by π for the opposite side"
            )
        load[model.node(part.station), 0] += part.amount * speeds**2 * np.exp(1j * part.angle)
    return load


def bow_shape(model: Model, bow: Bow) -> Complex:
    """Give deflection and slope of a bowed shaft at every mesh station, shape (n, 2).

    The shape through the given offsets that bends the free shaft least.
    """
    offsets = np.asarray(bow.offsets, dtype=np.complex128)
    if offsets.shape != model.node_of.shape or not np.all(np.isfinite(offsets)):
        raise ModelError(
            f"bow gives {offsets.size} offsets; give one finite value for each of the "
            f"{model.node_of.size} rotor stations"
        )

    K = chain_sparse(model.stiffness).tocsr()
    known = 2 * model.node_of
    free = np.setdiff1d(np.arange(2 * model.stations), known)
    q = np.zeros(2 * model.stations, dtype=np.complex128)
    q[known] = offsets
    rest = sp.csc_matrix(K[free][:, free])
    factor, load = spl.splu(rest), -(K[free][:, known] @ offsets)
    q[free] = factor.solve(load.real) + 1j * factor.solve(load.imag)
    return q.reshape(-1, 2)


def unbalance_responses(
    model: Model,
    speeds: ArrayLike,
    cases: Sequence[Sequence[Unbalance]],
    bow: Bow | None = None,
) -> list[Response]:
    """Respond to several unbalance cases with one elimination.

    Parameters
    ----------
    model
        The rotor.
    speeds
        Ω [rad/s], shape (S,), zero or above.
    cases
        One list of planes for each case.
    bow
        Residual bow added to every case.

    Returns
    -------
    list of Response
        In the order of ``cases``.

    Raises
    ------
    ModelError
        If a station does not exist, a speed is negative or outside a coefficient table, or
        the equations are singular at a speed.
    """
    turning = np.atleast_1d(np.asarray(speeds, dtype=np.float64))
    if turning.ndim != 1 or not np.all(np.isfinite(turning)) or np.any(turning < 0):
        raise ModelError("speeds must be one row of finite values, zero or above, in rad/s")
    loads = [_turning_load(model, turning, case) for case in cases]
    bent = np.zeros((model.stations, 2), dtype=np.complex128)
    if bow is not None:
        bent = bow_shape(model, bow)
        straightening = np.asarray(model.stiffness.times(bent))
        loads = [load + straightening[..., None] for load in loads]
    shape = (model.stations, 4, len(loads), turning.size)
    right = Motion(
        np.zeros(shape, dtype=np.complex128),
        np.zeros((model.pedestals, 2, len(loads), turning.size), dtype=np.complex128),
    )
    for r, load in enumerate(loads):
        right.shaft[:, :2, r] = load
    motion, residual = solve_checked(model, np.asarray(1j * turning), turning, right)
    return [
        Response(
            model=model,
            speeds=turning,
            forward=motion.shaft[:, :2, r],
            backward=motion.shaft[:, 2:, r],
            pedestal_forward=motion.pedestals[:, 0, r],
            pedestal_backward=motion.pedestals[:, 1, r],
            residual=residual[r],
            unbalance=tuple(case),
            load=loads[r],
            bow=bent,
        )
        for r, case in enumerate(cases)
    ]


def unbalance_response(
    model: Model, speeds: ArrayLike, unbalance: Sequence[Unbalance], bow: Bow | None = None
) -> Response:
    """Respond to one unbalance case; see :func:`unbalance_responses`."""
    return unbalance_responses(model, speeds, [unbalance], bow)[0]
