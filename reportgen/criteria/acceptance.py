"""A vibration test laid over the calculation: how far the two differ, and how far they may."""

from __future__ import annotations

import math
from dataclasses import dataclass

from reportgen.criteria.check import positive
from reportgen.criteria.outcome import Limit, Outcome
from reportgen.criteria.peaks import Record, RecordedPeak, recorded_peaks
from reportgen.criteria.sources import Source

# One mode turns the phase by a quarter turn through its half-power band; a peak that turns
# it by less than half of that is not taken for a critical speed.
_LEAST_TURN = math.pi / 4.0


@dataclass(frozen=True)
class TestAgreement:
    """What a test says of one calculated critical speed.

    Parameters
    ----------
    peak
        The recorded peak nearest to the calculated critical speed; None where the record
        has none.
    speed, amplification
        How the difference in critical speed and in amplification factor stands.
    """

    __test__ = False  # not a test of pytest's

    peak: RecordedPeak | None
    speed: Outcome
    amplification: Outcome


def agreement(
    record: Record,
    predicted_speed: float,
    predicted_amplification: float | None,
    *,
    speed_tolerance: float,
    amplification_tolerance: float,
    source: Source,
) -> TestAgreement:
    """Judge a recorded run against a calculated critical speed and amplification factor.

    Parameters
    ----------
    record
        Measured amplitude and phase against speed, runout subtracted.
    predicted_speed
        Calculated critical speed [rad/s]: the speed of the calculated response peak.
    predicted_amplification
        Calculated AF by the half-power method; None where it has none.
    speed_tolerance, amplification_tolerance
        Largest differences, as shares of the calculated values.
    source
        Where the tolerances are stated.

    Returns
    -------
    TestAgreement
        The verdicts are ``not assessed`` where the record holds no peak, its phase does not
        turn through the peak, or an amplification factor is missing on either side.

    Raises
    ------
    ModelError
        If a number is not finite or not above zero.
    """
    speed = positive("calculated critical speed", predicted_speed)
    on_speed = _limit("critical speed", "N_c", speed_tolerance, source)
    on_factor = _limit("amplification factor", r"\mathrm{AF}", amplification_tolerance, source)
    most_speed = positive("tolerance of the critical speed", speed_tolerance)
    most_factor = positive("tolerance of the amplification factor", amplification_tolerance)
    factor = None
    if predicted_amplification is not None:
        factor = positive("calculated amplification factor", predicted_amplification)
    peak = min(recorded_peaks(record), key=lambda p: abs(p.speed - speed), default=None)
    why = _no_critical(peak)
    if peak is None or why:
        return TestAgreement(
            peak,
            on_speed.not_assessed(why, limit=most_speed),
            on_factor.not_assessed(why, limit=most_factor),
        )
    judged_speed = on_speed.judge(abs(peak.speed - speed) / speed, most_speed)
    if peak.amplification is None:
        return TestAgreement(
            peak, judged_speed, on_factor.not_assessed(peak.reason, limit=most_factor)
        )
    if factor is None:
        none = "the calculation gives no amplification factor"
        return TestAgreement(peak, judged_speed, on_factor.not_assessed(none, limit=most_factor))
    difference = abs(peak.amplification - factor) / factor
    return TestAgreement(peak, judged_speed, on_factor.judge(difference, most_factor))


def _no_critical(peak: RecordedPeak | None) -> str:
    if peak is None:
        return "the record holds no peak"
    if peak.turn is not None and abs(peak.turn) < _LEAST_TURN:
        turn = math.degrees(abs(peak.turn))
        return (
            f"the phase turns by {turn:.0f}° through the half-power band of the peak, where one "
            "mode turns it by about 90°: the peak is not taken for a critical speed"
        )
    return ""


def _limit(what: str, symbol: str, tolerance: float, source: Source) -> Limit:
    calculated, measured = rf"{symbol}^\mathrm{{calc}}", rf"{symbol}^\mathrm{{meas}}"
    return Limit(
        f"Difference in {what}, measured and calculated",
        "at most",
        "percent",
        source,
        f"{tolerance * 100:.3g} % of the calculated {what}, as stated",
        rf"\frac{{\left|{measured} - {calculated}\right|}}{{{calculated}}}",
    )
