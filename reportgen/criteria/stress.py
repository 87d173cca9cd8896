"""Bending stress of the shaft against a stated allowable."""

from __future__ import annotations

from reportgen.criteria.check import finite, not_negative, positive
from reportgen.criteria.outcome import Limit, Outcome
from reportgen.criteria.sources import Source
from reportgen.errors import ModelError


def shaft_stress(
    whirl: float | None,
    sag: float | None,
    allowable: float | None,
    *,
    concentration: float = 1.0,
    source: Source,
    title: str = "Bending stress of the shaft",
) -> Outcome:
    """Judge K·(whirl + sag) against an allowable stress.

    In a forward circular whirl the bending by the whirl stands still in the shaft and the
    bending by sag turns in it; the sum is the largest that a fibre meets.

    Parameters
    ----------
    whirl, sag
        Nominal bending stress by the whirl (0-peak) and by sag [Pa]; None where not known,
        0 for the sag of a vertical shaft.
    allowable
        Stated allowable [Pa], for this sum at this section; None where not stated.
    concentration
        Stress concentration factor K at the section, 1 or above.
    source, title
        Where the allowable is stated, and what is judged.

    Raises
    ------
    ModelError
        If a number is not finite, a stress is negative, or K is below 1.
    """
    factor = finite("stress concentration factor", concentration)
    if factor < 1.0:
        raise ModelError(f"the stress concentration factor is {factor:g}; it is 1 or above")
    limit = Limit(
        title,
        "at most",
        "stress",
        source,
        f"stated allowable, against {factor:.3g} × (bending by the whirl + bending by sag)",
        rf"{factor:.3g}\left(\sigma_\mathrm{{w}} + \sigma_\mathrm{{s}}\right) "
        r"\le \sigma_\mathrm{allow}",
        "0-peak",
    )
    most = None if allowable is None else positive("allowable stress", allowable)
    parts = {"bending stress by the whirl": whirl, "bending stress by sag": sag}
    missing = [name for name, stress in parts.items() if stress is None]
    known = [not_negative(name, stress) for name, stress in parts.items() if stress is not None]
    if missing:
        return limit.not_assessed(f"not known: {', '.join(missing)}", limit=most)
    value = factor * sum(known)
    if most is None:
        return limit.not_assessed("no allowable stress is stated", value=value)
    return limit.judge(value, most)
