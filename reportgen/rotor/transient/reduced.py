"""The rotor by stations reduced on its real modes at rest and the shapes of its supports.

The modes of each plane are those of the undamped shaft on its supports (and pedestals) at one
reference speed, without gyroscopic effect. Gyroscopic terms, internal damping and the supports'
full matrices, which may change with speed and couple the planes, are kept by projection:

    M(Ω) η̈ + [C(Ω) + Ω G] η̇ + [K(Ω) + Ω H] η = Re{[u (θ̇² − i θ̈) + k_b] e^{iθ}},

G gyroscopic, H of internal damping, u unbalance and k_b the forces that bend a straight shaft to
its bow. Torque acts along the shaft's own, tilted axis, so that θ̈ has no gyroscopic term of its
own; the effect of torque on bending is left out.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import scipy.sparse as sp
import scipy.sparse.linalg as spl

from reportgen.errors import ModelError
from reportgen.rotor.stations.coefficients import SpeedTable
from reportgen.rotor.stations.model import Model
from reportgen.rotor.stations.planes import chain_sparse, lowest_roots
from reportgen.rotor.stations.response import Bow, Unbalance, bow_shape
from reportgen.rotor.transient.coupled import Complexes, Floats

_NEW = 1e-4
"""Share of a support's shape that must lie outside the modes, lest rounding make it up."""


@dataclass(frozen=True, eq=False)
class Reduced:
    """A model in modal coordinates, N = 2 × pairs, those of the x plane first.

    Attributes
    ----------
    model
        What was reduced.
    pairs
        Modes and shapes kept in each plane.
    shapes
        Deflection and slope of each mode at each mesh station, shape (2 planes, n, 2, pairs).
    pedestal_shapes
        Deflection of each pedestal, shape (2 planes, p, pairs).
    frequencies
        Natural frequencies of the modes [rad/s], shape (N,).
    stiffness, gyroscopic, internal, circulatory
        Projected shaft matrices, shape (N, N); the gyroscopic and circulatory ones per rad/s.
    fixed_damping, fixed_stiffness
        Of the pedestals, shape (N, N).
    rows
        Motion (x, y, α, β) of each support relative to its pedestal, shape (B, 4, N).
    """

    model: Model
    pairs: int
    shapes: Floats
    pedestal_shapes: Floats
    frequencies: Floats
    stiffness: Floats
    gyroscopic: Floats
    internal: Floats
    circulatory: Floats
    fixed_damping: Floats
    fixed_stiffness: Floats
    rows: Floats

    @property
    def size(self) -> int:
        """Number N of modal coordinates."""
        return 2 * self.pairs

    @property
    def has_inertia(self) -> bool:
        """Whether a bearing or seal has inertia coefficients."""
        return any(
            bool(np.any(np.asarray(getattr(s.bearing.coefficients, "inertia", 0.0))))
            for s in self.model.supports
        )

    def station_rows(self, station: int) -> Floats:
        """Rows that give (x, y) at a rotor station from the modal coordinates, (2, N)."""
        i, m = self.model.node(station), self.pairs
        rows = np.zeros((2, 2 * m))
        rows[0, :m], rows[1, m:] = self.shapes[0, i, 0], self.shapes[1, i, 0]
        return rows

    def matrices(self, speeds: Floats) -> tuple[Floats, Floats, Floats]:
        """Mass, damping and stiffness at speeds [rad/s], each (S, N, N)."""
        w = np.atleast_1d(np.asarray(speeds, dtype=np.float64))
        shape = (w.size, self.size, self.size)
        M = np.broadcast_to(np.eye(self.size), shape).copy()
        C = self.internal + self.fixed_damping + w[:, None, None] * self.gyroscopic
        K = self.stiffness + self.fixed_stiffness + w[:, None, None] * self.circulatory
        for support, rows in zip(self.model.supports, self.rows, strict=True):
            at = support.bearing.coefficients.at(w)
            for matrix, part in ((M, at.inertia), (C, at.damping), (K, at.stiffness)):
                matrix += rows.T @ part @ rows
        return M, C, K

    def table_speeds(self) -> Floats:
        """Speeds of all rows of the supports' tables [rad/s], where coefficients have a kink."""
        tables = [s.bearing.coefficients for s in self.model.supports]
        parts = [np.asarray(t.speeds) for t in tables if isinstance(t, SpeedTable)]
        return np.unique(np.concatenate(parts)) if parts else np.empty(0)

    def changes_with_speed(self) -> bool:
        """Whether any matrix depends on the speed."""
        bearings = any(
            not hasattr(s.bearing.coefficients, "stiffness")
            or np.ndim(s.bearing.coefficients.stiffness) != 2
            for s in self.model.supports
        )
        return bearings or bool(np.any(self.gyroscopic)) or bool(np.any(self.circulatory))

    def turning_load(self, shaft: Complexes) -> Complexes:
        """Project complex forces (n, 2) on the shaft, turning with it, on the modes, (N,).

        The force is Re(·e^{iθ}) in the x plane, Im(·e^{iθ}) in the y plane.
        """
        x = np.einsum("nim,ni->m", self.shapes[0], shaft)
        y = -1j * np.einsum("nim,ni->m", self.shapes[1], shaft)
        return np.concatenate([x, y])


