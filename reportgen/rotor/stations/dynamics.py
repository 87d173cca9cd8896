"""Dynamic stiffness of the rotor at many (λ, Ω) at once, solved by block elimination.

The whirl is split into a forward and a backward part, x = f + b and y = −i(f − b), in
which the shaft is uncoupled:

    Z_f = λ²M − iλΩG + K (1 + η(λ − iΩ)),    Z_b = λ²M + iλΩG + K (1 + η(λ + iΩ)).

Bearings couple the two at their own station. The matrix is block tridiagonal, 4×4 blocks
in (f, f', b, b'), the off-diagonal blocks having only their two 2×2 parts. It is
eliminated block by block, every operation running over all pairs (λ, Ω): first the
stations without support, where the two whirls are uncoupled, then the few with one; a
pedestal is eliminated into its station. No global matrix is formed.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from reportgen.errors import ModelError
from reportgen.rotor.stations.coefficients import Real
from reportgen.rotor.stations.model import Model
from reportgen.rotor.stations.shaft import (
    Blocks,
    Complex,
    Segment,
    ShaftBlocks,
    eliminate,
    product,
    product_t,
)

# Real (x, y, α, β) from (f, f', b, b'), and back.
_TO_REAL = np.array([[1, 0, 1, 0], [-1j, 0, 1j, 0], [0, 1, 0, 1], [0, -1j, 0, 1j]])
_TO_WHIRL = np.linalg.inv(_TO_REAL)
_TRANSLATION = np.array([0, 2])  # f and b among (f, f', b, b')


def to_whirl(matrices: NDArray[np.generic]) -> Complex:
    """Turn matrices (..., 4, 4) in (x, y, α, β) into (f, f', b, b')."""
    return np.asarray(_TO_WHIRL @ matrices @ _TO_REAL, dtype=np.complex128)


@dataclass(frozen=True, eq=False)
class Motion:
    """Complex amplitudes of R motions at S pairs (λ, Ω).

    ``shaft`` has shape (n, 4, R, S) in (f, f', b, b'); ``pedestals`` (p, 2, R, S) in (f, b).
    """

    shaft: Complex
    pedestals: Complex


@dataclass(frozen=True, eq=False)
class _Attached:
    """One support at all pairs: 4×4 blocks and derivatives, pedestal's own 2×2."""

    node: int
    pedestal: int
    block: Complex
    block_rate: Complex
    ground: Complex
    ground_rate: Complex


def _first_axes(matrices: Complex) -> Complex:
    return np.ascontiguousarray(np.moveaxis(matrices, 0, -1))


