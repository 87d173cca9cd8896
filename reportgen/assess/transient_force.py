"""The largest force of a passage of one mass, and the same by Newton's law."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from reportgen.assess.model import SecondComputation
from reportgen.assess.transient_model import ForcePeak
from reportgen.rotor import onemass

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from reportgen.assess.transient_side import OneMassSide

    Floats = NDArray[np.float64]
    Complexes = NDArray[np.complex128]


def largest_force(
    side: OneMassSide, time: Floats, speed: Floats, angle: Floats, z: Complexes, v: Complexes
) -> ForcePeak:
    """Return the largest force that holds the mass on its path, the weight left out.

    On rigid supports it is the force through shaft and damper, all of which the ground carries;
    otherwise mass times the acceleration of the mass centre, by differences of its velocity.

    Parameters
    ----------
    side
        The rotor.
    time, speed, angle, z, v
        Record in SI, shape (n,), some 24 instants a turn or more.
    """
    rotor = side.rotor
    static = rotor.mass * onemass.STANDARD_GRAVITY if side.sag else None
    if rotor.support is None and not rotor.internal_damping:
        bent = z - rotor.bow_vector * np.exp(1j * angle)
        force = np.abs(rotor.stiffness * bent + rotor.damping * v)
        name = "Shaft and damper into the ground"
    else:
        force = rotor.mass * np.abs(np.gradient(_centre(rotor, speed, angle, v), time))
        name = "What holds the mass on its path"
    at = int(np.argmax(force))
    return ForcePeak("", name, float(force[at]), float(time[at]), float(speed[at]), static)


def with_newton(
    side: OneMassSide, force: ForcePeak, time: Floats, speed: Floats, angle: Floats, v: Complexes
) -> ForcePeak:
    """Return a force with mass times the acceleration of the mass centre beside it.

    Parameters
    ----------
    side, force
        Rotor, and its largest force.
    time, speed, angle, v
        Five even instants around that of the force.
    """
    if side.rotor.support is not None or side.rotor.internal_damping:
        return force
    a, b, _, c, d = (complex(x) for x in _centre(side.rotor, speed, angle, v))
    rate = (a - 8.0 * b + 8.0 * c - d) / (12.0 * float(time[3] - time[2]))
    value = side.rotor.mass * abs(rate)
    second = SecondComputation(
        "mass times acceleration of its centre, by differences",
        value,
        1e-4,
        "fourth order in at most 1/48 turn",
    )
    return replace(force, second=second)


def _centre(rotor: onemass.OneMassRotor, speed: Floats, angle: Floats, v: Complexes) -> Complexes:
    """Return the velocity of the mass centre in m/s."""
    return np.asarray(v + 1j * speed * rotor.eccentricity * np.exp(1j * angle))
