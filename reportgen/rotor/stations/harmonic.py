"""Harmonic response to forces turning with the shaft, each solve checked by its residual."""

from __future__ import annotations

import numpy as np
import scipy.linalg
from numpy.typing import NDArray

from reportgen.errors import ModelError
from reportgen.rotor.stations.coefficients import Real
from reportgen.rotor.stations.dynamics import DynamicStiffness, Motion
from reportgen.rotor.stations.model import Model
from reportgen.rotor.stations.shaft import Complex

# Speeds worked on at once: the working set of a station stays in cache, and memory small.
CHUNK = 512

# Componentwise backward error of a stable elimination is some 1e-15; above this the solve
# is repeated with row exchanges (LAPACK gbsv).
RESIDUAL_LIMIT = 1e-10


# |Z||x| / |b| at which rounding leaves no digit of the answer: 1 / (10 ε).
_SINGULAR = 0.1 / np.finfo(float).eps


def backward_error(stiffness: DynamicStiffness, motion: Motion, load: Motion) -> tuple[Real, Real]:
    """Componentwise backward error and growth of a solve, each of shape (R, S).

    The error is max |b − Zx| / (|Z||x| + |b|) (Oettli & Prager 1964): free of units, each
    equation weighed by its own terms. The growth is max(|Z||x|) / max|b|; times the machine
    precision it bounds what rounding does to the answer.
    """
    got = stiffness.apply(motion)
    scale = stiffness.apply(motion, magnitude=True)
    rest = [np.abs(b - r) for b, r in ((load.shaft, got.shaft), (load.pedestals, got.pedestals))]
    loads = [np.abs(load.shaft), np.abs(load.pedestals)]
    weights = [scale.shaft.real, scale.pedestals.real]

    def top(parts: list[Real]) -> Real:
        shaft, pedestals = (p.max(axis=(0, 1), initial=0.0) for p in parts)
        return np.asarray(np.maximum(shaft, pedestals))

    whole = top(weights) + top(loads)
    # A row of the order of rounding of the largest cannot be judged on its own.
    floor = np.finfo(float).eps ** 2 * whole + 1e-300
    error = top(
        [r / np.maximum(w + b, floor) for r, w, b in zip(rest, weights, loads, strict=True)]
    )
    return error, top(weights) / np.maximum(top(loads), 1e-300)


def solve_checked(
    model: Model, exponents: Complex, speeds: Real, load: Motion
) -> tuple[Motion, Real]:
    """Solve Z(λ, Ω) x = load at S pairs in chunks; return the motion and its backward error.

    Parameters
    ----------
    model
        The rotor.
    exponents, speeds
        λ [1/s] and Ω [rad/s], shape (S,).
    load
        Right sides, (n, 4, R, S) and (p, 2, R, S).

    Raises
    ------
    ModelError
        If the equations cannot be solved at a speed: undamped critical, or a rotor without
        support at standstill.
    """
    out = Motion(np.empty_like(load.shaft), np.empty_like(load.pedestals))
    error = np.empty(load.shaft.shape[2:])
    for start in range(0, speeds.size, CHUNK):
        part = slice(start, start + CHUNK)
        lam, turning, piece = exponents[part], speeds[part], _pick(load, part)
        z = DynamicStiffness(model, lam, turning)
        with np.errstate(all="ignore"):
            got = z.solve(piece)
            err, growth = backward_error(z, got, piece)
        for s in np.flatnonzero(~(err < RESIDUAL_LIMIT).all(axis=0)):
            one = slice(s, s + 1)
            again = _solve_with_pivoting(model, lam[one], turning[one], _pick(piece, one))
            got.shaft[..., one], got.pedestals[..., one] = again.shaft, again.pedestals
            small = DynamicStiffness(model, lam[one], turning[one])
            err[:, one], growth[:, one] = backward_error(small, again, _pick(piece, one))
        _refuse_singular(turning, err, growth)
        out.shaft[..., part], out.pedestals[..., part] = got.shaft, got.pedestals
        error[:, part] = err
    return out, error


def _pick(motion: Motion, where: slice) -> Motion:
    return Motion(motion.shaft[..., where], motion.pedestals[..., where])


def _refuse_singular(speeds: Real, error: Real, growth: Real) -> None:
    bad = (~(error < RESIDUAL_LIMIT) | ~(growth < _SINGULAR)).any(axis=0)
    if bad.any():
        raise ModelError(
            f"the equations at {speeds[int(np.argmax(bad))]:.6g} rad/s are singular: an undamped "
            "critical speed, or a rotor free to move as a rigid body; add damping or support, "
            "or leave the speed out"
        )


def band_order(model: Model) -> tuple[NDArray[np.int64], NDArray[np.int64], int]:
    """Place of each shaft and pedestal unknown in a narrow band; (n, 4), (p, 2), size."""
    shaft = np.zeros((model.stations, 4), dtype=np.int64)
    pedestals = np.zeros((model.pedestals, 2), dtype=np.int64)
    place = 0
    for i in range(model.stations):
        shaft[i] = np.arange(place, place + 4)
        place += 4
        for support in model.supports:
            if support.node == i and support.pedestal >= 0:
                pedestals[support.pedestal] = (place, place + 1)
                place += 2
    return shaft, pedestals, place


def band_matrix(model: Model, exponent: complex, speed: float) -> tuple[Complex, int]:
    """Z(λ, Ω) in LAPACK band storage (2w + 1, N) with its half-width w, in :func:`band_order`."""
    rows, columns, values, size = triplets(model, exponent, speed)
    width = int(np.abs(rows - columns).max())
    band = np.zeros((2 * width + 1, size), dtype=np.complex128)
    np.add.at(band, (width + rows - columns, columns), values)
    return band, width


def triplets(
    model: Model, exponent: complex, speed: float, *, rate: bool = False
) -> tuple[NDArray[np.int64], NDArray[np.int64], Complex, int]:
    """Rows, columns and values of Z(λ, Ω) (or dZ/dλ) in :func:`band_order`, and its size."""
    z = DynamicStiffness(model, np.array([exponent]), np.array([speed]))
    shaft, pedestals, size = band_order(model)
    rows, columns, values = z.entries(shaft, pedestals, rate=rate)
    return rows, columns, values[:, 0], size


def _solve_with_pivoting(model: Model, exponent: Complex, speed: Real, load: Motion) -> Motion:
    band, width = band_matrix(model, complex(exponent[0]), float(speed[0]))
    shaft, pedestals, size = band_order(model)
    right = np.zeros((size, load.shaft.shape[2]), dtype=np.complex128)
    right[shaft] = load.shaft[..., 0]
    right[pedestals] = load.pedestals[..., 0]
    try:
        x = scipy.linalg.solve_banded((width, width), band, right)
    except np.linalg.LinAlgError:
        x = np.full_like(right, np.inf)
    return Motion(x[shaft][..., None], x[pedestals][..., None])