class DynamicStiffness:
    """Z(λ, Ω) of a model at S pairs.

    Parameters
    ----------
    model
        The rotor.
    exponents
        λ [1/s], shape (S,): i·ω for harmonic motion.
    speeds
        Ω [rad/s], shape (S,).
    transposed
        Work with the transpose of Z instead (for left eigenvectors).
    """

    def __init__(
        self, model: Model, exponents: Complex, speeds: Real, *, transposed: bool = False
    ) -> None:
        self.model = model
        self.exponents = np.atleast_1d(np.asarray(exponents, dtype=np.complex128))
        self.speeds = np.atleast_1d(np.asarray(speeds, dtype=np.float64))
        if self.exponents.shape != self.speeds.shape:
            raise ModelError(
                f"{self.exponents.size} exponents against {self.speeds.size} speeds; give as many"
            )
        self._kept_blocks: dict[bool, ShaftBlocks] = {}
        self._supports = [self._attach(i, transposed) for i in range(len(model.supports))]

    def _attach(self, index: int, transposed: bool) -> _Attached:
        support = self.model.supports[index]
        lam = self.exponents[:, None, None]
        at = support.bearing.coefficients.at(self.speeds)
        block = to_whirl(at.stiffness + lam * (at.damping + lam * at.inertia))
        rate = to_whirl(at.damping + 2 * lam * at.inertia)
        if transposed:
            block, rate = np.swapaxes(block, 1, 2), np.swapaxes(rate, 1, 2)
        ground = np.zeros((self.speeds.size, 2, 2), dtype=np.complex128)
        ground_rate = ground.copy()
        pedestal = support.bearing.pedestal
        if pedestal is not None:
            m, k, c = (np.array(v) for v in (pedestal.mass, pedestal.stiffness, pedestal.damping))
            flat = self.exponents[:, None]
            own = k + flat * (c + flat * m)
            own_rate = c + 2 * flat * m
            for target, pair in ((ground, own), (ground_rate, own_rate)):
                mean, half = pair.sum(1) / 2, (pair[:, 0] - pair[:, 1]) / 2
                target[:, 0, 0] = target[:, 1, 1] = mean
                target[:, 0, 1] = target[:, 1, 0] = half
        return _Attached(
            support.node,
            support.pedestal,
            _first_axes(block),
            _first_axes(rate),
            _first_axes(ground),
            _first_axes(ground_rate),
        )

    def _station(self, node: int, blocks: ShaftBlocks, rate: bool = False) -> Complex:
        """Whole 4×4 block of a station with its supports, pedestals not yet eliminated."""
        block = _spread(blocks.station(node))
        for at in self._supports:
            if at.node == node:
                block += at.block_rate if rate else at.block
        return block

    def _blocks(self, rate: bool = False) -> ShaftBlocks:
        if rate not in self._kept_blocks:
            self._kept_blocks[rate] = ShaftBlocks(
                self.model, self.exponents, self.speeds, rate=rate
            )
        return self._kept_blocks[rate]

    def apply(self, motion: Motion, *, rate: bool = False, magnitude: bool = False) -> Motion:
        """Multiply: Z x, or (dZ/dλ) x with ``rate``, or |Z| |x| with ``magnitude``."""

        def size(array: Blocks) -> Blocks:
            return np.abs(array) if magnitude else array

        n, _, R, S = motion.shaft.shape
        blocks = self._blocks(rate)
        x = size(motion.shaft.reshape(n, 2, 2, R, S))
        p = size(motion.pedestals)
        out = np.empty(x.shape, dtype=x.dtype)
        for i in range(n):
            out[i] = product(size(blocks.station(i)), x[i])
            if i > 0:
                gap = size(blocks.gap(i - 1))
                out[i - 1] += product(gap, x[i])
                out[i] += product_t(gap, x[i - 1])
        shaft = out.reshape(n, 4, R, S)
        x = x.reshape(n, 4, R, S)
        down = np.zeros(p.shape, dtype=p.dtype)
        sign = 1 if magnitude else -1
        for at in self._supports:
            block = size(at.block_rate if rate else at.block)
            for k in range(4):
                shaft[at.node] += block[:, k, None] * x[at.node, k]
            if at.pedestal < 0:
                continue
            ground = at.ground_rate if rate else at.ground
            whole = at.block_rate if rate else at.block
            own = size(whole[np.ix_(_TRANSLATION, _TRANSLATION)] + ground)
            for j, k in enumerate(_TRANSLATION):
                shaft[at.node] += sign * block[:, k, None] * p[at.pedestal, j]
                down[at.pedestal] += own[:, j, None] * p[at.pedestal, j]
            for k in range(4):
                down[at.pedestal] += sign * block[_TRANSLATION, k, None] * x[at.node, k]
        return Motion(np.asarray(shaft), np.asarray(down))

    def entries(
        self, shaft: NDArray[np.int64], pedestals: NDArray[np.int64], *, rate: bool = False
    ) -> tuple[NDArray[np.int64], NDArray[np.int64], Complex]:
        """Rows, columns and values (N, S) of Z, or of dZ/dλ, for unknowns numbered as given."""
        rows: list[NDArray[np.int64]] = []
        columns: list[NDArray[np.int64]] = []
        values: list[Complex] = []

        def put(where: NDArray[np.int64], to: NDArray[np.int64], block: Complex) -> None:
            r, c = np.meshgrid(where, to, indexing="ij")
            rows.append(r.ravel())
            columns.append(c.ravel())
            values.append(block.reshape(r.size, -1))

        blocks = self._blocks(rate)
        for i in range(self.model.stations):
            put(shaft[i], shaft[i], self._station(i, blocks, rate))
            if i + 1 < self.model.stations:
                gap = blocks.gap(i)
                for w, s in ((0, slice(0, 2)), (1, slice(2, 4))):
                    put(shaft[i, s], shaft[i + 1, s], gap[w])
                    put(shaft[i + 1, s], shaft[i, s], np.swapaxes(gap[w], 0, 1))
        for at in self._supports:
            if at.pedestal < 0:
                continue
            block = at.block_rate if rate else at.block
            ground = at.ground_rate if rate else at.ground
            node, leaf = shaft[at.node], pedestals[at.pedestal]
            put(leaf, leaf, block[np.ix_(_TRANSLATION, _TRANSLATION)] + ground)
            put(node, leaf, -block[:, _TRANSLATION])
            put(leaf, node, -block[_TRANSLATION])
        return np.concatenate(rows), np.concatenate(columns), np.concatenate(values)

    def solve(self, load: Motion) -> Motion:
        """Solve Z x = load by block elimination, without pivoting between stations."""
        return self._eliminate(load)[0]

    def determinant_phase(self) -> Complex:
        """Give the unit complex number with the argument of det Z, shape (S,)."""
        empty = Motion(
            np.zeros((self.model.stations, 4, 0, self.speeds.size), dtype=np.complex128),
            np.zeros((self.model.pedestals, 2, 0, self.speeds.size), dtype=np.complex128),
        )
        return self._eliminate(empty)[1]

    def _eliminate(self, load: Motion) -> tuple[Motion, Complex]:
        n, _, R, S = load.shaft.shape
        phase = np.ones(S, dtype=np.complex128)
        blocks = self._blocks()
        given = load.shaft.reshape(n, 2, 2, R, S)
        kept = sorted({at.node for at in self._supports}) or [n - 1]
        runs = [
            eliminate(blocks, a + 1, b - 1, n, given, phase)
            for a, b in zip([-1, *kept], [*kept, n], strict=True)
        ]
        x = np.empty_like(given)
        pedestals = np.zeros((self.model.pedestals, 2, R, S), dtype=np.complex128)
        self._solve_supported(kept, runs, blocks, load, x.reshape(n, 4, R, S), pedestals, phase)
        for run in runs:
            run.recover(x)
        return Motion(x.reshape(n, 4, R, S), pedestals), phase

    def _solve_supported(
        self,
        kept: list[int],
        runs: list[Segment],
        blocks: ShaftBlocks,
        load: Motion,
        x: Complex,
        pedestals: Complex,
        phase: Complex,
    ) -> None:
        """Solve the chain of supported stations that is left, and fill them into x."""
        R, S = load.shaft.shape[2:]
        reduced: list[Complex] = []
        leaves: list[tuple[_Attached, Complex]] = []
        lower: Blocks | None = None
        for k, node in enumerate(kept):
            left, right = runs[k], runs[k + 1]
            rows = np.zeros((4, 8 + R, S), dtype=np.complex128)
            rows[:, :4] = self._station(node, blocks)
            rows[:, 8:] = load.shaft[node]
            for block, force in (
                (left.right_block, left.right_load),
                (right.left_block, right.left_load),
            ):
                if block is not None and force is not None:
                    rows[:, :4] += _spread(block)
                    rows[:, 8:] += force.reshape(4, R, S)
            for at in self._supports:
                if at.node == node and at.pedestal >= 0:
                    leaves.append((at, self._fold_pedestal(rows, at, load.pedestals, phase)))
            if lower is not None:
                _subtract(rows, lower, reduced[-1])
            if k + 1 < len(kept):
                empty = right.last < right.first
                direct = np.swapaxes(blocks.gap(node), 1, 2) if empty else right.across
                assert direct is not None
                lower = direct
                rows[:2, 4:6], rows[2:, 6:8] = np.swapaxes(lower, 1, 2)
            _reduce(rows, 4, phase)
            reduced.append(rows)
        for k in range(len(kept) - 1, -1, -1):
            x[kept[k]] = reduced[k][:, 8:]
            if k + 1 < len(kept):
                for j in range(4):
                    x[kept[k]] -= reduced[k][:, 4 + j, None] * x[kept[k + 1], j]
        for at, leaf in leaves:
            pedestals[at.pedestal] = leaf[:, 6:]
            for j in range(4):
                pedestals[at.pedestal] -= leaf[:, 2 + j, None] * x[at.node, j]

    @staticmethod
    def _fold_pedestal(rows: Complex, at: _Attached, loads: Complex, phase: Complex) -> Complex:
        """Eliminate a pedestal into its station; return its reduced rows for later."""
        own = at.block[np.ix_(_TRANSLATION, _TRANSLATION)] + at.ground
        leaf = np.concatenate([own, -at.block[_TRANSLATION], loads[at.pedestal]], axis=1)
        _reduce(leaf, 2, phase)
        for j, k in enumerate(_TRANSLATION):
            up = at.block[:, k, None]
            rows[:, :4] += up * leaf[j, None, 2:6]
            rows[:, 8:] += up * leaf[j, None, 6:]
        return leaf


