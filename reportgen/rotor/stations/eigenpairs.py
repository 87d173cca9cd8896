"""Damped eigenpairs of the whole model, refined from starting values at many speeds at once."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from reportgen.errors import ModelError
from reportgen.rotor.stations.coefficients import Real
from reportgen.rotor.stations.dynamics import DynamicStiffness, Motion
from reportgen.rotor.stations.harmonic import CHUNK
from reportgen.rotor.stations.model import Model
from reportgen.rotor.stations.reduction import shaft_subspace, starting_pairs
from reportgen.rotor.stations.shaft import Complex

# Newton's correction at which a root counts as found: the next would be some 1e-10.
_SETTLED = 1e-6
_MOST_STEPS = 12

# Two equal real roots leave the reduced problem as a pair this far off the real axis.
_ROUNDED = 1e-5


# |Im λ| / |λ| below which a mode does not oscillate: ζ > 0.99995, less than 1e-270 is left
# after one turn. Gyroscopic terms give such modes a trace of frequency.
_OVERDAMPED = 1e-2


def oscillates(exponents: Complex) -> NDArray[np.bool_]:
    """Tell which λ oscillate; the others are overdamped."""
    return np.asarray(exponents.imag > _OVERDAMPED * np.abs(exponents))


@dataclass(frozen=True, eq=False)
class Eigenpairs:
    """P pairs: λ [1/s], its speed Ω [rad/s] (P,), and vectors.

    ``shaft`` (P, n, 4) in (f, f', b, b') with largest deflection 1, ``pedestals`` (P, p, 2).
    ``correction``: relative size of the last step; what is left is smaller by about 1e-4.
    """

    exponents: Complex
    speeds: Real
    shaft: Complex
    pedestals: Complex
    correction: Real

    def take(self, which: NDArray[np.int64]) -> Eigenpairs:
        """Pick some of the pairs."""
        return Eigenpairs(
            self.exponents[which],
            self.speeds[which],
            self.shaft[which],
            self.pedestals[which],
            self.correction[which],
        )


def normalised(shaft: Complex, pedestals: Complex) -> tuple[Complex, Complex]:
    """Scale vectors (P, n, 4) so that the largest orbit's long half-axis is 1, phase fixed."""
    f, b = shaft[:, :, 0], shaft[:, :, 2]
    size = np.abs(f) + np.abs(b)
    top = size.argmax(1)[:, None]
    larger = np.where(np.abs(f) >= np.abs(b), f, b)
    lead = np.take_along_axis(larger, top, 1)
    unit = lead / np.maximum(np.abs(lead), 1e-300) * np.take_along_axis(size, top, 1)
    return shaft / unit[:, :, None], pedestals / unit[:, :, None]


def refine(model: Model, start: Eigenpairs) -> Eigenpairs:
    """Bring eigenpairs to full accuracy by Newton's method on Z(λ, Ω) x = 0.

    x ← Z⁻¹ Z' x, λ ← λ − (cᴴx_old)/(cᴴx_new) (Ruhe 1973, nonlinear inverse iteration),
    every operation over all pairs.

    Raises
    ------
    ModelError
        If a pair does not settle in 12 steps.
    """
    lam, x, p = start.exponents.copy(), start.shaft.copy(), start.pedestals.copy()
    change = np.full(lam.size, np.inf)
    for _ in range(_MOST_STEPS):
        open_ = np.flatnonzero(change > _SETTLED)
        if open_.size == 0:
            break
        for begin in range(0, open_.size, CHUNK):
            at = open_[begin : begin + CHUNK]
            lam[at], x[at], p[at], change[at] = _step(
                model, lam[at], start.speeds[at], x[at], p[at]
            )
    if np.any(change > _SETTLED):
        worst = int(change.argmax())
        raise ModelError(
            f"an eigenvalue near {lam[worst]:.6g} 1/s at {start.speeds[worst]:.6g} rad/s does not "
            "settle (two roots meeting in one); move or refine the speeds"
        )
    return Eigenpairs(lam, start.speeds, *normalised(x, p), change)


def motion_of(x: Complex, p: Complex) -> Motion:
    """Turn vectors (P, n, 4) and (P, p, 2) into one motion at each of P pairs."""
    return Motion(
        np.ascontiguousarray(x.transpose(1, 2, 0))[:, :, None],
        np.ascontiguousarray(p.transpose(1, 2, 0))[:, :, None],
    )


