"""Sparse matrices of one plane, for statics, undamped criticals and reduction."""

from __future__ import annotations

import numpy as np
import scipy.sparse as sp

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