def _spread(blocks: Blocks) -> Complex:
    """Put the forward and backward 2×2 blocks on the diagonal of a 4×4."""
    out = np.zeros((4, 4, blocks.shape[-1]), dtype=np.complex128)
    out[:2, :2], out[2:, 2:] = blocks[0], blocks[1]
    return out


def _subtract(rows: Complex, lower: Blocks, before: Complex) -> None:
    """Take ``lower`` times the already reduced rows before off this station's rows."""
    for w, s in ((0, 0), (1, 2)):
        for k in range(2):
            factor = lower[w, :, k, None]
            rows[s : s + 2, :4] -= factor * before[s + k, None, 4:8]
            rows[s : s + 2, 8:] -= factor * before[s + k, None, 8:]


def _reduce(rows: Complex, size: int, phase: Complex) -> None:
    """Gauss-Jordan on the leading ``size`` columns of ``rows`` (size, columns, S), in place."""
    for p in range(size):
        pivot = rows[p, p]
        magnitude = np.abs(pivot)
        if np.any(magnitude == 0):
            # An exactly singular leading part: nudge by rounding; the residual check decides.
            tiny = np.finfo(float).eps * np.abs(rows[:size, :size]).max(axis=(0, 1)) + 1e-300
            pivot = np.where(magnitude == 0, tiny, pivot)
            magnitude = np.abs(pivot)
        phase *= pivot / magnitude
        rows[p, p + 1 :] *= 1 / pivot
        for other in (slice(0, p), slice(p + 1, size)):
            rows[other, p + 1 :] -= rows[other, p, None] * rows[p, None, p + 1 :]
