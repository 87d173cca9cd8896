"""Sparse matrices of one plane, for statics, undamped criticals and reduction."""

from __future__ import annotations

import numpy as np
import scipy.sparse as sp
import scipy.sparse.linalg as spl

from reportgen.rotor.stations.coefficients import Real
from reportgen.rotor.stations.model import Chain


def chain_sparse(chain: Chain) -> sp.csc_matrix:
    """Give a chain as a sparse matrix (2n, 2n) in (deflection, slope) of each station."""
    n = chain.diagonal.shape[0]
    base = 2 * np.arange(n)
    i, j = np.meshgrid((0, 1), (0, 1), indexing="ij")
    rows = [base[:, None, None] + i, base[:-1, None, None] + i, base[1:, None, None] + j]
    columns = [base[:, None, None] + j, base[1:, None, None] + j, base[:-1, None, None] + i]
    values = [chain.diagonal, chain.upper, chain.upper]
    return sp.csc_matrix(
        (
            np.concatenate([v.ravel() for v in values]),
            (
                np.concatenate([r.ravel() for r in rows]),
                np.concatenate([c.ravel() for c in columns]),
            ),
        ),
        shape=(2 * n, 2 * n),
    )


def lowest_roots(K: sp.csc_matrix, N: sp.csc_matrix, count: int, shift: float) -> tuple[Real, Real]:
    """Find the roots λ > ``shift`` of K − λN nearest above it, with vectors in columns.

    Shift-and-invert Arnoldi (Lehoucq, Sorensen & Yang 1998) on a sparse factor: N may be
    indefinite, as for forward whirl.
    """
    size = K.shape[0]
    shifted = spl.splu(sp.csc_matrix(K - shift * N))
    operator = spl.LinearOperator(
        (size, size), matvec=lambda v: shifted.solve(N @ v), dtype=np.float64
    )
    wanted = min(count, size - 2)
    # A fixed start makes the same input give the same digits.
    start = np.random.default_rng(1).standard_normal(size)
    mu, vectors = spl.eigs(
        operator, k=wanted, which="LR", v0=start, ncv=min(size, max(4 * wanted + 8, 24))
    )
    order = np.argsort(-mu.real)
    mu, vectors = mu[order], vectors[:, order]
    # Rounding level of the largest: anything below is no root above the shift.
    real = mu.real > 1e-12 * abs(mu[0].real)
    return np.asarray(shift + 1 / mu[real].real), np.asarray(vectors[:, real].real)
