"""Balance quality by planes: what each bearing plane may keep, and what is found there."""

from __future__ import annotations

import math
from dataclasses import dataclass

from reportgen.criteria.balance import HOW
from reportgen.criteria.check import finite, not_negative, positive
from reportgen.criteria.outcome import Limit, Outcome
from reportgen.criteria.sources import SOURCES, Source
from reportgen.errors import ModelError


@dataclass(frozen=True)
class Allocation:
    """Permissible residual unbalance at each bearing plane [kg·m].

    Parameters
    ----------
    at_a, at_b
        Permissible in bearing plane A and B.
    overhung
        Whether the mass centre lies outside the bearings.
    limited
        Whether a share was brought within the bounds of the rule; the two then do not
        follow the distances alone.
    """

    at_a: float
    at_b: float
    overhung: bool
    limited: bool


def allocate(permissible: float, bearing_a: float, bearing_b: float, centre: float) -> Allocation:
    """Split a permissible residual unbalance between the two bearing planes.

    With distances L_A and L_B of the mass centre from the planes and L between them,
    U_A = U·L_B/L and U_B = U·L_A/L. Between the bearings each share is kept within 0.3 to
    0.7 of the whole; with the mass centre outside them, within 0.3 to 1.3.

    Parameters
    ----------
    permissible
        U_per of the rotor [kg·m].
    bearing_a, bearing_b, centre
        Positions of the bearing planes and of the mass centre along the shaft [m].

    Raises
    ------
    ModelError
        If a number is not finite, U_per is not above zero, or the planes coincide.

    Notes
    -----
    ISO 21940-11 (ISO 1940-1:2003), from memory; check against the edition you hold.
    """
    whole = positive("permissible unbalance", permissible)
    a, b = finite("position of bearing A", bearing_a), finite("position of bearing B", bearing_b)
    z = finite("position of the mass centre", centre)
    if a == b:
        raise ModelError("the two bearing planes coincide; state their two positions")
    overhung = not min(a, b) <= z <= max(a, b)
    most = 1.3 if overhung else 0.7
    raw = abs(b - z) / abs(b - a), abs(a - z) / abs(b - a)
    kept = tuple(min(max(part, 0.3), most) for part in raw)
    return Allocation(kept[0] * whole, kept[1] * whole, overhung, kept != raw)


@dataclass(frozen=True)
class PlaneUnbalance:
    """Unbalance found in one plane: position [m], amount [kg·m], angle [rad]."""

    position: float
    amount: float
    angle: float = 0.0


def residual_at_bearings(
    planes: list[PlaneUnbalance], bearing_a: float, bearing_b: float
) -> tuple[complex, complex]:
    """Return the unbalances in the bearing planes that act as those in the planes given.

    By the lever rule on the vectors: U_A = Σ u·(z_B − z)/L, U_B = Σ u·(z − z_A)/L.

    Parameters
    ----------
    planes
        Unbalances with their positions and angles.
    bearing_a, bearing_b
        Positions of the bearing planes [m].

    Returns
    -------
    tuple of complex
        Unbalance vectors in bearing planes A and B [kg·m].

    Raises
    ------
    ModelError
        If a number is not finite, an amount is negative, or the planes coincide.
    """
    a, b = finite("position of bearing A", bearing_a), finite("position of bearing B", bearing_b)
    if a == b:
        raise ModelError("the two bearing planes coincide; state their two positions")
    at_a = at_b = 0j
    for plane in planes:
        z = finite("position of an unbalance", plane.position)
        u = _vector(not_negative("unbalance", plane.amount), finite("angle", plane.angle))
        at_a += u * (b - z) / (b - a)
        at_b += u * (z - a) / (b - a)
    return at_a, at_b


def _vector(amount: float, angle: float) -> complex:
    return amount * complex(math.cos(angle), math.sin(angle))


def balance_grade_in_planes(
    planes: list[PlaneUnbalance] | None,
    allocation: Allocation,
    bearing_a: float,
    bearing_b: float,
    *,
    source: Source = SOURCES["balance-planes"],
) -> list[Outcome]:
    """Judge residual unbalances, carried to the two bearing planes, against the allocation.

    Parameters
    ----------
    planes
        Residual unbalances found; None where not known.
    allocation
        From :func:`allocate`.
    bearing_a, bearing_b
        Positions of the bearing planes [m].
    source
        Where the rule is stated.

    Raises
    ------
    ModelError
        As for :func:`residual_at_bearings`.
    """
    bounds = "0.3 to 1.3" if allocation.overhung else "0.3 to 0.7"
    how = f"{HOW}, split by the distances of the mass centre, within {bounds} of the whole"
    if allocation.limited:
        how += " (a share was brought to that bound)"
    latex = r"U_A = U_\mathrm{per}\frac{L_B}{L},\quad U_B = U_\mathrm{per}\frac{L_A}{L}"
    limits = [
        Limit(f"Residual unbalance, bearing plane {x}", "at most", "unbalance", source, how, latex)
        for x in "AB"
    ]
    permissible = allocation.at_a, allocation.at_b
    if planes is None:
        return [
            limit.not_assessed("the residual unbalance of the planes is not known", limit=most)
            for limit, most in zip(limits, permissible, strict=True)
        ]
    found = residual_at_bearings(planes, bearing_a, bearing_b)
    return [
        limit.judge(abs(u), most) for limit, u, most in zip(limits, found, permissible, strict=True)
    ]
