"""The shaft between supports, eliminated for many (λ, Ω) at once.

Between supports forward and backward whirl are uncoupled and the blocks symmetric 2×2,
real for harmonic motion without internal damping. Arrays here have the axes (whirl f/b,
row, column, pair).
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from reportgen.rotor.stations.coefficients import Real
from reportgen.rotor.stations.model import Chain, Model

Blocks = NDArray[np.float64] | NDArray[np.complex128]
Complex = NDArray[np.complex128]


def product(a: Blocks, b: Blocks) -> Blocks:
    """Matrix product a b of 2×2 blocks with any number of columns in b."""
    return a[:, :, 0, None] * b[:, 0, None] + a[:, :, 1, None] * b[:, 1, None]


def product_t(a: Blocks, b: Blocks) -> Blocks:
    """Matrix product aᵀ b of 2×2 blocks."""
    return a[:, 0, :, None] * b[:, 0, None] + a[:, 1, :, None] * b[:, 1, None]


class ShaftBlocks:
    """2×2 blocks of the shaft's Z(λ, Ω), or of dZ/dλ, station by station."""

    def __init__(self, model: Model, exponents: Complex, speeds: Real, *, rate: bool) -> None:
        self._model = model
        # Solving and checking need each block several times.
        self._stations: dict[int, Blocks] = {}
        self._gaps: dict[int, Blocks] = {}
        lam = exponents
        turn = 1j * speeds if rate else 1j * speeds * lam
        mass = 2 * lam if rate else lam**2
        self._mass: Blocks = mass
        self._turn: Blocks = np.stack([-turn, turn])[:, None, None]
        self._elastic = 0.0 if rate else 1.0
        self._internal: Blocks | None = None
        if model.has_internal_damping:
            plain = np.stack([lam - 1j * speeds, lam + 1j * speeds])
            self._internal = (np.ones_like(plain) if rate else plain)[:, None, None]
        elif not (np.any(mass.imag) or np.any(turn.imag)):
            self._mass, self._turn = mass.real, self._turn.real

    def _block(self, pick: int, diagonal: bool) -> Blocks:
        def of(chain: Chain) -> Real:
            return np.asarray((chain.diagonal if diagonal else chain.upper)[pick, None, ..., None])

        model = self._model
        out = of(model.polar) * self._turn
        out += of(model.mass) * self._mass + self._elastic * of(model.stiffness)
        if self._internal is not None:
            out += of(model.internal) * self._internal
        return out

    def station(self, i: int) -> Blocks:
        """Diagonal block of station i; not to be written to."""
        if i not in self._stations:
            self._stations[i] = self._block(i, diagonal=True)
        return self._stations[i]

    def gap(self, i: int) -> Blocks:
        """Block that couples station i to station i + 1; not to be written to."""
        if i not in self._gaps:
            self._gaps[i] = self._block(i, diagonal=False)
        return self._gaps[i]


@dataclass
class Segment:
    """A run of stations between two supports after elimination.

    What it leaves at its left and right neighbours: symmetric blocks to add, the block that
    now couples right (row) to left (column), and loads to add.
    """

    first: int
    last: int
    left_block: Blocks | None = None
    right_block: Blocks | None = None
    across: Blocks | None = None
    left_load: Blocks | None = None
    right_load: Blocks | None = None
    _onward: list[Blocks] = field(default_factory=list)
    _back: list[Blocks] = field(default_factory=list)
    _still: list[Blocks] = field(default_factory=list)

    def recover(self, x: Complex) -> None:
        """Fill the motion of its stations in x (n, 2, 2, R, S) from its neighbours'."""
        for k in range(len(self._still) - 1, -1, -1):
            i = self.first + k
            x[i] = self._still[k]
            if i + 1 < x.shape[0]:
                x[i] -= product(self._onward[k], x[i + 1])
            if self._back:
                x[i] -= product(self._back[k], x[self.first - 1])


def eliminate(
    blocks: ShaftBlocks, first: int, last: int, stations: int, load: Complex, phase: Complex
) -> Segment:
    """Eliminate stations ``first`` to ``last``, which carry no support.

    Parameters
    ----------
    blocks
        Of the shaft.
    first, last
        Ends of the run, both included.
    stations
        Number n of the whole shaft.
    load
        (n, 2 f/b, 2, R, S).
    phase
        Multiplied in place by the unit factors of the determinants met.
    """
    run = Segment(first, last)
    if last < first:
        return run
    from_left: Blocks | None = None
    if first > 0:
        from_left = np.swapaxes(blocks.gap(first - 1), 1, 2)
    before: Blocks | None = None
    for i in range(first, last + 1):
        block = blocks.station(i)
        force: Blocks = load[i]
        if before is not None:
            block = block - product_t(before, run._onward[-1])
            force = force - product_t(before, run._still[-1])
            if run._back:
                from_left = -product_t(before, run._back[-1])
        inverse = _inverse(block, phase)
        run._still.append(product(inverse, force))
        if from_left is not None:
            run._back.append(product(inverse, from_left))
            self_left = product_t(from_left, run._back[-1])
            load_left = product_t(from_left, run._still[-1])
            run.left_block = -self_left if run.left_block is None else run.left_block - self_left
            run.left_load = -load_left if run.left_load is None else run.left_load - load_left
        if i + 1 < stations:
            before = blocks.gap(i)
            run._onward.append(product(inverse, before))
    if last + 1 < stations and before is not None:
        run.right_block = -product_t(before, run._onward[-1])
        run.right_load = -product_t(before, run._still[-1])
        if run._back:
            run.across = -product_t(before, run._back[-1])
    return run


def _inverse(block: Blocks, phase: Complex) -> Blocks:
    a, b, c, d = block[:, 0, 0], block[:, 0, 1], block[:, 1, 0], block[:, 1, 1]
    determinant = a * d - b * c
    size = np.abs(determinant)
    if np.any(size == 0):
        # Exactly singular: step aside by rounding; the residual check decides.
        aside = np.finfo(float).eps * (np.abs(a * d) + np.abs(b * c)) + 1e-300
        determinant = np.where(size == 0, aside, determinant)
        size = np.abs(determinant)
    phase *= (determinant / size).prod(axis=0)
    out = np.empty_like(block)
    scale = 1 / determinant
    out[:, 0, 0], out[:, 1, 1] = d * scale, a * scale
    out[:, 0, 1], out[:, 1, 0] = -b * scale, -c * scale
    return out
