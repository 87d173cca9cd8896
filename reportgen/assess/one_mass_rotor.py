"""From the givens of a one-mass case to the rotor of the mechanics."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from reportgen.rotor import beams, damping
from reportgen.rotor.onemass import IsotropicSupport, OneMassRotor

if TYPE_CHECKING:
    from reportgen.case.given import Given
    from reportgen.case.onemass import OneMassCase


def si(given: Given | None, otherwise: float = 0.0) -> float:
    """Return a given's value in SI, or another where the case states none."""
    return otherwise if given is None else float(given)


def rotor_of(case: OneMassCase) -> OneMassRotor:
    """Return the rotor that a case describes, in SI."""
    given = case.rotor
    mass = float(given.mass)
    stiffness = stiffness_of(case)
    support = None
    if given.support is not None:
        support = IsotropicSupport(
            stiffness=float(given.support.stiffness),
            damping=si(given.support.damping),
            mass=si(given.support.mass),
        )
    return OneMassRotor(
        mass=mass,
        stiffness=stiffness,
        damping_ratio=damping_ratio_of(case, mass, stiffness),
        eccentricity=eccentricity_of(case),
        internal_damping=si(given.internal_damping),
        bow=float(given.bow.amount) if given.bow else 0.0,
        bow_angle=si(given.bow.angle) if given.bow else 0.0,
        support=support,
    )


def stiffness_of(case: OneMassCase) -> float:
    """Return the shaft stiffness at the mass in N/m, stated or from the shaft's dimensions."""
    shaft = case.rotor.shaft
    if shaft is None:
        return si(case.rotor.stiffness)
    area_moment = float(beams.area_moment(float(shaft.outer_diameter), si(shaft.inner_diameter)))
    modulus, span, position = float(shaft.modulus), si(shaft.span), si(shaft.position)
    match shaft.support:
        case "simply supported":
            k = beams.simply_supported(modulus, area_moment, span, position)
        case "built in at both ends":
            k = beams.built_in_both_ends(modulus, area_moment, span, position)
        case "built in at one end":
            k = beams.cantilever(modulus, area_moment, position)
        case _:
            k = beams.overhung(modulus, area_moment, span, si(shaft.overhang))
    return float(k)


def damping_ratio_of(case: OneMassCase, mass: float, stiffness: float) -> float:
    """Return the damping ratio, from whichever measure of damping the case states."""
    given = case.rotor.damping
    if given.ratio is not None:
        return float(given.ratio)
    if given.logarithmic_decrement is not None:
        return float(damping.ratio_from_decrement(float(given.logarithmic_decrement)))
    if given.amplification_factor is not None:
        return float(damping.ratio_from_amplification(float(given.amplification_factor)))
    return si(given.coefficient) / (2.0 * math.sqrt(mass * stiffness))


def reference_speed_of(case: OneMassCase) -> float:
    """Return the speed in rad/s that a balance quality grade is applied at."""
    return float(case.speeds.maximum_continuous or case.speeds.rated)


def eccentricity_of(case: OneMassCase) -> float:
    """Return the mass eccentricity in m, from whichever measure of unbalance is stated."""
    given = case.unbalance
    if given.eccentricity is not None:
        return float(given.eccentricity)
    if given.amount is not None:
        return float(given.amount) / float(case.rotor.mass)
    return si(given.grade) / reference_speed_of(case)
