"""What the template of a revision comparison shows, part by part."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen import units
from reportgen.assess.comparison import check_archived
from reportgen.case.changes import Change, is_given, spread_differs
from reportgen.sheet.blocks import Inline
from reportgen.sheet.comparison_words import (
    change_of,
    driver_title,
    ranking,
    shown,
    signed,
    stepped,
    title_of,
    titles_of,
)
from reportgen.sheet.figures import LINES, new

if TYPE_CHECKING:
    from reportgen.assess.comparison import Comparison, Driver, Quantity
    from reportgen.sheet.sheet import Sheet

_MOST_SHOWN = 60


def revisions(sheet: Sheet, calc: Comparison) -> None:
    """Show the two revisions, where they are from, and whether archived results were met."""
    sides = (sheet.case.old, sheet.case.new)
    documents = [side.case.case.document for side in sides]
    rows: list[list[Inline]] = [
        ["Number", *(d.number for d in documents)],
        ["Revision", *(d.revision for d in documents)],
        ["Date", *(d.date for d in documents)],
        ["Status", *(d.status for d in documents)],
        ["Prepared", *(d.prepared.name for d in documents)],
        ["Case file", *(side.case.file for side in sides)],
    ]
    if any(side.package for side in sides):
        rows.append(["Package", *(side.package or "–" for side in sides)])
        rows.append(["Its tag manifest, SHA-512", *(_digest(side.digest) for side in sides)])
    sheet.table(
        "revisions",
        "The two revisions",
        [{"title": "", "width": 0.24}, {"title": "Old", "width": 0.38}, {"title": "New"}],
        rows,
    )
    for side, one in zip(sides, (calc.old, calc.new), strict=True):
        if side.results is not None:
            _archived(sheet, side, one)


def _digest(digest: str | None) -> str:
    return f"{digest[:32]}…" if digest else "–"


def _archived(sheet: Sheet, side: Any, calc: Any) -> None:
    check = check_archived(side.results.results, side.results.verdicts, calc)
    name = f"revision {side.case.case.document.revision}"
    if check.agrees:
        sheet.paragraph(
            f"The {check.compared} results archived in the package of {name} were computed again "
            "from its case; each agrees within 10⁻⁶ of its value, and every verdict is the same."
        )
        return
    words = [
        f"{title}: archived {_plain(was)}, computed now {_plain(now)}"
        for title, was, now in check.differing
    ]
    words += [f"verdict of {title}" for title in check.verdicts]
    sheet.finding(
        f"The archived results of {name} are not found again",
        "The version that made the package computes otherwise than this one. What follows "
        f"compares both cases as computed now. In SI: {'; '.join(words)}.",
    )


def _plain(value: float | None) -> str:
    return "nothing" if value is None else f"{value:.6g}"


def changes(sheet: Sheet, calc: Comparison) -> None:
    """Show which inputs changed: those that results can depend on first."""
    titles = titles_of(calc)
    counting = [c for c in calc.changes if c.counts]
    others = [c for c in calc.changes if not c.counts and c.place[0] != "document"]
    if not counting:
        sheet.paragraph("No input that a result can depend on differs between the two revisions.")
    else:
        sheet.table(
            "changed",
            "Inputs and limits that changed",
            _columns("Input", 0.3, "Old", "New", "Change"),
            [
                [title_of(c, titles), shown(c.before), shown(c.after), _step(sheet, c)]
                for c in counting[:_MOST_SHOWN]
            ],
            note=_left_out(len(counting)),
        )
    spread = [c for c in calc.changes if spread_differs(c)]
    stated = [c for c in others if not spread_differs(c)] + [c for c in counting if _source(c)]
    if spread or stated:
        words = [f"{title_of(c, titles)} ({_what(c)})" for c in [*spread, *stated]]
        sheet.paragraph(
            "Also changed, without effect on the results: ",
            "; ".join(dict.fromkeys(words[:_MOST_SHOWN])),
            ".",
        )


def _columns(first: str, width: float, *titles: str) -> list[Any]:
    right = [{"title": title, "align": "right"} for title in titles]
    return [{"title": first, "width": width}, *right]


def _left_out(count: int) -> str:
    return f"{count - _MOST_SHOWN} more are not shown." if count > _MOST_SHOWN else ""


def _step(sheet: Sheet, change: Change) -> str:
    old, new = change.before, change.after
    if not (is_given(old) and is_given(new)) or old["quantity"] != new["quantity"]:
        return "–"
    return stepped(old["si"], new["si"], old["quantity"], sheet.system)


def _source(change: Change) -> bool:
    old, new = change.before, change.after
    return is_given(old) and is_given(new) and any(old[k] != new[k] for k in ("source", "status"))


def _what(change: Change) -> str:
    old, new = change.before, change.after
    if not (is_given(old) and is_given(new)):
        return f"{shown(old)} to {shown(new)}"
    keys = [k for k in ("source", "status", "tolerance", "distribution") if old[k] != new[k]]
    return ", ".join(keys)


def moved(sheet: Sheet, calc: Comparison) -> None:
    """Show which results moved and by how much."""
    if not calc.moved:
        sheet.table("moved", "Results that moved", ["Result"], [["none"]])
        return
    sheet.table(
        "moved",
        "Results that moved",
        _columns("Result", 0.4, "Old", "New", "Change"),
        [
            [
                _with_measure(q),
                sheet.show(q.old, q.quantity),
                sheet.show(q.new, q.quantity),
                change_of(q, sheet.system),
            ]
            for q in calc.moved
        ],
        note=f"{_still(calc)} Differences below one part in 10⁹ are rounding.",
    )


def _still(calc: Comparison) -> str:
    count = sum(1 for q in calc.quantities if not q.id.startswith("margin: ")) - len(calc.moved)
    if not count:
        return "Every result moved."
    return f"{count} {'result' if count == 1 else 'results'} did not move."


def _with_measure(q: Quantity) -> str:
    return q.title if q.measure == "none" else f"{q.title}, {q.measure}"


def curves(sheet: Sheet, calc: Comparison) -> None:
    """Show the response curves of both revisions over one another."""
    found = calc.curves()
    if not found:
        sheet.paragraph("The calculations have no response curve to lay over one another.")
        return
    figure, ax = new(1, 1, height=3.3)
    half = len(found) // 2
    for number, (name, speed, size) in enumerate(found):
        style = dict(LINES[number % len(LINES)])
        if number < half:  # the old revision steps back
            style["linewidth"] = 1.1
        x, y = sheet.to_reader(speed, "speed"), sheet.to_reader(size, "displacement")
        ax.plot(x, y, label=name[:1].upper() + name[1:], **style)
    rated = getattr(getattr(calc.new_case, "speeds", None), "rated", None)
    ax.set_ylim(bottom=0.0)
    ax.set_xlim(left=0.0)
    if rated is not None:
        at = float(sheet.to_reader(float(rated), "speed"))
        ax.axvline(at, color="#6b7480", linewidth=0.8)
        ax.annotate(
            "rated, new",
            (at, ax.get_ylim()[1]),
            xytext=(3, -3),
            textcoords="offset points",
            fontsize=7.4,
            va="top",
        )
    ax.set_xlabel(f"Speed ({sheet.unit('speed')})")
    ax.set_ylabel(f"Amplitude, 0-peak ({sheet.unit('displacement')})")
    ax.legend(fontsize=7.6)
    peaks = []
    for name, speed, size in found:
        i = int(np.argmax(size))
        largest = sheet.show(float(size[i]), "displacement")
        peaks.append(f"{name}: {largest} at {sheet.show(float(speed[i]), 'speed')}")
    sheet.figure(
        "curves",
        figure,
        "Steady unbalance response of both revisions",
        f"Largest amplitude, 0-peak, of the curves drawn: {'; '.join(peaks)}.",
    )


def verdicts(sheet: Sheet, calc: Comparison) -> None:
    """Show each criterion in both revisions, those whose verdict changed first."""
    if not calc.judgements:
        sheet.paragraph("Neither revision states a criterion. Nothing is judged.")
        return
    ordered = sorted(calc.judgements, key=lambda j: not j.flipped)
    rows: list[list[Inline]] = []
    for one in ordered:
        before, after = one.verdicts
        changed = {"strong": "changed"} if one.flipped else "same"
        rows.append(
            [
                one.title,
                _value(sheet, one.old),
                before or "not stated",
                _value(sheet, one.new),
                {"strong": after} if one.flipped and after else after or "not stated",
                changed,
            ]
        )
    sheet.table(
        "verdicts",
        "Criteria in both revisions: margin left, and verdict",
        [
            {"title": "Criterion", "width": 0.32},
            {"title": "Old margin", "align": "right", "width": 0.12},
            {"title": "Old verdict", "width": 0.16},
            {"title": "New margin", "align": "right", "width": 0.12},
            {"title": "New verdict", "width": 0.16},
            {"title": "", "width": 0.12},
        ],
        rows,
        note="A margin is the share of the limit that is left; negative where it is not met.",
    )


def _value(sheet: Sheet, outcome: Any) -> str:
    return sheet.show(outcome.margin, "percent", 3) if outcome else "–"


def drivers(sheet: Sheet, calc: Comparison) -> None:
    """Show which input drives each result's change, by substituting one at a time."""
    told = told_of(calc)
    if not calc.drivers or not told:
        sheet.paragraph("Nothing moved, so nothing drives it.")
        return
    titles = titles_of(calc)
    rows: list[list[Inline]] = []
    for q in told:
        ranked = ranking(calc, q)
        rest = 1.0 - sum(share for share, _ in ranked)
        parts: list[Inline] = [
            f"{driver_title(d, titles)}, {_unbroken(signed(s, 'percent', sheet.system))}"
            for s, d in ranked[:3]
        ]
        parts += [""] * (3 - len(parts))
        rows.append(
            [
                q.title if not q.id.startswith("margin: ") else f"Margin: {q.title}",
                change_told(q, sheet.system),
                *parts,
                _rest(rest, ranked, sheet),
            ]
        )
    sheet.table(
        "drivers",
        "Which input drives each change: share of the whole change",
        [
            {"title": "Result", "width": 0.22},
            {"title": "Change", "align": "right", "width": 0.13},
            {"title": "Most by", "width": 0.19},
            {"title": "Then by", "width": 0.18},
            {"title": "Then by", "width": 0.17},
            {"title": "Rest", "align": "right", "width": 0.11},
        ],
        rows,
        note="Each changed input is put alone into the old case, and taken alone out of the new; "
        "its share is the mean of both. The rest is what other inputs do, and what inputs do "
        "only together. Shares can exceed 100 % where inputs work against one another.",
    )


