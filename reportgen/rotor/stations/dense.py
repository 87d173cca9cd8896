"""The same rotor as plain full matrices: a second way to every result, for checks only.

Assembled straight from the element matrices in real coordinates (x, α, y, β at each
station, then x, y of each pedestal); shares neither the whirl coordinates nor the
elimination with the working path.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.linalg

from reportgen.errors import ModelError
from reportgen.rotor.stations.coefficients import Real
from reportgen.rotor.stations.model import Model
from reportgen.rotor.stations.shaft import Complex


@dataclass(frozen=True, eq=False)
class DenseMatrices:
    """M q̈ + C q̇ + K q = f at one speed, each (N, N) with N = 4n + 2p; C holds the gyroscopics."""

    mass: Real
    damping: Real
    stiffness: Real


def dense_matrices(model: Model, speed: float) -> DenseMatrices:
    """Assemble full matrices at Ω = ``speed`` [rad/s]."""
    n = model.stations
    N = 4 * n + 2 * model.pedestals
    M, C, K = (np.zeros((N, N)) for _ in range(3))
    e = model.elements
    tension = np.zeros(e.length.size)
    for load in model.rotor.axial_loads:
        tension[model.node_of[load.station_from] : model.node_of[load.station_to]] += load.force
    for i in range(n - 1):
        x = [4 * i, 4 * i + 1, 4 * i + 4, 4 * i + 5]
        y = [j + 2 for j in x]
        for plane in (x, y):
            M[np.ix_(plane, plane)] += e.mass[i]
            K[np.ix_(plane, plane)] += e.stiffness[i] + tension[i] * e.string[i]
            C[np.ix_(plane, plane)] += e.internal[i]
        C[np.ix_(x, y)] += speed * e.polar[i]
        C[np.ix_(y, x)] -= speed * e.polar[i]
        K[np.ix_(x, y)] += speed * e.internal[i]
        K[np.ix_(y, x)] -= speed * e.internal[i]
    for i in range(n):
        M[4 * i, 4 * i] += model.station_mass[i]
        M[4 * i + 2, 4 * i + 2] += model.station_mass[i]
        M[4 * i + 1, 4 * i + 1] += model.station_diametral[i]
        M[4 * i + 3, 4 * i + 3] += model.station_diametral[i]
        C[4 * i + 1, 4 * i + 3] += speed * model.station_polar[i]
        C[4 * i + 3, 4 * i + 1] -= speed * model.station_polar[i]
    for support in model.supports:
        at = support.bearing.coefficients.at(np.array([speed]))
        rows = np.zeros((4, N))
        rows[[0, 1, 2, 3], 4 * support.node + np.array([0, 2, 1, 3])] = 1
        pedestal = support.bearing.pedestal
        if pedestal is not None:
            for axis in range(2):
                j = 4 * n + 2 * support.pedestal + axis
                rows[axis, j] = -1
                M[j, j] += pedestal.mass[axis]
                C[j, j] += pedestal.damping[axis]
                K[j, j] += pedestal.stiffness[axis]
        M += rows.T @ at.inertia[0] @ rows
        C += rows.T @ at.damping[0] @ rows
        K += rows.T @ at.stiffness[0] @ rows
    return DenseMatrices(M, C, K)


def dense_eigenvalues(matrices: DenseMatrices) -> Complex:
    """Find all finite eigenvalues λ [1/s] with the QR method on the inverted companion.

    Unknowns are scaled to unit stiffness first and 1/λ is sought, which keeps the low
    eigenvalues exact to some 1e-11 although the highest are 1e5 times larger.

    Raises
    ------
    ModelError
        If the rotor is free to move: its stiffness cannot be inverted.
    """
    K = matrices.stiffness
    scale = 1 / np.sqrt(np.maximum(np.abs(np.diag(K)), 1e-300))
    K, C, M = (scale[:, None] * m * scale for m in (K, matrices.damping, matrices.mass))
    if np.linalg.cond(K) > 1e15:
        raise ModelError("a rotor free to move has no inverse stiffness; support it")
    s = np.sqrt(np.trace(K) / max(np.trace(M), 1e-300))
    N = K.shape[0]
    factor = scipy.linalg.lu_factor(K)
    lower = [-scipy.linalg.lu_solve(factor, s * s * M), -scipy.linalg.lu_solve(factor, s * C)]
    companion = np.block([[np.zeros((N, N)), np.eye(N)], lower])
    mu = scipy.linalg.eigvals(companion)
    mu = mu[np.abs(mu) > 1e-13]
    return np.asarray(s / mu, dtype=np.complex128)


def dense_response(model: Model, speed: float, load: Complex) -> Complex:
    """Solve for the complex amplitudes q (N,) under a turning ``load`` (n, 2), full matrix."""
    d = dense_matrices(model, speed)
    Z = d.stiffness - speed**2 * d.mass + 1j * speed * d.damping
    force = np.zeros(Z.shape[0], dtype=np.complex128)
    n4 = 4 * model.stations
    force[0:n4:4], force[1:n4:4] = load[:, 0], load[:, 1]
    force[2:n4:4], force[3:n4:4] = -1j * load[:, 0], -1j * load[:, 1]
    return np.asarray(np.linalg.solve(Z, force))