def reduce_model(model: Model, pairs: int, reference_speed: float) -> Reduced:
    """Reduce a model on its lowest real modes and the shapes of forces at its supports.

    The shapes that the undamped shaft takes under a force at each support are added to the modes
    of each plane, so that strong dampers, which modes at rest follow slowly, are met as well
    (residual flexibility; MacNeal 1971).

    Parameters
    ----------
    model
        The rotor by stations.
    pairs
        Modes kept in each plane, 1 or more; the shapes of the supports come on top.
    reference_speed
        Speed at which the supports' stiffness is taken for the modes [rad/s]. It changes which
        modes are kept, not what they converge to.

    Returns
    -------
    Reduced
        In modal coordinates.

    Raises
    ------
    ModelError
        If the model has not as many modes, or a support's table does not cover the speed.
    """
    most = 2 * model.stations - 2
    if not 1 <= pairs <= most:
        raise ModelError(f"{pairs} modes in each plane; this model has 1 to {most}")
    planes = [_plane_shapes(model, plane, pairs, reference_speed) for plane in range(2)]
    pairs = min(f.size for f, _ in planes)
    planes = [(f[:pairs], v[:, :pairs]) for f, v in planes]
    n2, p = 2 * model.stations, model.pedestals
    vectors = [v for _, v in planes]
    shapes = np.stack([v[:n2].reshape(model.stations, 2, pairs) for v in vectors])
    feet = np.stack([v[n2:].reshape(p, pairs) for v in vectors])
    N, m = 2 * pairs, pairs
    x, y = slice(0, m), slice(m, N)
    K, G, D, H = (np.zeros((N, N)) for _ in range(4))

    def project(chain: sp.csc_matrix, a: int, b: int) -> Floats:
        return np.asarray(vectors[a][:n2].T @ (chain @ vectors[b][:n2]))

    elastic, polar, inner = (
        chain_sparse(c) for c in (model.stiffness, model.polar, model.internal)
    )
    for at, plane in ((x, 0), (y, 1)):
        K[at, at], D[at, at] = project(elastic, plane, plane), project(inner, plane, plane)
    G[x, y], H[x, y] = project(polar, 0, 1), project(inner, 0, 1)
    G[y, x], H[y, x] = -G[x, y].T, -H[x, y].T
    rows, fixed_damping, fixed_stiffness = _supports(model, shapes, feet)
    return Reduced(
        model,
        pairs,
        shapes,
        feet,
        np.concatenate([f for f, _ in planes]),
        K,
        G,
        D,
        H,
        fixed_damping,
        fixed_stiffness,
        rows,
    )


def _supports(model: Model, shapes: Floats, feet: Floats) -> tuple[Floats, Floats, Floats]:
    m = shapes.shape[-1]
    rows = np.zeros((len(model.supports), 4, 2 * m))
    damping, stiffness = np.zeros((2 * m, 2 * m)), np.zeros((2 * m, 2 * m))
    for number, support in enumerate(model.supports):
        for plane in range(2):
            at = slice(plane * m, (plane + 1) * m)
            rows[number, plane, at] = shapes[plane, support.node, 0]
            rows[number, 2 + plane, at] = shapes[plane, support.node, 1]
            pedestal = support.bearing.pedestal
            if pedestal is not None:
                foot = feet[plane, support.pedestal]
                rows[number, plane, at] -= foot
                damping[at, at] += pedestal.damping[plane] * np.outer(foot, foot)
                stiffness[at, at] += pedestal.stiffness[plane] * np.outer(foot, foot)
    return rows, damping, stiffness