def change_told(q: Quantity, system: units.System) -> str:
    """Return how much a quantity moved; of a margin, itself a share, both ends."""
    if not q.id.startswith("margin: ") or q.old is None or q.new is None:
        return change_of(q, system)
    ends = (_unbroken(units.show(value, "percent", system, 3)) for value in (q.old, q.new))
    return " to ".join(ends)


def _unbroken(words: str) -> str:
    return words.replace(" ", "\N{NO-BREAK SPACE}")


def _rest(rest: float, ranked: list[tuple[float, Driver]], sheet: Sheet) -> str:
    others = 1.0 - sum(share for share, _ in ranked[:3])
    if not ranked:
        return "not known"
    value = others if len(ranked) > 3 else rest
    return signed(value, "percent", sheet.system) if abs(value) > 5e-4 else "0 %"


def told_of(calc: Comparison) -> list[Quantity]:
    """Return the quantities worth a row: headline findings and margins that moved."""
    headline = {f.id for f in (*calc.old.findings, *calc.new.findings) if f.headline}
    return [
        q
        for q in calc.quantities
        if q.moved and q.change is not None and (q.id in headline or q.id.startswith("margin: "))
    ]


def asked(sheet: Sheet) -> str:
    """Return what the comparison was asked to find."""
    old, new = (side.case.case.document for side in (sheet.case.old, sheet.case.new))
    return (
        f"Find what changed from {old.number} revision {old.revision} to {new.number} revision "
        f"{new.revision}: inputs, results and verdicts, and which input drives the change."
    )


def series(calc: Comparison) -> dict[str, Any]:
    """Return the compared numbers and curves, in SI, for ``results.json``."""
    return {
        "comparison": {
            "quantities": [
                {"id": q.id, "old": q.old, "new": q.new, "quantity": q.quantity}
                for q in calc.quantities
            ],
            "drivers": [
                {"input": d.path, "alone": dict(d.alone), "last": dict(d.last)}
                for d in calc.drivers
            ],
        },
        "curves": {
            name: {
                "speed": [float(f"{v:.9g}") for v in speed],
                "amplitude": [float(f"{v:.9g}") for v in size],
                "units": {"speed": "rad/s", "amplitude": "m"},
            }
            for name, speed, size in calc.curves()
        },
    }
