"""The whirl at a speed, or over the operating range, against a limit."""

from __future__ import annotations

import math

from reportgen.criteria.check import positive
from reportgen.criteria.measures import convert_amplitude
from reportgen.criteria.outcome import Limit, Measure, Outcome
from reportgen.criteria.sources import SOURCES, Source

_RPM = 30.0 / math.pi


def amplitude_at_speed(
    amplitude: float | None,
    limit: float | None,
    *,
    measure: Measure,
    limit_measure: Measure,
    harmonic: bool,
    source: Source,
    title: str = "Amplitude",
    how: str = "as stated",
) -> Outcome:
    """Judge an amplitude against a stated limit, in the measure of the limit.

    Parameters
    ----------
    amplitude, limit
        [m]; None where not known.
    measure, limit_measure
        ``0-peak``, ``peak-to-peak`` or ``r.m.s.`` of each.
    harmonic
        Whether the motion is harmonic, so that one measure can be turned into another.
    source, title, how
        Where the limit is stated, what is judged, how the limit is found.

    Raises
    ------
    ModelError
        If a number is negative or not finite, the limit is zero, or the measures differ and
        the motion is not harmonic.
    """
    judged = Limit(title, "at most", "displacement", source, how, measure=limit_measure)
    if limit is not None:
        limit = positive("limit of amplitude", limit)
    if amplitude is None:
        return judged.not_assessed("the amplitude is not known", limit=limit)
    value = convert_amplitude(amplitude, measure, limit_measure, harmonic=harmonic)
    if limit is None:
        return judged.not_assessed("no limit is stated", value=value)
    return judged.judge(value, limit)


def running_vibration_limit(speed: float) -> float:
    """Return the peak-to-peak limit [m] by maximum continuous speed: 25.4·√(12000/N) µm.

    Parameters
    ----------
    speed
        Maximum continuous speed [rad/s]; N is the same in r/min. Up to 12 000 r/min the
        limit stays at 25.4 µm.

    Raises
    ------
    ModelError
        If the speed is not finite or not above zero.

    Notes
    -----
    API 617, from memory; check against the edition you hold.
    """
    revolutions = positive("speed", speed) * _RPM
    return 25.4e-6 * min(1.0, math.sqrt(12000.0 / revolutions))


def running_vibration(
    amplitude: float | None,
    speed: float,
    *,
    measure: Measure,
    harmonic: bool,
    source: Source = SOURCES["petroleum-vibration"],
    title: str = "Shaft vibration in the operating range",
) -> Outcome:
    """Judge the largest amplitude in the operating range by :func:`running_vibration_limit`.

    Parameters
    ----------
    amplitude
        Largest amplitude at a probe within the operating range [m]; None where not known.
    speed
        Maximum continuous speed [rad/s].
    measure, harmonic
        See :func:`amplitude_at_speed`.
    source, title
        Where the limit is stated, and what is judged.

    Raises
    ------
    ModelError
        As for :func:`amplitude_at_speed`.
    """
    judged = Limit(
        title,
        "at most",
        "displacement",
        source,
        "25.4·√(12000/N) µm, at most 25.4 µm, N the maximum continuous speed in r/min",
        r"25.4\sqrt{\frac{12000}{N}}\ \mathrm{\mu m} \le 25.4\ \mathrm{\mu m}",
        "peak-to-peak",
    )
    limit = running_vibration_limit(speed)
    if amplitude is None:
        return judged.not_assessed("the amplitude is not known", limit=limit)
    value = convert_amplitude(amplitude, measure, "peak-to-peak", harmonic=harmonic)
    return judged.judge(value, limit)
