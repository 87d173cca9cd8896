"""The finished calculations that a case refers to, as a part that every template can show."""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from reportgen.case.seen import Seen
    from reportgen.sheet.blocks import Inline
    from reportgen.sheet.sheet import Sheet


def seen(sheet: Sheet) -> None:
    """Show each calculation that the case refers to; nothing where there is none.

    Number, revision and digest say which calculation is meant; results and verdicts are those
    that its own report prints.
    """
    for number, one in enumerate(sheet.case.see, 1):
        _one(sheet, number, one)


def _one(sheet: Sheet, number: int, one: Seen) -> None:
    sheet.paragraph(
        "See calculation ",
        {"strong": f"{one.number} revision {one.revision}"},
        f", {one.title}, {one.date}, {one.status} ({one.template}), with "
        + ("no hold open" if not one.holds else f"{one.holds} open holds")
        + f". SHA-512 of its tag manifest, which its signatures cover: {one.digest[:32]}…; whole "
        "in inputs.json of this package.",
    )
    rows: list[list[Inline]] = [
        [r.title, r.shown, "agrees" if r.agrees else "–" if r.agrees is None else "DISAGREES"]
        for r in one.results
    ]
    sheet.table(
        f"see-{number}-results",
        f"Headline results of {one.number} revision {one.revision}, as printed there",
        ["Result", {"title": "Value", "align": "right"}, "Second computation"],
        rows,
    )
    if one.criteria:
        sheet.table(
            f"see-{number}-criteria",
            f"Verdicts of {one.number} revision {one.revision}, as printed there",
            [
                "Criterion",
                {"title": "Value", "align": "right"},
                {"title": "Limit", "align": "right"},
                "Verdict",
            ],
            [[c.title, c.shown, c.limit, {"strong": c.verdict}] for c in one.criteria],
        )
