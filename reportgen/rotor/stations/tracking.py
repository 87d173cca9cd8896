"""Following modes from speed to speed by shape and frequency."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import linear_sum_assignment

from reportgen.rotor.stations.coefficients import Real
from reportgen.rotor.stations.eigenpairs import Eigenpairs, normalised
from reportgen.rotor.stations.shaft import Complex

# A match must share this much of its shape, or move this little in frequency.
_LEAST_MAC = 0.3
_CLOSE = 0.02


@dataclass(frozen=True, eq=False)
class Tracks:
    """``place[t, s]``: number of the pair that mode t is at speed s, −1 where it is not found."""

    place: NDArray[np.int64]


def assurance(a: Complex, b: Complex) -> Real:
    """Modal assurance criterion |aᴴb|² / (aᴴa bᴴb) of all pairs of rows (Allemang 1982)."""
    cross = a.conj() @ b.T
    own = _squares(a)[:, None] * _squares(b)
    return np.asarray((cross.real**2 + cross.imag**2) / np.maximum(own, 1e-300))


def _squares(rows: Complex) -> Real:
    """Sum |·|² of each row, without the roots that an absolute value takes."""
    real, imag = np.ascontiguousarray(rows.real), np.ascontiguousarray(rows.imag)
    return np.asarray(np.einsum("ij,ij->i", real, real) + np.einsum("ij,ij->i", imag, imag))


def _vectors(pairs: Eigenpairs, length: float) -> Complex:
    scale = np.array([1, length, 1, length])
    return np.asarray((pairs.shaft * scale).reshape(pairs.exponents.size, -1))


def follow(pairs: Eigenpairs, speeds: Real, length: float) -> Tracks:
    """Link the pairs found at each of ``speeds`` into modes.

    Cost of a link: 1 − MAC plus the distance of λ from its straight continuation, in parts
    of 10 % of |λ|; the cheapest assignment at each speed is taken (Hungarian method).

    Parameters
    ----------
    pairs
        Sorted by speed.
    speeds
        Rising [rad/s].
    length
        By which slopes are weighed against deflections [m].
    """
    shapes = _vectors(pairs, length)
    groups = [np.flatnonzero(pairs.speeds == v) for v in speeds]
    tracks: list[dict[int, int]] = [{0: int(j)} for j in groups[0]]
    for s in range(1, len(groups)):
        live = [t for t in tracks if s - 1 in t]
        now = groups[s]
        free = set(now.tolist())
        if live and now.size:
            last = np.array([t[s - 1] for t in live])
            lam = pairs.exponents[last]
            ahead = lam.copy()
            for i, back in enumerate(live):
                if s - 2 in back:
                    ratio = (speeds[s] - speeds[s - 1]) / (speeds[s - 1] - speeds[s - 2])
                    ahead[i] += ratio * (lam[i] - pairs.exponents[back[s - 2]])
            mac = assurance(shapes[last], shapes[now])
            size = np.maximum(np.abs(lam), 1e-300)[:, None]
            off = np.abs(ahead[:, None] - pairs.exponents[now]) / size
            cost = (1 - mac) + 10 * off
            for i, j in np.column_stack(linear_sum_assignment(cost)).tolist():
                if mac[i, j] > _LEAST_MAC or off[i, j] < _CLOSE:
                    live[i][s] = int(now[j])
                    free.discard(int(now[j]))
        tracks += [{s: j} for j in sorted(free)]
    place = np.full((len(tracks), len(groups)), -1, dtype=np.int64)
    for row, track in enumerate(tracks):
        place[row, list(track)] = list(track.values())
    return Tracks(place)


def separate_twins(pairs: Eigenpairs) -> Eigenpairs:
    """Give equal eigenvalues (isotropic rotor at rest) pure forward and backward shapes.

    Any mixture of the two belongs to such a pair; the mixtures that turn most one way and
    most the other continue into the modes of the turning rotor.
    """
    shaft, pedestals = pairs.shaft.copy(), pairs.pedestals.copy()
    lam = pairs.exponents
    for i in range(lam.size - 1):
        j = i + 1
        same = pairs.speeds[i] == pairs.speeds[j]
        if not same or abs(lam[i] - lam[j]) > 1e-9 * abs(lam[i]):
            continue
        both = shaft[[i, j]]
        if assurance(both[:1].reshape(1, -1), both[1:].reshape(1, -1))[0, 0] > 1 - 1e-9:
            continue
        sign = np.array([1, 1, -1, -1])
        gram = np.einsum("ank,bnk->ab", both.conj(), both)
        sense = np.einsum("ank,bnk->ab", both.conj(), both * sign)
        _, mix = np.linalg.eig(np.linalg.solve(gram, sense))
        shaft[[i, j]] = np.einsum("ab,ank->bnk", mix, both)
        pedestals[[i, j]] = np.einsum("ab,ank->bnk", mix, pedestals[[i, j]])
    return Eigenpairs(lam, pairs.speeds, *normalised(shaft, pedestals), pairs.correction)
