"""A project's own limit on any result."""

from __future__ import annotations

from reportgen.criteria.check import finite
from reportgen.criteria.measures import convert_amplitude
from reportgen.criteria.outcome import Limit, Measure, Outcome, Sense
from reportgen.criteria.sources import Source
from reportgen.errors import ModelError


def project_limit(
    value: float | None,
    limit: float | None,
    *,
    sense: Sense,
    quantity: str,
    source: Source,
    title: str,
    measure: Measure = "none",
    limit_measure: Measure = "none",
    harmonic: bool = False,
    absent: str = "the result does not exist or is not known",
) -> Outcome:
    """Judge a result against a limit that the project states.

    Parameters
    ----------
    value, limit
        In SI, of one quantity; None where not known.
    sense
        ``at most`` or ``at least``.
    quantity
        Key of the reader's-unit table.
    source, title
        Where the limit is stated, and what is judged.
    measure, limit_measure, harmonic
        Amplitude measures of the two; see
        :func:`~reportgen.criteria.measures.convert_amplitude`.
    absent
        Why there is no value, where there is none.

    Raises
    ------
    ModelError
        If a number is not finite, the sense is neither, or the measures differ and cannot be
        compared (one of them ``none``, or the motion not stated to be harmonic).
    """
    if sense not in ("at most", "at least"):
        raise ModelError(f"the sense of the limit is {sense!r}; state at most or at least")
    judged = Limit(title, sense, quantity, source, "as stated", measure=limit_measure)
    if limit is not None:
        limit = finite("limit", limit)
    if value is None:
        return judged.not_assessed(absent, limit=limit)
    value = finite(f"value of {title}", value)
    if measure != limit_measure:
        value = convert_amplitude(value, measure, limit_measure, harmonic=harmonic)
    if limit is None:
        return judged.not_assessed("no limit is stated", value=value)
    return judged.judge(value, limit)
