"""Peak of a passage against acceleration and damping, and the least acceleration for a clearance.

By the exact form of the one mass: vectorised where the rotor stands on rigid supports without
bow, ramp by ramp otherwise.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from reportgen.errors import ModelError
from reportgen.rotor import passage
from reportgen.rotor.passage_map import (
    FASTEST_COAST_DOWN,
    FASTEST_RUN_UP,
    LeastAcceleration,
    least_acceleration,
    peak_map,
)

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from reportgen.rotor.onemass import OneMassRotor

    Floats = NDArray[np.float64]

_FACTORS = (0.5, 1.0, 2.0)
_GRID = 49
_SINGLE = 17


@dataclass(frozen=True, eq=False)
class PeakMap:
    """Peaks of ramps through the critical speed.

    Parameters
    ----------
    acceleration
        Sizes in rad/s², shape (n,).
    damping
        Damping ratios of the curves, shape (c,); that of the machine is at ``own``.
    curves
        Peak in m (0-peak) of each curve, shape (c, n).
    grid_damping, grid
        Damping ratios, shape (g,), and peaks, shape (g, n), for the map; None where the rotor has
        no vectorised form.
    at, peak
        Acceleration of the machine where it crosses the critical, and its peak.
    sign
        1 on run-up, −1 on coast-down.
    room
        Amplitude that the closest clearance leaves; None where none is stated.
    least
        Least acceleration that keeps the peak within it.
    places
        What the curves are of, where it is not damping: probes and clearances of a rotor by
        stations; empty for one mass.
    """

    acceleration: Floats
    damping: tuple[float, ...]
    curves: Floats
    grid_damping: Floats | None
    grid: Floats | None
    at: float
    peak: float
    sign: float
    room: float | None
    least: LeastAcceleration | None
    places: tuple[str, ...] = ()
    own: int = 1


def map_of(
    rotor: OneMassRotor,
    speeds: tuple[float, float],
    acceleration: float,
    peak: float,
    room: float | None,
) -> PeakMap | None:
    """Return the map of a rotor around one passage of it.

    Parameters
    ----------
    rotor
        The rotor; with damping, without internal damping, or there is no map.
    speeds
        First and last speed of the passage in rad/s, on either side of the critical.
    acceleration
        At the critical speed, rad/s², signed.
    peak
        Of the passage, m.
    room
        Amplitude that the closest clearance leaves, m.
    """
    zeta, square = rotor.damping_ratio, rotor.natural_frequency**2
    if rotor.internal_damping or zeta <= 0.0 or zeta >= 0.3 or acceleration == 0.0:
        return None
    sign = 1.0 if acceleration > 0.0 else -1.0
    size = abs(acceleration) / square
    fastest = FASTEST_RUN_UP if sign > 0 else FASTEST_COAST_DOWN
    low = max(min(size / 5.0, 0.02 * zeta**2), 2e-10)
    high = min(max(size * 5.0, 4.0 * zeta**2), fastest)
    if not 2e-10 < size < fastest or low >= high:
        return None
    damping = tuple(zeta * factor for factor in _FACTORS)
    plain = rotor.support is None and rotor.bow == 0.0 and rotor.eccentricity > 0.0
    count = _GRID if plain else _SINGLE
    scaled = np.unique(np.append(np.geomspace(low, high, count), size))
    grid_damping = grid = None
    if plain:
        grid_damping = np.geomspace(0.4 * zeta, min(2.5 * zeta, 0.69), 31)
        every = np.concatenate([damping, grid_damping])
        peaks = rotor.eccentricity * peak_map(
            every, sign * scaled * square, rotor.natural_frequency
        )
        curves, grid = peaks[: len(damping)], peaks[len(damping) :]
    else:
        curves = np.array(
            [
                _ramps(replace(rotor, damping_ratio=ratio), speeds, sign * scaled * square)
                for ratio in damping
            ]
        )
    return PeakMap(
        acceleration=scaled * square,
        damping=damping,
        curves=curves,
        grid_damping=grid_damping,
        grid=grid,
        at=abs(acceleration),
        peak=peak,
        sign=sign,
        room=room,
        least=least_of(rotor, speeds, room),
    )


def _ramps(rotor: OneMassRotor, speeds: tuple[float, float], accelerations: Floats) -> Floats:
    return np.array(
        [
            passage.passage_peak(rotor, passage.ConstantAcceleration(*speeds, float(a))).amplitude
            for a in accelerations
        ]
    )


def least_of(
    rotor: OneMassRotor, speeds: tuple[float, float], room: float | None
) -> LeastAcceleration | None:
    """Return the least constant acceleration that keeps the peak within an amplitude."""
    if room is None:
        return None
    if room <= 0.0:
        return LeastAcceleration(
            None, None, exists=False, reason="sag and runout alone use up what is allowed"
        )
    try:
        return least_acceleration(rotor, room, *speeds)
    except ModelError as error:
        return LeastAcceleration(None, None, exists=False, reason=str(error))
