"""Torque against speed: drive, load and drag curves, and where they balance."""

from __future__ import annotations

import math
from bisect import bisect_right
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.interpolate import PchipInterpolator
from scipy.optimize import brentq

from reportgen.errors import ModelError
from reportgen.rotor import onemass_checks as check

Floats = NDArray[np.float64]

_GRID = 4001
"""Speeds at which the net torque is looked at; each change of sign is then narrowed."""


@dataclass(frozen=True, eq=False)
class TorqueCurve:
    """Torque tabulated against speed, interpolated monotonically between rows.

    Piecewise cubic Hermite interpolation (Fritsch & Carlson 1980) does not overshoot the rows.
    Nothing is extrapolated.

    Parameters
    ----------
    speeds
        Rows of the table [rad/s], 0 or more, strictly increasing, 2 or more, shape (n,).
    torques
        Torque at each [N·m], shape (n,). A drive's counts with the rotation; a load's and a drag's
        against it.
    name
        What it is called in messages.

    Raises
    ------
    ModelError
        If the rows are fewer than two, of different number, not finite or not in order; the
        message names the first row at fault.
    """

    speeds: ArrayLike
    torques: ArrayLike
    name: str = "torque curve"

    def __post_init__(self) -> None:
        rows = check.speeds(self.speeds, f"{self.name}, speed")
        try:
            torques = np.array(self.torques, dtype=np.float64)
        except (TypeError, ValueError):
            raise ModelError(f"{self.name}: torques are not real numbers in N·m") from None
        if rows.ndim != 1 or rows.size < 2 or torques.shape != rows.shape:
            raise ModelError(
                f"{self.name} has {rows.size} speeds and {torques.size} torques; give two or more "
                "rows with both"
            )
        bad = np.flatnonzero(~np.isfinite(torques))
        if bad.size:
            raise ModelError(f"{self.name}: the torque of row {bad[0] + 1} is not finite")
        back = np.flatnonzero(np.diff(rows) <= 0.0)
        if back.size:
            at = int(back[0])
            raise ModelError(
                f"{self.name}: row {at + 2} at {rows[at + 1]:g} rad/s does not come after row "
                f"{at + 1} at {rows[at]:g} rad/s; sort the rows by speed and drop repeated speeds"
            )
        object.__setattr__(self, "speeds", rows)
        object.__setattr__(self, "torques", torques)

    @classmethod
    def constant(cls, torque: float, low: float, high: float, name: str = "torque") -> TorqueCurve:
        """Give one torque [N·m] from a low to a high speed [rad/s]."""
        return cls([low, high], [torque, torque], name)

    @property
    def range(self) -> tuple[float, float]:
        """Lowest and highest speed of the table [rad/s]."""
        rows = np.asarray(self.speeds)
        return float(rows[0]), float(rows[-1])

    def at(self, speeds: ArrayLike) -> Floats:
        """Torque at speeds [N·m]; refuses any outside the table.

        Parameters
        ----------
        speeds
            Speeds of rotation [rad/s], any shape.

        Returns
        -------
        ndarray of float
            Torque [N·m], of the same shape.

        Raises
        ------
        ModelError
            If a speed lies outside the table; the message names its range.
        """
        wanted = check.speeds(speeds)
        if wanted.size:
            self.require(float(wanted.min()))
            self.require(float(wanted.max()))
        low, high = self.range
        return np.asarray(self._curve()(np.clip(wanted, low, high)))

    def require(self, speed: float) -> None:
        """Refuse a speed [rad/s] outside the table."""
        low, high = self.range
        if not low - 1e-9 * high <= speed <= high + 1e-9 * high:
            raise ModelError(
                f"{self.name} is asked for at {speed:.6g} rad/s, but its table covers {low:.6g} to "
                f"{high:.6g} rad/s; extend the table or narrow the speeds"
            )

    def held(self, factor: float = 1.0) -> Callable[[float], float]:
        """Give a fast function of one speed, times a factor, that holds its end values.

        For trial steps of an integrator, which may look a little past the end of the table;
        whoever uses it checks that no accepted speed lies outside.
        """
        curve = self._curve()
        knots = [float(x) for x in curve.x]
        last = len(knots) - 2
        pieces = [tuple(factor * float(c) for c in curve.c[:, j]) for j in range(last + 1)]
        low, high = knots[0], knots[-1]

        def torque(speed: float) -> float:
            inside = min(max(speed, low), high)
            j = min(max(bisect_right(knots, inside) - 1, 0), last)
            s = inside - knots[j]
            a, b, c, d = pieces[j]
            return ((a * s + b) * s + c) * s + d

        return torque

    def _curve(self) -> PchipInterpolator:
        return PchipInterpolator(np.asarray(self.speeds), np.asarray(self.torques))


@dataclass(frozen=True, eq=False)
class NetTorque:
    """Drive less load over a range of speeds, without what the whirl draws.

    Parameters
    ----------
    drive, load
        Torque curves; None for no torque.
    factor
        By which the drive torque is multiplied [-].
    """

    drive: TorqueCurve | None
    load: TorqueCurve | None
    factor: float = 1.0

    def at(self, speeds: ArrayLike) -> Floats:
        """Net torque at speeds [N·m]."""
        w = np.asarray(speeds, dtype=np.float64)
        net = np.zeros(w.shape)
        if self.drive is not None:
            net = net + self.factor * self.drive.at(w)
        if self.load is not None:
            net = net - self.load.at(w)
        return net

    def grid(self, low: float, high: float) -> Floats:
        """Speeds between two speeds [rad/s] that hold every row of the tables."""
        parts = [np.linspace(low, high, _GRID)]
        parts += [np.asarray(c.speeds) for c in (self.drive, self.load) if c is not None]
        speeds = np.unique(np.concatenate(parts))
        return speeds[(speeds >= low) & (speeds <= high)]

    def balances(self, low: float, high: float) -> tuple[float, ...]:
        """Speeds where drive and load balance [rad/s], in increasing order.

        Parameters
        ----------
        low, high
            Range looked at [rad/s].

        Returns
        -------
        tuple of float
            Where the net torque changes its sign, to 1e-12 relative, and where it is 0 at a
            table row; two changes within 1/4000 of the range can be missed.
        """
        speeds = self.grid(low, high)
        return sign_changes(self.at, speeds)

    def run_time(self, inertia: float, start: float, end: float) -> tuple[float, float]:
        """Time [s] and turns [-] from one speed to another, the whirl left out.

        Infinite where the net torque does not lead from one to the other.
        """
        way = 1.0 if end > start else -1.0
        speeds = self.grid(min(start, end), max(start, end))
        net = way * self.at(speeds)
        if float(net.min()) <= 0.0:
            return math.inf, math.inf
        duration = float(np.trapezoid(inertia / net, speeds))
        turns = float(np.trapezoid(inertia * speeds / net, speeds)) / (2.0 * math.pi)
        return duration, turns


def sign_changes(function: Callable[[Floats], Floats], grid: Floats) -> tuple[float, ...]:
    """Places where a function changes its sign, or is 0 at a point of the grid."""
    values = np.asarray(function(grid))
    found = [float(x) for x in grid[values == 0.0]]
    for j in np.flatnonzero(values[:-1] * values[1:] < 0.0):
        root = brentq(lambda x: float(function(np.asarray(x))), grid[j], grid[j + 1], xtol=1e-12)
        found.append(float(root))
    return tuple(sorted(found))
