"""How far critical speeds lie from the operating range."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import NamedTuple

from reportgen.criteria.check import not_negative, positive
from reportgen.criteria.margin_rules import MarginRule, Side
from reportgen.criteria.outcome import ROUNDING, Limit, Outcome
from reportgen.errors import ModelError

_RPM = 30.0 / math.pi


class Critical(NamedTuple):
    """A critical speed: speed [rad/s], amplification factor if known, name in print."""

    speed: float
    amplification: float | None = None
    name: str = ""


def half_power_bands_overlap(one: Critical, other: Critical) -> bool:
    """Tell whether two critical speeds lie closer than their half-power bands reach.

    The band of a peak is N_c/AF wide. Where two bands overlap, the curve between them is
    made by both modes and the factor read from it belongs to neither.
    """
    if one.amplification is None or other.amplification is None:
        return False
    reach = 0.5 * (one.speed / one.amplification + other.speed / other.amplification)
    return abs(one.speed - other.speed) < reach


def separation_margins(
    criticals: Sequence[Critical | tuple[float, float | None]],
    minimum: float,
    maximum: float,
    rule: MarginRule,
    *,
    trip: float | None = None,
    searched: tuple[float, float | None] | None = None,
    conservative: bool = False,
) -> list[Outcome]:
    """Judge each critical speed against the operating range.

    The margin is (minimum − N_c)/minimum for a critical speed below the range,
    (N_c − maximum)/maximum for one above, and zero within the range (ends included), where
    the rule is not met unless it counts the speed as critically damped. A critical speed
    between the maximum continuous and the trip speed does not meet the rule either, unless
    critically damped: the margin asked for is then at least the distance to the trip speed.

    Parameters
    ----------
    criticals
        Critical speeds [rad/s] with their amplification factors, None where not known.
    minimum, maximum
        Minimum operating and maximum continuous speed [rad/s]; equal for a machine of one
        speed.
    rule
        What is asked for.
    trip
        Trip speed [rad/s], if there is one.
    searched
        Lowest and highest speed [rad/s] between which critical speeds were looked for, the
        highest None where the method knows them all. With it, "none found" is a finding;
        without it, nothing is known.
    conservative
        Whether a critical speed whose amplification factor is missing or unreliable is judged
        by the largest margin the rule can ask for, instead of not at all.

    Returns
    -------
    list of Outcome
        One for each critical speed, in the order of speed; one for each side on which none
        was found as far as it had to be looked for, or was not looked for far enough.

    Raises
    ------
    ModelError
        If a speed or factor is not finite or not above zero, or the speeds are not in order.

    Notes
    -----
    A missing or unreliable factor never costs a verdict that does not depend on it: a
    critical speed beyond the largest margin meets the rule, and one within the range does
    not, unless its (unreliable) factor would excuse it.
    """
    minimum = positive("minimum operating speed", minimum)
    maximum = positive("maximum continuous speed", maximum)
    trip = maximum if trip is None else positive("trip speed", trip)
    if not minimum <= maximum <= trip:
        raise ModelError(
            f"the minimum, maximum continuous and trip speeds are {_rpm(minimum)}, "
            f"{_rpm(maximum)} and {_rpm(trip)}; they must not decrease"
        )
    found = _named(criticals)
    outcomes = [
        _judge(critical, _spoiled(critical, found), minimum, maximum, trip, rule, conservative)
        for critical in found
    ]
    sides: set[Side] = {_side(critical.speed, minimum, maximum) for critical in found}
    return outcomes + _sides_without(sides, minimum, maximum, trip, rule, searched)


def _named(criticals: Sequence[Critical | tuple[float, float | None]]) -> list[Critical]:
    given = sorted((Critical(*entry) for entry in criticals), key=lambda c: c.speed)
    for critical in given:
        positive("critical speed", critical.speed)
        if critical.amplification is not None:
            positive("amplification factor", critical.amplification)
    return [
        critical if critical.name else critical._replace(name=f"critical speed {number}")
        for number, critical in enumerate(given, start=1)
    ]


def _spoiled(critical: Critical, found: list[Critical]) -> Critical | None:
    others = (other for other in found if other is not critical)
    return next((o for o in others if half_power_bands_overlap(critical, o)), None)


def _side(speed: float, minimum: float, maximum: float) -> Side:
    if speed < minimum * (1.0 - ROUNDING):
        return "below"
    return "above" if speed > maximum * (1.0 + ROUNDING) else "within"


def _judge(
    critical: Critical,
    neighbour: Critical | None,
    minimum: float,
    maximum: float,
    trip: float,
    rule: MarginRule,
    conservative: bool,
) -> Outcome:
    side = _side(critical.speed, minimum, maximum)
    kept = {
        "below": (minimum - critical.speed) / minimum,
        "above": (critical.speed - maximum) / maximum,
        "within": 0.0,
    }[side]
    required = rule.required(side, critical.amplification)
    needs_factor = rule.required(side, None) is None
    unsure = needs_factor and (neighbour is not None or required is None)
    excused = required == 0.0 and rule.most(side) > 0.0
    limit = _limit(critical, f"Separation margin, {critical.name}", side, rule, unsure)
    beyond_trip = (trip - maximum) / maximum if side == "above" else 0.0
    asked = rule.most(side) if unsure or required is None else required
    if not excused or unsure:
        asked = max(asked, beyond_trip)
    if not unsure:
        where = _where(critical.speed, side, trip, excused)
        strictly = not excused and (side == "within" or asked == beyond_trip)
        return limit.judge(kept, asked, reason=where, strictly=strictly)
    why = _why_unsure(critical, neighbour)
    if side == "within" and not excused:
        return limit.judge(
            kept, asked, reason=f"{_where(critical.speed, side, trip, False)}; {why}", strictly=True
        )
    if kept >= asked * (1.0 - ROUNDING):
        return limit.judge(
            kept, asked, reason=f"{why}; it lies beyond the largest margin the rule can ask for"
        )
    if conservative:
        return limit.judge(
            kept, asked, reason=f"{why}; judged by the largest margin the rule can ask for"
        )
    return limit.not_assessed(
        f"{why}; the margin asked for cannot be stated", value=kept, limit=None
    )


def _limit(critical: Critical, title: str, side: Side, rule: MarginRule, unsure: bool) -> Limit:
    end = {
        "below": "counted from the minimum operating speed, as a share of it",
        "above": "counted from the maximum continuous speed, as a share of it",
        "within": "zero for a critical speed within the operating range",
    }[side]
    factor = None if unsure else critical.amplification
    return Limit(
        title=title,
        sense="at least",
        quantity="percent",
        source=rule.source,
        how=f"{rule.words(side, factor)}; {end}",
        how_latex=rule.latex(side, factor),
    )


def _where(speed: float, side: Side, trip: float, excused: bool) -> str:
    tail = "; counted as critically damped" if excused else ""
    if side == "within":
        return f"the critical speed of {_rpm(speed)} lies within the operating range{tail}"
    if side == "above" and speed <= trip:
        return (
            f"the critical speed of {_rpm(speed)} lies between the maximum continuous and the "
            f"trip speed{tail}"
        )
    return tail.removeprefix("; ")


def _why_unsure(critical: Critical, neighbour: Critical | None) -> str:
    if neighbour is None:
        return "the amplification factor is not known"
    return (
        f"it lies {_rpm(abs(critical.speed - neighbour.speed))} from {neighbour.name}, closer "
        "than their half-power bands, so its amplification factor is not reliable"
    )


def _sides_without(
    sides: set[Side],
    minimum: float,
    maximum: float,
    trip: float,
    rule: MarginRule,
    searched: tuple[float, float | None] | None,
) -> list[Outcome]:
    if searched is None:
        if sides:
            return []
        limit = _side_limit("within", rule)
        return [limit.not_assessed("no critical speed is stated, nor where one was looked for")]
    low = not_negative("lowest speed searched", searched[0])
    high = None if searched[1] is None else positive("highest speed searched", searched[1])
    if high is not None and low > high:
        raise ModelError(f"the search runs from {_rpm(low)} to {_rpm(high)}; low comes first")
    if low == 0.0 and high is None:
        nothing = "the rotor has no critical speed"
        return [] if sides else [_side_limit("within", rule).met_for_want_of(nothing)]
    beyond = rule.most("above"), (trip - maximum) / maximum
    reach: list[tuple[Side, float, float]] = [
        ("below", (minimum - low) / minimum, rule.most("below"))
    ]
    if high is not None:
        reach.append(("above", (high - maximum) / maximum, max(beyond)))
    span = f"from {_rpm(low)} up" if high is None else f"from {_rpm(low)} to {_rpm(high)}"
    outcomes = []
    for side, kept, asked in reach:
        limit = _side_limit(side, rule)
        if side not in sides and kept < asked * (1.0 - ROUNDING):
            short = "which does not reach as far as a margin may be asked for"
            outcomes.append(
                limit.not_assessed(f"critical speeds were looked for {span}, {short}", limit=asked)
            )
        elif not sides:
            none = f"no critical speed {span}; the margin is at least this"
            outcomes.append(limit.judge(kept, asked, reason=none))
    return outcomes


def _side_limit(side: Side, rule: MarginRule) -> Limit:
    where = "" if side == "within" else f", {side} the operating range"
    return _limit(Critical(1.0), f"Separation margin{where}", side, rule, True)


def _rpm(speed: float) -> str:
    return f"{speed * _RPM:.4g} r/min" if speed * _RPM < 1e4 else f"{speed * _RPM:.0f} r/min"
