"""Zones of casing velocity, by size of machine and kind of support."""

from __future__ import annotations

import math
from typing import Literal

from reportgen.criteria.check import not_negative, positive
from reportgen.criteria.measures import convert_amplitude
from reportgen.criteria.outcome import Limit, Measure, Outcome
from reportgen.criteria.sources import SOURCES, Source
from reportgen.criteria.zones import Boundary, Zones
from reportgen.errors import ModelError

Group = Literal[1, 2]
Support = Literal["rigid", "flexible"]

_RPM = 30.0 / math.pi
_SLOWEST, _FASTEST = 120.0, 30000.0  # r/min

# r.m.s. velocity [m/s]. Group 1: above 300 kW up to 50 MW, electric machines of shaft height
# 315 mm and more. Group 2: above 15 kW up to 300 kW, shaft height 160 mm up to 315 mm.
_ZONES: dict[tuple[int, str], Zones] = {
    (1, "rigid"): Zones(2.3e-3, 4.5e-3, 7.1e-3),
    (1, "flexible"): Zones(3.5e-3, 7.1e-3, 11.0e-3),
    (2, "rigid"): Zones(1.4e-3, 2.8e-3, 4.5e-3),
    (2, "flexible"): Zones(2.3e-3, 4.5e-3, 7.1e-3),
}


def casing_velocity_zones(group: Group, support: Support) -> Zones:
    """Return the r.m.s. velocities [m/s] at the zone boundaries.

    Parameters
    ----------
    group
        1 (above 300 kW) or 2 (above 15 kW up to 300 kW).
    support
        ``rigid`` where the lowest natural frequency of machine on support lies at least a
        quarter above the frequency of running, in the direction of measuring; else ``flexible``.

    Raises
    ------
    ModelError
        If the group or the support is none of these.

    Notes
    -----
    ISO 20816-3, values as in ISO 10816-3:2009, from memory; check against the edition you hold.
    """
    if (group, support) not in _ZONES:
        raise ModelError(
            f"the machine group is {group!r} on a {support!r} support; state 1 or 2, and rigid or "
            "flexible"
        )
    return _ZONES[group, support]


def harmonic_velocity(amplitude: float, speed: float) -> float:
    """Return the velocity amplitude Ω·a [m/s] of a harmonic motion, in the measure of ``a``.

    Raises
    ------
    ModelError
        If the amplitude is negative, the speed is not above zero, or one is not finite.
    """
    return not_negative("amplitude", amplitude) * positive("speed", speed)


def casing_velocity(
    velocity: float | None,
    speed: float,
    *,
    group: Group,
    support: Support,
    boundary: Boundary,
    measure: Measure = "r.m.s.",
    harmonic: bool = False,
    source: Source = SOURCES["casing-zones"],
    title: str = "Casing velocity",
) -> Outcome:
    """Judge the velocity of a bearing housing against a zone boundary.

    Parameters
    ----------
    velocity
        Largest of the measuring directions [m/s]; None where not known.
    speed
        Service speed [rad/s], 120 to 30 000 r/min.
    group, support
        See :func:`casing_velocity_zones`.
    boundary
        ``A/B``, ``B/C`` or ``C/D``.
    measure, harmonic
        See :func:`~reportgen.criteria.measures.convert_amplitude`; the limit is r.m.s.
    source, title
        Where the limit is stated, and what is judged.

    Returns
    -------
    Outcome
        ``not assessed`` where the velocity is missing or the speed outside the range.

    Raises
    ------
    ModelError
        If a number is not finite or out of its physical range, the measures cannot be
        compared, or group, support or boundary is none.
    """
    n = positive("speed", speed) * _RPM
    zones = casing_velocity_zones(group, support)
    most = zones.at(boundary)
    limit = Limit(
        title,
        "at most",
        "velocity",
        source,
        f"zone boundary {boundary}, group {group}, {support} support; the calculated response to "
        "unbalance is one part of the broad-band value that is measured",
        measure="r.m.s.",
    )
    value = (
        None
        if velocity is None
        else convert_amplitude(velocity, measure, "r.m.s.", harmonic=harmonic)
    )
    if not _SLOWEST * (1 - 1e-9) <= n <= _FASTEST * (1 + 1e-9):
        return limit.not_assessed(
            f"the speed is {n:.5g} r/min; the zones of casing velocity hold from 120 to "
            "30000 r/min",
            value=value,
        )
    if value is None:
        return limit.not_assessed("the velocity is not known", limit=most)
    return limit.judge(value, most, reason=f"zone {zones.zone(value)}")
