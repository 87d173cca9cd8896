"""Stiffness, damping and inertia of bearings and seals, constant or tabulated against speed."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.interpolate import PchipInterpolator

from reportgen.errors import ModelError

Real = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class SupportMatrices:
    """Matrices of one support at S speeds, each of shape (S, 4, 4) in (x, y, α, β).

    α = dx/dz and β = dy/dz are the slopes of the shaft. Units: N/m, N s/m and kg for the
    translations; N m/rad and so on for the slopes.
    """

    stiffness: Real
    damping: Real
    inertia: Real


class Coefficients(Protocol):
    """What a bearing or seal must tell about itself."""

    def at(self, speeds: Real) -> SupportMatrices:
        """Give the matrices at ``speeds`` (rad/s)."""
        ...


def square(values: ArrayLike, what: str) -> Real:
    """Read a scalar, 2×2 or 4×4 (last two axes) as 4×4 in (x, y, α, β).

    Raises
    ------
    ModelError
        If the shape is none of these or a value is not finite.
    """
    array = np.asarray(values, dtype=np.float64)
    if array.ndim == 0:
        array = array * np.eye(2)
    if array.ndim < 2 or array.shape[-2:] not in {(2, 2), (4, 4)}:
        raise ModelError(
            f"{what} has shape {array.shape}; give one number, a 2×2 matrix in (x, y) "
            "or a 4×4 matrix in (x, y, α, β)"
        )
    if not np.all(np.isfinite(array)):
        raise ModelError(f"{what} holds a value that is not finite; give finite numbers")
    if array.shape[-1] == 4:
        return array
    full = np.zeros((*array.shape[:-2], 4, 4))
    full[..., :2, :2] = array
    return full


@dataclass(frozen=True, eq=False)
class Constant:
    """Coefficients that do not change with speed.

    Parameters
    ----------
    stiffness, damping, inertia
        One number (isotropic), 2×2 in (x, y) [N/m], [N s/m], [kg], or 4×4 in (x, y, α, β).

    Raises
    ------
    ModelError
        If a shape is wrong or a value is not finite.
    """

    stiffness: ArrayLike
    damping: ArrayLike = 0.0
    inertia: ArrayLike = 0.0

    def __post_init__(self) -> None:
        for name in ("stiffness", "damping", "inertia"):
            matrix = square(getattr(self, name), name)
            if matrix.ndim != 2:
                raise ModelError(f"{name} has {matrix.ndim} axes; use SpeedTable for a table")
            object.__setattr__(self, name, matrix)

    def at(self, speeds: Real) -> SupportMatrices:
        """Give the matrices, the same at each of ``speeds`` (rad/s)."""
        shape = (np.asarray(speeds).size, 4, 4)
        return SupportMatrices(
            np.broadcast_to(np.asarray(self.stiffness), shape),
            np.broadcast_to(np.asarray(self.damping), shape),
            np.broadcast_to(np.asarray(self.inertia), shape),
        )


@dataclass(frozen=True, eq=False)
class SpeedTable:
    """Coefficients tabulated against running speed, interpolated monotonically.

    Piecewise cubic Hermite interpolation (Fritsch & Carlson 1980): no overshoot between
    rows. Nothing is extrapolated.

    Parameters
    ----------
    speeds
        Rows of the table [rad/s], shape (T,), strictly increasing, T ≥ 2.
    stiffness, damping, inertia
        Shape (T, 2, 2) or (T, 4, 4); inertia may be left out.

    Raises
    ------
    ModelError
        On construction if rows are missing or not increasing; on :meth:`at` if a speed
        lies outside the table, naming its range.
    """

    speeds: ArrayLike
    stiffness: ArrayLike
    damping: ArrayLike
    inertia: ArrayLike | None = None

    def __post_init__(self) -> None:
        rows = np.asarray(self.speeds, dtype=np.float64)
        if rows.ndim != 1 or rows.size < 2 or not np.all(np.isfinite(rows)):
            raise ModelError("a coefficient table needs at least two rows with finite speeds")
        if np.any(np.diff(rows) <= 0):
            row = int(np.argmax(np.diff(rows) <= 0)) + 2
            raise ModelError(
                f"speeds of a coefficient table must increase; row {row} does not exceed row "
                f"{row - 1}"
            )
        object.__setattr__(self, "speeds", rows)
        for name in ("stiffness", "damping", "inertia"):
            given = getattr(self, name)
            matrix = square(np.zeros((rows.size, 2, 2)) if given is None else given, name)
            if matrix.ndim != 3 or matrix.shape[0] != rows.size:
                raise ModelError(
                    f"{name} of a coefficient table has shape {np.shape(given)}; "
                    f"give one 2×2 matrix for each of its {rows.size} speeds"
                )
            object.__setattr__(self, name, matrix)

    @property
    def range(self) -> tuple[float, float]:
        """Lowest and highest speed of the table [rad/s]."""
        rows = np.asarray(self.speeds)
        return float(rows[0]), float(rows[-1])

    def at(self, speeds: Real) -> SupportMatrices:
        """Interpolate at ``speeds`` (rad/s), shape (S,); refuse any outside the table."""
        wanted = np.atleast_1d(np.asarray(speeds, dtype=np.float64))
        low, high = self.range
        slack = 1e-9 * high
        if wanted.size and (wanted.min() < low - slack or wanted.max() > high + slack):
            raise ModelError(
                f"coefficients asked for between {wanted.min():.6g} and {wanted.max():.6g} rad/s, "
                f"but the table covers {low:.6g} to {high:.6g} rad/s; "
                "extend the table or narrow the speeds"
            )
        # Many (mode, speed) pairs share few speeds: interpolate each speed once.
        unique, place = np.unique(np.clip(wanted, low, high), return_inverse=True)
        rows = np.asarray(self.speeds)

        def along(values: ArrayLike) -> Real:
            return np.asarray(PchipInterpolator(rows, np.asarray(values), axis=0)(unique))[place]

        assert self.inertia is not None
        return SupportMatrices(along(self.stiffness), along(self.damping), along(self.inertia))
