"""Critical speed map: undamped criticals against support stiffness, and on the bearings' own."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.optimize import brentq

from reportgen.rotor.stations.coefficients import Real
from reportgen.rotor.stations.criticals import Whirl, undamped_criticals
from reportgen.rotor.stations.model import Model


@dataclass(frozen=True, eq=False)
class CriticalSpeedMap:
    """Undamped criticals against support stiffness.

    ``stiffness`` [N/m], shape (T,); ``speeds`` [rad/s], shape (T, m), zero where ``found``
    is False (no such critical at that stiffness).
    """

    stiffness: Real
    speeds: Real
    found: NDArray[np.bool_]
    whirl: Whirl


def critical_speed_map(
    model: Model,
    stiffness: ArrayLike,
    count: int = 4,
    whirl: Whirl = "forward",
    *,
    pedestals: bool = False,
) -> CriticalSpeedMap:
    """Find the criticals at each of a row of support stiffnesses.

    Parameters
    ----------
    stiffness
        [N/m], shape (T,), the same at every weight-carrying bearing.
    count, whirl, pedestals
        See :func:`undamped_criticals`; here ``stiffness`` is by default that of the whole
        support.
    """
    row = np.atleast_1d(np.asarray(stiffness, dtype=np.float64))
    speeds = np.zeros((row.size, count))
    found = np.zeros((row.size, count), dtype=bool)
    for t, k in enumerate(row):
        got = undamped_criticals(model, float(k), count, whirl, pedestals=pedestals).speeds
        speeds[t, : got.size] = got
        found[t, : got.size] = True
    return CriticalSpeedMap(row, speeds, found, whirl)


@dataclass(frozen=True)
class ActualCritical:
    """Undamped critical where the map meets the bearings' own stiffness.

    ``speed`` [rad/s]; ``stiffness`` [N/m] of the bearings there, mean over the bearings;
    ``mode`` number from 0.
    """

    mode: int
    speed: float
    stiffness: float


def criticals_on_bearings(
    model: Model,
    speeds: ArrayLike,
    count: int = 4,
    whirl: Whirl = "forward",
    direction: Literal["x", "y", "mean"] = "mean",
    *,
    pedestals: bool = False,
) -> list[ActualCritical]:
    """Find undamped criticals on the bearings' own direct stiffness, where it depends on speed.

    Critical m(Ω) of the rotor on the stiffness that its bearings have at Ω is followed over
    ``speeds``; where it equals Ω is a critical. Damping and cross terms are left out.

    Parameters
    ----------
    model
        The rotor.
    speeds
        Rising [rad/s], within every coefficient table.
    count, whirl, pedestals
        See :func:`undamped_criticals`.
    direction
        Direct stiffness k_xx, k_yy, or the mean of both.

    Returns
    -------
    list of ActualCritical
        Those between the first and the last of ``speeds``, rising.
    """
    row = np.atleast_1d(np.asarray(speeds, dtype=np.float64))

    def springs(speed: float) -> Real:
        out = []
        for support in model.supports:
            k = support.bearing.coefficients.at(np.array([speed])).stiffness[0]
            pick = {"x": k[0, 0], "y": k[1, 1], "mean": (k[0, 0] + k[1, 1]) / 2}
            out.append(max(float(pick[direction]), 0.0))
        return np.array(out)

    def criticals(speed: float) -> Real:
        got = undamped_criticals(model, springs(speed), count, whirl, pedestals=pedestals).speeds
        return np.pad(got, (0, count - got.size), constant_values=np.inf)

    table = np.array([criticals(float(v)) for v in row]) - row[:, None]
    found = []
    for m in range(count):
        for s in np.flatnonzero((table[:-1, m] >= 0) & (table[1:, m] < 0)):
            speed = brentq(lambda v, m=m: criticals(v)[m] - v, row[s], row[s + 1], rtol=1e-12)
            carried = [s_.bearing.carries_weight for s_ in model.supports]
            k = springs(speed)[np.array(carried, dtype=bool)]
            found.append(ActualCritical(m, float(speed), float(k.mean()) if k.size else 0.0))
    return sorted(found, key=lambda c: c.speed)
