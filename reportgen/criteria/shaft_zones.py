"""Zones of shaft vibration relative to the bearings, by speed."""

from __future__ import annotations

import math

from reportgen.criteria.check import positive
from reportgen.criteria.measures import convert_amplitude
from reportgen.criteria.outcome import Limit, Measure, Outcome
from reportgen.criteria.sources import SOURCES, Source
from reportgen.criteria.zones import Boundary, Zones
from reportgen.errors import ModelError

_RPM = 30.0 / math.pi
_SLOWEST, _FASTEST = 1000.0, 30000.0  # r/min
_ROOTS = Zones(4800.0, 9000.0, 13200.0)


def shaft_vibration_zones(speed: float) -> Zones:
    """Return 4800/√n, 9000/√n and 13200/√n µm peak-to-peak, in m.

    Parameters
    ----------
    speed
        Maximum service speed [rad/s], 1000 to 30 000 r/min; n is the same in r/min.

    Raises
    ------
    ModelError
        If the speed is not finite or outside that range.

    Notes
    -----
    ISO 7919-3, from memory; check against the edition you hold.
    """
    n = positive("speed", speed) * _RPM
    if not _SLOWEST * (1 - 1e-9) <= n <= _FASTEST * (1 + 1e-9):
        raise ModelError(
            f"the speed is {n:.5g} r/min; the zones of relative shaft vibration hold from 1000 to "
            "30000 r/min"
        )
    return Zones(*(1e-6 * root / math.sqrt(n) for root in _ROOTS))


def shaft_vibration(
    amplitude: float | None,
    speed: float,
    *,
    boundary: Boundary,
    measure: Measure,
    harmonic: bool,
    source: Source = SOURCES["shaft-zones"],
    title: str = "Relative shaft vibration",
) -> Outcome:
    """Judge the shaft's vibration relative to a bearing against a zone boundary.

    Parameters
    ----------
    amplitude
        Largest of the measuring directions [m], relative to the bearing; None where not known.
    speed
        Maximum service speed [rad/s].
    boundary
        ``A/B``, ``B/C`` or ``C/D``.
    measure, harmonic
        See :func:`~reportgen.criteria.measures.convert_amplitude`; the limit is peak-to-peak.
    source, title
        Where the limit is stated, and what is judged.

    Returns
    -------
    Outcome
        ``not assessed`` where the amplitude is missing or the speed outside the range.

    Raises
    ------
    ModelError
        If a number is not finite or out of its physical range, the measures cannot be
        compared, or the boundary is none.
    """
    speed = positive("speed", speed)
    number = _ROOTS.at(boundary)
    limit = Limit(
        title,
        "at most",
        "displacement",
        source,
        f"zone boundary {boundary}: {number:.0f}/√n µm, n the maximum service speed in r/min; "
        "the calculated response to unbalance is one part of what is measured",
        rf"\frac{{{number:.0f}}}{{\sqrt{{n}}}}\ \mathrm{{\mu m}}",
        "peak-to-peak",
    )
    value = (
        None
        if amplitude is None
        else convert_amplitude(amplitude, measure, "peak-to-peak", harmonic=harmonic)
    )
    try:
        zones = shaft_vibration_zones(speed)
    except ModelError as error:
        return limit.not_assessed(str(error), value=value)
    if value is None:
        return limit.not_assessed("the amplitude is not known", limit=zones.at(boundary))
    return limit.judge(value, zones.at(boundary), reason=f"zone {zones.zone(value)}")
