"""The conclusion in one sentence, from the verdicts alone; its numbers lead to their places."""

from __future__ import annotations

from collections.abc import Sequence

from reportgen.sheet.blocks import Criterion, Inline


def conclusion_of(criteria: Sequence[Criterion], holds: int) -> Inline:
    """Return the conclusion: how many criteria are met, which are not and by how much.

    Parameters
    ----------
    criteria
        As page one shows them.
    holds
        How many holds are open: the conclusion says that it stands under them.
    """
    if not criteria:
        return ["The case states no criterion: the results stand without a verdict", *_under(holds)]
    failed = [c for c in criteria if c["verdict"] == "does not meet"]
    unknown = [c for c in criteria if c["verdict"] == "not assessed"]
    total = len(criteria)
    parts: list[Inline] = []
    if failed:
        parts.append(f"The rotor does not meet {len(failed)} of the {total} stated criteria: ")
        parts.extend(_listed([_failure(c) for c in failed]))
    elif not unknown:
        count = "the one criterion" if total == 1 else f"all {total} criteria"
        parts.append(f"The rotor meets {count} stated for it")
        parts.extend(_closest(criteria))
    else:
        parts.append(f"The rotor meets {total - len(unknown)} of the {total} stated criteria")
    if unknown:
        parts.append("; not assessed: ")
        parts.extend(_listed([[_linked(c["title"], c)] for c in unknown]))
    return [*parts, *_under(holds)]


def _failure(criterion: Criterion) -> list[Inline]:
    return [
        f"{criterion['title']}: ",
        _linked(criterion["value_shown"], criterion),
        f" against {criterion['sense']} {criterion['limit_shown']}",
    ]


def _closest(criteria: Sequence[Criterion]) -> list[Inline]:
    known = [c for c in criteria if c["margin"] is not None]
    if not known:
        return []
    least = min(known, key=lambda c: c["margin"] or 0.0)
    if len(criteria) == 1:
        return [", with ", _linked(least["margin_shown"], least), " of its limit left"]
    return [
        "; the least margin, ",
        _linked(least["margin_shown"], least),
        f" of the limit, is that of “{least['title']}”",
    ]


def _linked(words: str, criterion: Criterion) -> Inline:
    return {"ref": criterion["where"], "text": words} if criterion["where"] else words


def _listed(items: list[list[Inline]]) -> list[Inline]:
    joined: list[Inline] = []
    for n, item in enumerate(items):
        joined.extend(["; ", *item] if n else item)
    return joined


def _under(holds: int) -> list[Inline]:
    if not holds:
        return ["."]
    return [". One hold is open." if holds == 1 else f". {holds} holds are open."]
