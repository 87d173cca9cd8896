"""How much unbalance a rotor may keep by its journal loads, and how much is analysed."""

from __future__ import annotations

import math
from typing import Literal, NamedTuple

from reportgen.criteria.balance import permissible_unbalance
from reportgen.criteria.balance_planes import PlaneUnbalance, allocate
from reportgen.criteria.check import not_negative, positive
from reportgen.criteria.outcome import Limit, Outcome
from reportgen.criteria.sources import SOURCES, Source
from reportgen.errors import ModelError

ModeShape = Literal["translatory", "conical", "overhung"]

_RPM = 30.0 / math.pi
_G_MM = 1e-6
_FAST = 25000.0  # r/min at which 6350/N has fallen to 0.254


def residual_unbalance_by_load(journal_mass: float, speed: float) -> float:
    """Return the permissible residual unbalance in one plane [kg·m]: 6350·W/N g·mm.

    Parameters
    ----------
    journal_mass
        W, the mass [kg] whose weight the journal next to the plane carries at rest.
    speed
        Maximum continuous speed [rad/s]; N is the same in r/min. At and above 25 000 r/min
        the eccentricity stays at 0.254 µm.

    Raises
    ------
    ModelError
        If a number is not finite or not above zero.

    Notes
    -----
    API 617, from memory; in US units 4·W/N oz·in with W in lb. Check against the edition
    you hold.
    """
    mass, speed = positive("journal load", journal_mass), positive("speed", speed)
    return 6350.0 * _G_MM * mass / min(speed * _RPM, _FAST)


def residual_unbalance(
    residual: float | None,
    journal_mass: float | None,
    speed: float,
    *,
    source: Source = SOURCES["petroleum-unbalance"],
    title: str = "Residual unbalance by journal load",
) -> Outcome:
    """Judge the residual unbalance of one plane by :func:`residual_unbalance_by_load`.

    Parameters
    ----------
    residual
        Residual unbalance in the plane [kg·m]; None where not known.
    journal_mass
        Journal load at rest, as a mass [kg]; None where not known.
    speed
        Maximum continuous speed [rad/s].
    source, title
        Where the rule is stated, and what is judged.

    Raises
    ------
    ModelError
        If a number is not finite or out of its physical range.
    """
    limit = Limit(
        title,
        "at most",
        "unbalance",
        source,
        "6350·W/N g·mm in each plane, W the journal load in kg, N the maximum continuous speed "
        "in r/min (25 000 r/min where it is higher)",
        r"U_\mathrm{max} = 6350\,\frac{W}{N}\ \mathrm{g\,mm}",
    )
    speed = positive("speed", speed)
    value = None if residual is None else not_negative("residual unbalance", residual)
    if journal_mass is None:
        return limit.not_assessed("the journal load is not known", value=value)
    permissible = residual_unbalance_by_load(journal_mass, speed)
    if value is None:
        return limit.not_assessed("the residual unbalance is not known", limit=permissible)
    return limit.judge(value, permissible)


class PlacedUnbalance(NamedTuple):
    """An unbalance for the response analysis: where, how much [kg·m], at which angle [rad]."""

    where: str
    amount: float
    angle: float


def analysis_unbalance(
    shape: ModeShape,
    journal_masses: tuple[float, float],
    speed: float,
    *,
    multiple: float,
    overhung_mass: float | None = None,
) -> tuple[PlacedUnbalance, ...]:
    """Return the unbalances that excite a mode of the given shape most.

    Translatory (both journals move together): the sum of the two journals' amounts at the
    station that deflects most. Conical: each journal's own amount at the station near it that
    deflects most, in opposition. Overhung: the amount of the overhung mass at the overhang.

    Parameters
    ----------
    shape
        ``translatory``, ``conical`` or ``overhung``.
    journal_masses
        Journal loads at rest of bearings A and B, as masses [kg].
    speed
        Maximum continuous speed [rad/s].
    multiple
        How many times the permissible residual unbalance is analysed. Two and four are both
        met, by edition; there is no default: take it from the edition you hold.
    overhung_mass
        Mass [kg] beyond the bearing; needed for ``overhung`` only.

    Raises
    ------
    ModelError
        If a number is not finite or not above zero, the shape is not one of the three, or
        the overhung mass is missing.

    Notes
    -----
    API 684, from memory.
    """
    times = positive("multiple of the residual unbalance", multiple)
    a, b = (times * residual_unbalance_by_load(mass, speed) for mass in journal_masses)
    if shape == "translatory":
        return (PlacedUnbalance("largest deflection", a + b, 0.0),)
    if shape == "conical":
        return (
            PlacedUnbalance("largest deflection near bearing A", a, 0.0),
            PlacedUnbalance("largest deflection near bearing B", b, math.pi),
        )
    if shape == "overhung":
        if overhung_mass is None:
            raise ModelError("the overhung mass is not stated; an overhung mode is excited by it")
        amount = times * residual_unbalance_by_load(overhung_mass, speed)
        return (PlacedUnbalance("overhang", amount, 0.0),)
    raise ModelError(f"the mode shape is {shape!r}; state translatory, conical or overhung")


def grade_unbalance(
    grade: float,
    mass: float,
    speed: float,
    bearing_a: float,
    bearing_b: float,
    centre: float,
    *,
    opposed: bool,
) -> tuple[PlaneUnbalance, PlaneUnbalance]:
    """Return what a balance quality grade permits, placed in the two bearing planes.

    Parameters
    ----------
    grade, mass, speed
        See :func:`~reportgen.criteria.balance.permissible_unbalance`.
    bearing_a, bearing_b, centre
        See :func:`~reportgen.criteria.balance_planes.allocate`.
    opposed
        Whether the two stand opposite each other (a couple) or in one direction.

    Raises
    ------
    ModelError
        As for the two functions named.
    """
    split = allocate(permissible_unbalance(grade, mass, speed), bearing_a, bearing_b, centre)
    return (
        PlaneUnbalance(bearing_a, split.at_a, 0.0),
        PlaneUnbalance(bearing_b, split.at_b, math.pi if opposed else 0.0),
    )
