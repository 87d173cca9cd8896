"""What a bearing carries, at rest and from the whirl."""

from __future__ import annotations

from reportgen.criteria.check import not_negative, positive, share
from reportgen.criteria.outcome import Limit, Outcome
from reportgen.criteria.sources import Source


def bearing_load(
    static: float | None,
    dynamic: float | None,
    allowable: float | None,
    *,
    allowed: float = 1.0,
    source: Source,
    title: str = "Bearing load",
) -> Outcome:
    """Judge static load + rotating load against a share of what the bearing may carry.

    Parameters
    ----------
    static
        Load at rest and from steady forces [N]; None where not known.
    dynamic
        Largest rotating force [N], 0-peak; added as if it pointed along the static load,
        which it does once a turn. None where not known.
    allowable
        Load that the bearing may carry [N]; None where not stated.
    allowed
        Share of ``allowable`` that may be used, above 0 and at most 1.
    source, title
        Where the limit is stated, and what is judged.

    Raises
    ------
    ModelError
        If a number is not finite or out of its physical range.
    """
    allowed = share("share of the allowable load", allowed)
    limit = Limit(
        title,
        "at most",
        "force",
        source,
        f"{allowed * 100:.3g} % of the allowable load, against static load + rotating force",
        rf"F_\mathrm{{s}} + \hat{{F}} \le {allowed:.3g}\,F_\mathrm{{allow}}",
        "0-peak",
    )
    most = None if allowable is None else allowed * positive("allowable load", allowable)
    parts = {"static load": static, "rotating force": dynamic}
    missing = [name for name, force in parts.items() if force is None]
    known = [not_negative(name, force) for name, force in parts.items() if force is not None]
    if missing:
        return limit.not_assessed(f"not known: {', '.join(missing)}", limit=most)
    if most is None:
        return limit.not_assessed("the allowable load is not stated", value=sum(known))
    return limit.judge(sum(known), most)


def bearing_load_share(
    dynamic: float | None,
    static: float | None,
    *,
    allowed: float,
    source: Source,
    title: str = "Rotating bearing force against the static load",
) -> Outcome:
    """Judge the rotating force as a share of the static load.

    A rotating force above the static load lifts the journal (or unloads the rolling elements)
    once a turn, and a linear calculation ends there.

    Parameters
    ----------
    dynamic
        Largest rotating force [N], 0-peak; None where not known.
    static
        Static load [N]; None where not known.
    allowed
        Share of the static load that the rotating force may reach, above zero.
    source, title
        Where the limit is stated, and what is judged.

    Returns
    -------
    Outcome
        ``not assessed`` for a bearing without static load (a vertical shaft), of which
        there is no share.

    Raises
    ------
    ModelError
        If a number is not finite or out of its physical range.
    """
    part = positive("share of the static load", allowed)
    limit = Limit(
        title,
        "at most",
        "force",
        source,
        f"{part * 100:.3g} % of the static load",
        rf"\hat{{F}} \le {part:.3g}\,F_\mathrm{{s}}",
        "0-peak",
    )
    value = None if dynamic is None else not_negative("rotating force", dynamic)
    load = None if static is None else not_negative("static load", static)
    if load is None:
        return limit.not_assessed("the static load is not known", value=value)
    if load == 0.0:
        return limit.not_assessed("the bearing carries no static load", value=value)
    if value is None:
        return limit.not_assessed("the rotating force is not known", limit=part * load)
    lifts = "the rotating force exceeds the static load: the linear result is void beyond that"
    return limit.judge(value, part * load, reason=lifts if value > load else "")