def _step(
    model: Model, lam: Complex, speeds: Real, x: Complex, p: Complex
) -> tuple[Complex, Complex, Complex, Real]:
    z = DynamicStiffness(model, lam, speeds)
    x, p = normalised(x, p)
    with np.errstate(all="ignore"):
        got = z.solve(z.apply(motion_of(x, p), rate=True))
    new = got.shaft[:, :, 0].transpose(2, 0, 1)
    pedestals = got.pedestals[:, :, 0].transpose(2, 0, 1)
    # Deflections alone weigh in the scale, so that metres and radians do not mix.
    dot = (x[:, :, ::2].conj() * new[:, :, ::2]).sum((1, 2))
    own = (np.abs(x[:, :, ::2]) ** 2).sum((1, 2))
    exact = ~np.isfinite(dot) | (np.abs(dot) > 1e17)
    step = np.where(exact, 0, own / np.where(exact, 1, dot))
    new = np.where(np.isfinite(dot)[:, None, None], new, x)
    pedestals = np.where(np.isfinite(dot)[:, None, None], pedestals, p)
    size = np.maximum(np.abs(lam), 1e-300)
    return lam - step, new, pedestals, np.abs(step) / size


def left_vectors(model: Model, pairs: Eigenpairs) -> Eigenpairs:
    """Give the left vectors y of refined pairs, yᵀ Z(λ, Ω) = 0, in place of the right ones.

    Two inverse iterations with Zᵀ at the root, where all but the wanted vector vanish; the
    root is moved by 1e-10 of itself so that the solve is regular.
    """
    shaft, pedestals = np.empty_like(pairs.shaft), np.empty_like(pairs.pedestals)
    for begin in range(0, pairs.exponents.size, CHUNK):
        at = slice(begin, begin + CHUNK)
        near = pairs.exponents[at] * (1 + 1e-10)
        z = DynamicStiffness(model, near, pairs.speeds[at], transposed=True)
        load = motion_of(pairs.shaft[at], pairs.pedestals[at])
        with np.errstate(all="ignore"):
            for _ in range(2):
                got = z.solve(load)
                size = np.abs(got.shaft).max(axis=(0, 1, 2))
                load = Motion(got.shaft / size, got.pedestals / size)
        shaft[at] = load.shaft[:, :, 0].transpose(2, 0, 1)
        pedestals[at] = load.pedestals[:, :, 0].transpose(2, 0, 1)
    return Eigenpairs(pairs.exponents, pairs.speeds, shaft, pedestals, pairs.correction)


def lowest_pairs(model: Model, speeds: Real, count: int, *, enrich: int = 8) -> Eigenpairs:
    """Find, at each speed, the ``count`` lowest oscillating modes and the overdamped below them.

    Parameters
    ----------
    model
        The rotor.
    speeds
        Ω [rad/s], shape (S,).
    count
        Oscillating modes at each speed, by damped frequency; fewer where there are no more.
    enrich
        Shaft modes beyond the wanted that the starting subspace holds.

    Returns
    -------
    Eigenpairs
        With Im λ ≥ 0, sorted by speed, then by frequency. Rigid-body modes (λ = 0) are left
        out.
    """
    space = shaft_subspace(model, (count + 1) // 2 + enrich)
    exponents, shaft, pedestals = starting_pairs(space, speeds)
    rest = 1e-5 * space.scale
    picks: list[tuple[int, int]] = []
    for s in range(speeds.size):
        lam = exponents[s]
        finite = np.isfinite(lam) & (np.abs(lam) > rest)
        swing = np.flatnonzero(finite & oscillates(lam))
        swing = swing[np.argsort(lam[swing].imag)][:count]
        ceiling = lam[swing[-1]].imag if swing.size else np.inf
        still = np.flatnonzero(
            finite
            & (lam.imag <= _OVERDAMPED * np.abs(lam))
            & (lam.imag >= -_ROUNDED * np.abs(lam))
            & (np.abs(lam) < ceiling)
        )
        picks += [(s, int(j)) for j in (*still[np.argsort(np.abs(lam[still]))], *swing)]
    if not picks:
        raise ModelError("no mode but rigid-body motion was found; support the rotor")
    at, which = (np.array(v) for v in zip(*picks, strict=True))
    lam = exponents[at, which]
    start = Eigenpairs(
        np.where(np.abs(lam.imag) <= _ROUNDED * np.abs(lam), lam.real, lam),
        speeds[at],
        shaft[at, which],
        pedestals[at, which],
        np.zeros(at.size),
    )
    found = refine(model, start)
    lam = found.exponents
    lam = np.where(np.abs(lam.imag) < 1e-9 * np.abs(lam), lam.real, lam)
    return replace(found, exponents=lam).take(np.flatnonzero(lam.imag >= 0))
