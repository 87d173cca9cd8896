"""Bending stress of the one-mass rotor's shaft, where the case gives its dimensions."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from reportgen.assess.one_mass_rotor import si
from reportgen.rotor import beams, onemass

if TYPE_CHECKING:
    from reportgen.case.onemass import OneMassCase


@dataclass(frozen=True)
class StressFindings:
    """Nominal bending stress at constant speed, in SI.

    The weight bends the shaft in a fixed plane and so alternates once a turn in the shaft;
    the whirl bends it steadily. ``force`` adds both as if they pointed one way at one instant.

    Parameters
    ----------
    weight, whirl
        Static and rotating force at the mass, N.
    moment
        Largest bending moment, N·m.
    arm
        Moment for a force of one, m.
    outer, inner
        Diameters, m.
    stress
        Moment over section modulus, Pa, without notch factor.
    """

    weight: float
    whirl: float
    moment: float
    arm: float
    outer: float
    inner: float
    stress: float

    @property
    def force(self) -> float:
        """Weight and whirl together, N."""
        return self.weight + self.whirl


def find_stress(
    case: OneMassCase, rotor: onemass.OneMassRotor, speed: float
) -> StressFindings | None:
    """Return the shaft's bending stress at a constant speed, None without its dimensions."""
    shaft = case.rotor.shaft
    if shaft is None:
        return None
    span, position = si(shaft.span), si(shaft.position)
    match shaft.support:
        case "simply supported":
            arm = beams.simply_supported_moment(1.0, span, position)
        case "built in at both ends":
            arm = beams.built_in_moment(1.0, span, position)
        case "built in at one end":
            arm = beams.overhung_moment(1.0, position)
        case _:
            arm = beams.overhung_moment(1.0, si(shaft.overhang))
    horizontal = case.machine.orientation == "horizontal"
    weight = rotor.mass * onemass.STANDARD_GRAVITY if horizontal else 0.0
    whirl = abs(complex(onemass.bearing_force(rotor, speed).shaft))
    moment = float(arm) * (weight + whirl)
    outer, inner = float(shaft.outer_diameter), si(shaft.inner_diameter)
    return StressFindings(
        weight=weight,
        whirl=whirl,
        moment=moment,
        arm=float(arm),
        outer=outer,
        inner=inner,
        stress=float(beams.bending_stress(moment, outer, inner)),
    )
