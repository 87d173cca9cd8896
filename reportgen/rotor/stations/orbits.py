"""Shape of the orbit at each station: half-axes, inclination, sense."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from reportgen.rotor.stations.coefficients import Real
from reportgen.rotor.stations.response import Response
from reportgen.rotor.stations.shaft import Complex


@dataclass(frozen=True, eq=False)
class Orbits:
    """Elliptical orbits, arrays of one shape.

    ``major`` and ``minor`` half-axes [m, 0-peak]; ``inclination`` of the long axis from +x
    in (−π/2, π/2] [rad]; ``forward`` where the orbit is run through with the rotation;
    ``line`` where it is a straight line (short axis under 0.1 % of the long) and has no sense.
    """

    major: Real
    minor: Real
    inclination: Real
    forward: NDArray[np.bool_]
    line: NDArray[np.bool_]


def orbits_of(forward: Complex, backward: Complex) -> Orbits:
    """Describe x + iy = f e^{iΩt} + b̄ e^{−iΩt} for arrays f and b."""
    f, b = np.abs(forward), np.abs(backward)
    turn = (np.angle(forward) - np.angle(backward)) / 2
    # Half a turn of the long axis is the same axis.
    turn = np.pi / 2 - np.mod(np.pi / 2 - turn, np.pi)
    minor = np.abs(f - b)
    return Orbits(f + b, minor, turn, f > b, minor <= 1e-3 * (f + b))


def orbits(response: Response) -> Orbits:
    """Describe the orbit of every mesh station at every speed, (n, S)."""
    return orbits_of(response.forward[:, 0], response.backward[:, 0])
