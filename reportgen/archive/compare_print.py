"""A comparison in words, for the console and for machines."""

from __future__ import annotations

from typing import Any

from reportgen.archive.compare import Side
from reportgen.assess.comparison import Comparison, check_archived
from reportgen.case.changes import is_given
from reportgen.sheet import comparison_words as words
from reportgen.sheet.lines import plain
from reportgen.units import show

Rows = list[tuple[str, ...]]


def archive_notes(sides: tuple[Side, Side], calc: Comparison) -> list[str]:
    """Return what to say of packages whose archived results are not found again."""
    notes = []
    for side, one in zip(sides, (calc.old, calc.new), strict=True):
        if side.results is None:
            continue
        check = check_archived(side.results.results, side.results.verdicts, one)
        if not check.agrees:
            titles = [title for title, *_ in check.differing] + list(check.verdicts)
            notes.append(
                f"{side.package}: archived otherwise than computed now: {', '.join(titles)}"
            )
    return notes


def tables(calc: Comparison) -> list[tuple[str, tuple[str, ...], Rows]]:
    """Return the tables of a comparison: caption, column titles, rows; in the new units."""
    system = calc.new_case.units
    titles = words.titles_of(calc)
    inputs: Rows = []
    for change in calc.changes:
        if change.counts:
            old, new = change.before, change.after
            step = "–"
            if is_given(old) and is_given(new):
                step = words.stepped(old["si"], new["si"], old["quantity"], system)
            inputs.append((change.path, words.shown(old), words.shown(new), step))
    results: Rows = []
    for q in calc.moved:
        ends = ("–" if v is None else show(v, q.quantity, system) for v in (q.old, q.new))
        results.append((q.title, *ends, words.change_of(q, system), _driver(calc, q, titles)))
    verdicts: Rows = []
    for one in calc.judgements:
        before, after = (v or "not stated" for v in one.verdicts)
        margins = (
            "–" if o is None or o.margin is None else show(o.margin, "percent", system, 3)
            for o in (one.old, one.new)
        )
        q = next(q for q in calc.quantities if q.id == f"margin: {one.title}")
        driver = _driver(calc, q, titles) if q.moved else ""
        verdicts.append((one.title, *margins, before, after, driver))
    return [
        ("inputs that changed", ("input", "old", "new", "change"), inputs),
        ("results that moved", ("result", "old", "new", "change", "driven most by"), results),
        (
            "verdicts",
            ("criterion", "old margin", "new margin", "old", "new", "driven most by"),
            verdicts,
        ),
    ]


def _driver(calc: Comparison, q: Any, titles: dict[str, str]) -> str:
    ranked = words.ranking(calc, q)
    if not ranked:
        return "–"
    share, driver = ranked[0]
    return f"{words.driver_title(driver, titles)} ({words.signed(share, 'percent', 'si')})"


def as_dict(sides: tuple[Side, Side], calc: Comparison) -> dict[str, Any]:
    """Return the machine-readable comparison, in SI."""
    return {
        "old": _side(sides[0]),
        "new": _side(sides[1]),
        "conclusion": plain(words.conclusion(calc)).strip(),
        "inputs": [
            {"path": c.path, "old": c.before, "new": c.after, "counts": c.counts}
            for c in calc.changes
        ],
        "results": [
            {"id": q.id, "title": q.title, "old": q.old, "new": q.new, "change": q.change,
             "relative": q.relative, "moved": q.moved}
            for q in calc.quantities if not q.id.startswith("margin: ")
        ],
        "criteria": [
            {"title": j.title, "old": j.verdicts[0], "new": j.verdicts[1],
             "flipped": j.flipped,
             "old_margin": None if j.old is None else j.old.margin,
             "new_margin": None if j.new is None else j.new.margin}
            for j in calc.judgements
        ],
        "drivers": [
            {"input": d.path, "changes": [c.path for c in d.changes], "alone": dict(d.alone),
             "last": dict(d.last),
             "shares": {q.id: d.share(q) for q in calc.quantities if q.moved}}
            for d in calc.drivers
        ],
        "notes": archive_notes(sides, calc),
    }  # fmt: skip


def _side(side: Side) -> dict[str, str]:
    document = side.case.document
    found = {"number": document.number, "revision": document.revision}
    if side.package:
        found["tag_manifest_sha512"] = side.digest
    return found
