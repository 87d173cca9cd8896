"""Starting eigenpairs from a small subspace of the shaft's own shapes.

The subspace holds the lowest modes of the free shaft and its static answers to forces at
the supports, so that any bearing stiffness and damping is met by it. Its eigenpairs only
start the refinement on the whole model, which leaves no trace of the reduction.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.linalg
import scipy.sparse as sp
import scipy.sparse.linalg as spl

from reportgen.rotor.stations.coefficients import Real
from reportgen.rotor.stations.model import Model
from reportgen.rotor.stations.planes import chain_sparse, lowest_roots
from reportgen.rotor.stations.shaft import Complex


@dataclass(frozen=True, eq=False)
class Subspace:
    """Shapes of one plane, (n, 2, m), and the shaft's matrices in them, (m, m)."""

    model: Model
    shapes: Real
    mass: Real
    polar: Real
    stiffness: Real
    internal: Real
    scale: float


def frequency_scale(model: Model) -> float:
    """Order of the first bending frequency of the free shaft [rad/s]."""
    shape = np.sin(np.pi * model.positions / model.positions[-1])
    slope = np.cos(np.pi * model.positions / model.positions[-1]) * np.pi / model.positions[-1]
    if model.stations <= 2:
        shape, slope = np.zeros(2), np.array([1.0, -1.0])
    q = np.column_stack([shape, slope])
    top = float((q * model.stiffness.times(q)).sum())
    return float(np.sqrt(abs(top) / (q * model.mass.times(q)).sum()))


def shaft_subspace(model: Model, modes: int) -> Subspace:
    """Build the subspace with ``modes`` free shaft modes."""
    scale = frequency_scale(model)
    K, M = chain_sparse(model.stiffness), chain_sparse(model.mass)
    size = 2 * model.stations
    shift = -(scale**2)
    forces = np.zeros((size, 0))
    nodes = sorted({s.node for s in model.supports})
    if nodes:
        forces = np.zeros((size, len(nodes)))
        forces[2 * np.array(nodes), np.arange(len(nodes))] = 1
    # Also a twin answer to each: what the first leaves out at higher frequency.
    factor = spl.splu(sp.csc_matrix(K - shift * M))
    first = factor.solve(forces)
    second = factor.solve(M @ first)
    if modes + 2 * len(nodes) >= size - 2:
        basis = np.eye(size)
    else:
        basis = np.hstack([lowest_roots(K, M, modes, 1e-2 * shift)[1], first, second])
    gram = M @ basis
    length = np.sqrt(np.einsum("ij,ij->j", basis, gram))
    basis = basis / length
    # Orthonormal in M; directions lost to rounding are dropped.
    values, turn = scipy.linalg.eigh(basis.T @ (M @ basis))
    keep = values > 1e-10 * values[-1]
    basis = basis @ (turn[:, keep] / np.sqrt(values[keep]))
    chains = (model.mass, model.polar, model.stiffness, model.internal)
    m, g, k, i = (basis.T @ (chain_sparse(c) @ basis) for c in chains)
    return Subspace(model, basis.reshape(model.stations, 2, -1), m, g, k, i, scale)


def _reduced(space: Subspace, speeds: Real) -> tuple[Real, Real, Real]:
    """Give M, C, K of the reduced model at each speed, (S, N, N), in (x, y, pedestals)."""
    model, m = space.model, space.mass.shape[0]
    N = 2 * m + 2 * model.pedestals
    S = speeds.size
    M, C, K = (np.zeros((S, N, N)) for _ in range(3))
    x, y = slice(0, m), slice(m, 2 * m)
    M[:, x, x] = M[:, y, y] = space.mass
    C[:, x, x] = C[:, y, y] = space.internal
    K[:, x, x] = K[:, y, y] = space.stiffness
    C[:, x, y] = speeds[:, None, None] * space.polar
    K[:, x, y] = speeds[:, None, None] * space.internal
    C[:, y, x], K[:, y, x] = -C[:, x, y], -K[:, x, y]
    for support in model.supports:
        at = support.bearing.coefficients.at(speeds)
        rows = np.zeros((4, N))
        rows[0, x] = rows[1, y] = space.shapes[support.node, 0]
        rows[2, x] = rows[3, y] = space.shapes[support.node, 1]
        pedestal = support.bearing.pedestal
        if pedestal is not None:
            for axis in range(2):
                j = 2 * m + 2 * support.pedestal + axis
                rows[axis, j] = -1
                M[:, j, j] += pedestal.mass[axis]
                C[:, j, j] += pedestal.damping[axis]
                K[:, j, j] += pedestal.stiffness[axis]
        for matrix, part in ((M, at.inertia), (C, at.damping), (K, at.stiffness)):
            matrix += rows.T @ part @ rows
    return M, C, K


def starting_pairs(space: Subspace, speeds: Real) -> tuple[Complex, Complex, Complex]:
    """Solve the reduced eigenproblem at each speed.

    The problem is turned round a real point s beyond all roots, λ = s + 1/μ, so that
    massless pedestals do no harm and the low modes are the well-conditioned ones.

    Returns
    -------
    exponents
        λ [1/s], (S, 2N), infinite where the model has fewer.
    shaft
        Vectors (S, 2N, n, 4) in (f, f', b, b').
    pedestals
        (S, 2N, p, 2) in (f, b).
    """
    M, C, K = _reduced(space, speeds)
    N = M.shape[1]
    s = space.scale
    Z = K + s * (C + s * M)
    lower = -np.linalg.solve(Z, np.concatenate([M, C + 2 * s * M], axis=2))
    companion = np.zeros((speeds.size, 2 * N, 2 * N))
    companion[:, :N, N:] = np.eye(N)
    companion[:, N:] = lower
    # Unknowns (v, μ v): balance the halves by the scale of μ ~ 1/s.
    companion[:, :N, N:] /= s
    companion[:, N:, :N] *= s
    mu, vectors = np.linalg.eig(companion)
    mu = np.asarray(mu, dtype=np.complex128)
    small = np.abs(mu) < 1e-9 / s
    exponents = np.where(small, np.inf, s + 1 / np.where(small, 1, mu)).astype(np.complex128)
    v = np.swapaxes(vectors[:, :N], 1, 2)
    m = space.mass.shape[0]
    shapes = space.shapes.transpose(2, 0, 1)
    x = np.tensordot(v[..., :m], shapes, 1)
    y = np.tensordot(v[..., m : 2 * m], shapes, 1)
    shaft = np.asarray(np.concatenate([x + 1j * y, x - 1j * y], axis=-1) / 2, np.complex128)
    p = v[..., 2 * m :].reshape(*v.shape[:2], -1, 2)
    pedestals = np.stack([p[..., 0] + 1j * p[..., 1], p[..., 0] - 1j * p[..., 1]], -1) / 2
    return exponents, shaft, pedestals