def _plane_shapes(
    model: Model, plane: int, count: int, reference_speed: float
) -> tuple[Floats, Floats]:
    """Frequencies and mass-normalised shapes of one plane, pedestals after the shaft.

    The lowest modes, and the shapes under a force at each support, made orthogonal to them and to
    each other by a small eigenproblem (Ritz).
    """
    n2, p = 2 * model.stations, model.pedestals
    K = sp.block_diag([chain_sparse(model.stiffness), sp.csc_matrix((p, p))]).tolil()
    M = sp.block_diag([chain_sparse(model.mass), sp.csc_matrix((p, p))]).tolil()
    for support in model.supports:
        at = support.bearing.coefficients.at(np.array([reference_speed])).stiffness[0]
        spring, tilt = float(at[plane, plane]), float(at[2 + plane, 2 + plane])
        i = 2 * support.node
        K[i, i] += spring
        K[i + 1, i + 1] += tilt
        pedestal = support.bearing.pedestal
        if pedestal is not None:
            j = n2 + support.pedestal
            K[i, j] -= spring
            K[j, i] -= spring
            K[j, j] += spring + pedestal.stiffness[plane]
            M[j, j] += pedestal.mass[plane]
    stiffness, mass = sp.csc_matrix(K), sp.csc_matrix(M)
    # Below zero, so that rigid-body modes of a rotor on weak supports are found too.
    shift = -1e-4 * abs(K[:n2, :n2].diagonal()[::2]).max() / M[:n2, :n2].diagonal()[::2].max()
    roots, vectors = lowest_roots(stiffness, mass, count, float(shift))
    if roots.size < count:
        raise ModelError(f"only {roots.size} modes were found in a plane, {count} were asked for")
    modes = np.asarray(vectors / np.sqrt(np.einsum("ij,ij->j", vectors, mass @ vectors)))
    nodes = [2 * support.node for support in model.supports]
    nodes += [n2 + s.pedestal for s in model.supports if s.pedestal >= 0]
    unit = np.zeros((n2 + p, len(nodes)))
    unit[nodes, np.arange(len(nodes))] = 1.0
    bent = np.asarray(spl.splu(sp.csc_matrix(stiffness - shift * mass)).solve(unit))
    shapes = [modes]
    for one in bent.T:
        rest = one[:, None] / np.sqrt(one @ (mass @ one))
        for _ in range(2):
            for shape in shapes:
                rest = rest - shape @ (shape.T @ (mass @ rest))
        left = float(np.sqrt((rest.T @ (mass @ rest)).item()))
        if left > _NEW:
            shapes.append(rest / left)
    basis = np.hstack(shapes)
    squares, turned = np.linalg.eigh(basis.T @ (stiffness @ basis))
    return np.sqrt(np.maximum(squares, 0.0)), np.asarray(basis @ turned)


def exciting_loads(
    reduced: Reduced, unbalance: Sequence[Unbalance], bow: Bow | None
) -> tuple[Complexes, Complexes]:
    """Projected unbalance u [kg·m] and bow force k_b [N], each (N,); forces as `Reduced` states.

    Raises
    ------
    ModelError
        If an unbalance is not finite or negative, or there is neither unbalance nor bow.
    """
    model = reduced.model
    u = np.zeros((model.stations, 2), dtype=np.complex128)
    for part in unbalance:
        if not (np.isfinite(part.amount) and part.amount >= 0.0 and np.isfinite(part.angle)):
            raise ModelError(
                f"unbalance of {part.amount:g} kg m at {part.angle:g} rad; give a finite amount, "
                "zero or above"
            )
        u[model.node(part.station), 0] += part.amount * np.exp(1j * part.angle)
    bent = np.zeros((model.stations, 2), dtype=np.complex128)
    if bow is not None:
        bent = np.asarray(model.stiffness.times(bow_shape(model, bow)))
    if not np.any(u) and not np.any(bent):
        raise ModelError("there is neither unbalance nor bow: nothing would move; give one")
    return reduced.turning_load(u), reduced.turning_load(bent)


def steady_modal(reduced: Reduced, speeds: Floats, u: Complexes, bent: Complexes) -> Complexes:
    """Complex amplitudes of the modal coordinates in steady whirl at speeds [rad/s], (S, N)."""
    w = np.atleast_1d(np.asarray(speeds, dtype=np.float64))
    M, C, K = reduced.matrices(w)
    turn = w[:, None, None]
    load = w[:, None] ** 2 * u + bent
    try:
        q = np.linalg.solve(K + turn * (1j * C - turn * M), load[..., None])[..., 0]
    except np.linalg.LinAlgError:
        raise ModelError(
            "there is no steady whirl at the start: an undamped critical speed or a rotor free to "
            "move; start at another speed"
        ) from None
    return np.asarray(q)
