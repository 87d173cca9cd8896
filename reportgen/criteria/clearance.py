"""What the whirl takes of the radial clearance, and whether it is all taken."""

from __future__ import annotations

from reportgen.criteria.check import not_negative, positive, share
from reportgen.criteria.measures import convert_amplitude
from reportgen.criteria.outcome import Limit, Measure, Outcome
from reportgen.criteria.sources import SOURCES, Source

_SUM = r"\hat{r} + s + w + b"


def clearance_share(
    peak: float | None,
    clearance: float | None,
    *,
    sag: float | None = 0.0,
    runout: float | None = 0.0,
    bow: float | None = 0.0,
    allowed: float = 0.75,
    measure: Measure = "0-peak",
    harmonic: bool = False,
    source: Source = SOURCES["petroleum-clearance"],
    title: str = "Clearance",
) -> Outcome:
    """Judge peak + sag + runout + bow against a share of the smallest radial clearance.

    The parts are added as lengths, as if all pointed one way: never less than their true sum.

    Parameters
    ----------
    peak
        Largest whirl amplitude [m], in ``measure``; None where it is not known.
    clearance
        Smallest radial clearance [m] where the shaft can touch; None where not stated.
    sag, runout, bow
        Static sag, runout (0-peak) and residual bow [m] that ``peak`` does not hold already;
        zero for none, None for not known.
    allowed
        Share of the clearance that may be used, above 0 and at most 1.
    measure, harmonic
        Measure of ``peak``; see :func:`~reportgen.criteria.measures.convert_amplitude`.
    source, title
        Where the share is stated, and what is judged.

    Raises
    ------
    ModelError
        If a length is negative or not finite, the clearance is zero, the share is no share,
        or ``peak`` is not 0-peak and the motion is not stated to be harmonic.
    """
    allowed = share("share of the clearance", allowed)
    limit = Limit(
        title=title,
        sense="at most",
        quantity="displacement",
        source=source,
        how=f"{allowed * 100:.3g} % of the smallest radial clearance; "
        f"used: {_parts(sag, runout, bow)}",
        how_latex=rf"{_SUM} \le {allowed:.3g}\,c_\mathrm{{min}}",
        measure="0-peak",
    )
    used, missing = _used(peak, sag, runout, bow, measure, harmonic)
    if clearance is None:
        return limit.not_assessed("the clearance is not stated", value=used)
    whole = positive("clearance", clearance)
    if used is None:
        return limit.not_assessed(missing, limit=allowed * whole)
    reason = CONTACT if used >= whole else ""
    return limit.judge(used, allowed * whole, reason=reason)


CONTACT = (
    "the linear result reaches the clearance: the shaft touches, and beyond contact the "
    "result is void"
)


def contact(
    peak: float | None,
    clearance: float | None,
    *,
    sag: float | None = 0.0,
    runout: float | None = 0.0,
    bow: float | None = 0.0,
    measure: Measure = "0-peak",
    harmonic: bool = False,
    source: Source = SOURCES["contact"],
    title: str = "Contact",
) -> Outcome:
    """Judge whether the shaft touches: peak + sag + runout + bow below the clearance.

    Parameters as for :func:`clearance_share`; the whole clearance is the limit, and a
    value equal to it is contact.

    Raises
    ------
    ModelError
        As for :func:`clearance_share`.
    """
    limit = Limit(
        title=title,
        sense="at most",
        quantity="displacement",
        source=source,
        how=f"below the smallest radial clearance; used: {_parts(sag, runout, bow)}",
        how_latex=rf"{_SUM} < c_\mathrm{{min}}",
        measure="0-peak",
    )
    used, missing = _used(peak, sag, runout, bow, measure, harmonic)
    if clearance is None:
        return limit.not_assessed("the clearance is not stated", value=used)
    whole = positive("clearance", clearance)
    if used is None:
        return limit.not_assessed(missing, limit=whole)
    return limit.judge(used, whole, reason=CONTACT if used >= whole else "", strictly=True)


def _used(
    peak: float | None,
    sag: float | None,
    runout: float | None,
    bow: float | None,
    measure: Measure,
    harmonic: bool,
) -> tuple[float | None, str]:
    parts = {"peak amplitude": peak, "static sag": sag, "runout": runout, "bow": bow}
    missing = [name for name, length in parts.items() if length is None]
    lengths = {
        name: not_negative(name, length) for name, length in parts.items() if length is not None
    }
    if peak is not None:
        lengths["peak amplitude"] = convert_amplitude(peak, measure, "0-peak", harmonic=harmonic)
    if missing:
        return None, f"not known: {', '.join(missing)}"
    return sum(lengths.values()), ""


def _parts(sag: float | None, runout: float | None, bow: float | None) -> str:
    named = {"sag": sag, "runout": runout, "bow": bow}
    counted = " + ".join(["peak", *(name for name, length in named.items() if length != 0.0)])
    none = [name for name, length in named.items() if length == 0.0]
    return f"{counted} (no {', no '.join(none)})" if none else counted
