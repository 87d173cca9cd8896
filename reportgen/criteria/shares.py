"""A share estimated from samples, with its confidence interval, against a limit."""

from __future__ import annotations

from typing import Literal, NamedTuple

from scipy.stats import binomtest

from reportgen.criteria.check import share
from reportgen.criteria.outcome import Limit, Outcome
from reportgen.criteria.sources import Source
from reportgen.errors import ModelError

Method = Literal["clopper-pearson", "wilson"]
_SCIPY: dict[str, Literal["exact", "wilson"]] = {"clopper-pearson": "exact", "wilson": "wilson"}


class Interval(NamedTuple):
    """A two-sided confidence interval of a share."""

    low: float
    high: float


def share_interval(
    hits: int, count: int, confidence: float = 0.95, method: Method = "clopper-pearson"
) -> Interval:
    """Return the confidence interval of a share seen in independent samples.

    Parameters
    ----------
    hits, count
        Samples that show it, of all; 0 ≤ hits ≤ count, count at least 1.
    confidence
        Between 0 and 1.
    method
        ``clopper-pearson`` (never covers less than stated) or ``wilson`` (covers as stated on
        the average).

    Raises
    ------
    ModelError
        If the counts are no counts or the confidence is none.

    References
    ----------
    Clopper, C. J., Pearson, E. S. (1934), Biometrika 26, 404-413; Wilson, E. B. (1927), Journal
    of the American Statistical Association 22, 209-212. Computed by scipy.
    """
    if not 0 <= hits <= count or count < 1 or not 0.0 < confidence < 1.0:
        raise ModelError(f"{hits} of {count} samples at a confidence of {confidence} is no share")
    found = binomtest(hits, count).proportion_ci(confidence, _SCIPY[method])
    return Interval(float(found.low), float(found.high))


def failing_share(
    hits: int,
    count: int,
    allowed: float,
    *,
    confidence: float = 0.95,
    method: Method = "clopper-pearson",
    source: Source,
    title: str,
) -> Outcome:
    """Judge a share by its whole confidence interval: by neither end alone, nor by the middle.

    Parameters
    ----------
    hits, count
        Samples that do not meet what is asked, of those assessed; ``count`` 0 for none.
    allowed
        Largest share.
    confidence, method
        As for :func:`share_interval`.
    source, title
        Where the share is stated, and what is judged.

    Returns
    -------
    Outcome
        Its value is the upper end of the interval. ``not assessed`` where the limit lies
        within the interval: more samples would tell.

    Raises
    ------
    ModelError
        If a number is out of range.
    """
    most = share("allowed share", allowed)
    how = (
        f"the upper end of the {100 * confidence:.4g} % confidence interval ({method}) may be at "
        f"most {100 * most:.4g} %"
    )
    limit = Limit(title, "at most", "percent", source, how)
    if count == 0:
        return limit.not_assessed("no sample could be assessed", limit=most)
    low, high = share_interval(hits, count, confidence, method)
    seen = f"{hits} of {count} samples, {100 * hits / count:.3g} %"
    if low <= most < high:
        reason = (
            f"{seen}; the limit lies within the interval from {100 * low:.3g} % to "
            f"{100 * high:.3g} %: more samples would tell"
        )
        return limit.not_assessed(reason, value=high, limit=most)
    return limit.judge(high, most, reason=f"{seen}; interval from {100 * low:.3g} %")
