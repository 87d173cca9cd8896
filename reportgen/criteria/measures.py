"""0-peak, peak-to-peak and r.m.s.: converted only where the motion is harmonic."""

from __future__ import annotations

import math

from reportgen.criteria.check import not_negative
from reportgen.criteria.outcome import Measure
from reportgen.errors import ModelError

# Amplitude of a harmonic motion of 0-peak amplitude 1.
_OF_UNIT_PEAK: dict[str, float] = {
    "0-peak": 1.0,
    "peak-to-peak": 2.0,
    "r.m.s.": 1.0 / math.sqrt(2.0),
}


def convert_amplitude(
    amplitude: float, given: Measure, wanted: Measure, *, harmonic: bool
) -> float:
    """Return an amplitude in another measure.

    Parameters
    ----------
    amplitude
        Not negative, any unit.
    given, wanted
        ``0-peak``, ``peak-to-peak`` or ``r.m.s.``.
    harmonic
        Whether the motion is harmonic (a steady response to unbalance is). No factor
        between the measures holds for any other motion.

    Raises
    ------
    ModelError
        If the amplitude is negative or not finite, a measure is not one of the three, or
        the measures differ and the motion is not harmonic.

    Examples
    --------
    >>> convert_amplitude(30e-6, "0-peak", "peak-to-peak", harmonic=True)
    6e-05
    """
    amplitude = not_negative("amplitude", amplitude)
    for measure in (given, wanted):
        if measure not in _OF_UNIT_PEAK:
            raise ModelError(
                f"the amplitude measure is {measure!r}; state 0-peak, peak-to-peak or r.m.s."
            )
    if given == wanted:
        return amplitude
    if not harmonic:
        raise ModelError(
            f"an amplitude stated {given} is compared with one stated {wanted}, and the motion "
            "is not stated to be harmonic; state both in one measure"
        )
    return amplitude * _OF_UNIT_PEAK[wanted] / _OF_UNIT_PEAK[given]
