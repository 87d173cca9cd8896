"""The one-mass rotor as data (Föppl 1895, Jeffcott 1919): disc, shaft, unbalance, bow, supports.

The equations these values enter stand in `reportgen.rotor.onemass`.
"""

from __future__ import annotations

import cmath
import math
from dataclasses import dataclass

from reportgen.rotor import onemass_checks as check


@dataclass(frozen=True)
class IsotropicSupport:
    """Support that is alike in all directions; each value is the total of both bearings.

    Parameters
    ----------
    stiffness
        Stiffness between the shaft ends and ground [N/m], greater than 0.
    damping
        Viscous damping between the shaft ends and ground [N·s/m], 0 or more.
    mass
        Mass that moves with the shaft ends [kg], 0 or more.

    Raises
    ------
    ModelError
        If a value is outside its range.
    """

    stiffness: float
    damping: float = 0.0
    mass: float = 0.0

    def __post_init__(self) -> None:
        check.positive("support stiffness", self.stiffness, "N/m")
        check.not_negative("support damping", self.damping, "N·s/m")
        check.not_negative("support mass", self.mass, "kg")


@dataclass(frozen=True)
class OneMassRotor:
    """Disc at the middle of a massless flexible shaft.

    Parameters
    ----------
    mass
        Mass of the disc, with the share of the shaft that is counted to it [kg], greater than 0.
    stiffness
        Force at the disc per deflection of the shaft there, shaft ends held [N/m], above 0.
    damping_ratio
        External damping over critical damping 2√(km) [-], 0 or more.
    eccentricity
        Distance of the mass centre from the shaft centre [m], 0 or more.
    internal_damping
        Viscous damping in the turning shaft, c_i [N·s/m], 0 or more.
    bow
        Residual bow of the shaft at the disc [m], 0 or more.
    bow_angle
        Angle from the unbalance to the bow, positive in the sense of rotation [rad].
    support
        Flexible support; rigid supports if none is given.

    Raises
    ------
    ModelError
        If a value is outside its range.
    """

    mass: float
    stiffness: float
    damping_ratio: float
    eccentricity: float = 0.0
    internal_damping: float = 0.0
    bow: float = 0.0
    bow_angle: float = 0.0
    support: IsotropicSupport | None = None

    def __post_init__(self) -> None:
        check.positive("mass", self.mass, "kg")
        check.positive("stiffness", self.stiffness, "N/m")
        check.not_negative("damping ratio", self.damping_ratio)
        check.not_negative("eccentricity", self.eccentricity, "m")
        check.not_negative("internal damping", self.internal_damping, "N·s/m")
        check.not_negative("bow", self.bow, "m")
        check.finite("bow angle", self.bow_angle, "rad")

    @property
    def natural_frequency(self) -> float:
        """Undamped natural frequency on rigid supports, √(k/m) [rad/s]."""
        return math.sqrt(self.stiffness / self.mass)

    @property
    def critical_damping(self) -> float:
        """Critical damping 2√(km) [N·s/m]."""
        return 2.0 * math.sqrt(self.stiffness * self.mass)

    @property
    def damping(self) -> float:
        """External viscous damping c = 2ζ√(km) [N·s/m]."""
        return self.damping_ratio * self.critical_damping

    @property
    def bow_vector(self) -> complex:
        """Bow in the turning frame, the unbalance along the real axis [m]."""
        return cmath.rect(self.bow, self.bow_angle)
