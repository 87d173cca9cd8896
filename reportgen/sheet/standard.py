"""The parts that every report has: inputs, assumptions, criteria, checks, cautions."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING, Any

from reportgen import units
from reportgen.sheet.blocks import Inline
from reportgen.sheet.seen import seen as seen

if TYPE_CHECKING:
    from reportgen.assess.model import Assessment, Judged
    from reportgen.sheet.sheet import Sheet


def inputs(sheet: Sheet) -> None:
    """Show every given as stated, in the other system of units, its source and status."""
    rows: list[list[Inline]] = []
    for path, title, given, quantity in sheet.case.givens():
        other: units.System = "si" if _customary(given.as_given) else "us"
        rows.append(
            [
                title or path,
                given.as_given,
                units.show(given.si, quantity, other) if _has_two_units(quantity) else "",
                given.tolerance_text or "–",
                given.source or "not stated",
                given.status,
            ]
        )
    sheet.table(
        "inputs",
        "Givens, as stated in the case",
        [
            {"title": "Quantity"},
            {"title": "As given", "align": "right"},
            {"title": "Converted", "align": "right"},
            {"title": "Tolerance", "align": "right"},
            {"title": "Source"},
            {"title": "Status"},
        ],
        rows,
        note="Converted: in SI what is given in US customary units, and the other way round.",
    )


_CUSTOMARY = {
    "in", "inch", "ft", "foot", "mil", "thou", "lb", "lbm", "pound", "oz", "ounce", "lbf", "kip",
    "klbf", "psi", "ksi", "Mpsi", "hp", "°F", "degF",
}  # fmt: skip


def _customary(as_given: str) -> bool:
    """Tell whether a given is stated in US customary units."""
    return not _CUSTOMARY.isdisjoint(re.findall(r"[^\W\d_]+|°F", as_given))


def _has_two_units(quantity: str) -> bool:
    return units.unit_of(quantity, "si") != units.unit_of(quantity, "us")


def assumptions(sheet: Sheet) -> None:
    """Show the assumptions that the case states, with their basis and status."""
    stated = sheet.case.assumptions
    if not stated:
        sheet.paragraph("The case states no assumptions beyond those of the method.")
        return
    sheet.table(
        "assumptions",
        "Assumptions",
        [
            {"title": "No."},
            {"title": "Assumption"},
            {"title": "Basis"},
            {"title": "Status"},
        ],
        [[a.id, a.text, a.basis or "not stated", a.status] for a in stated],
    )


def criteria(sheet: Sheet, calc: Assessment) -> None:
    """Show each limit: how it comes about, the value against it, the margin and the verdict."""
    if not calc.judged:
        sheet.paragraph("The case states no criterion. Nothing is judged.")
        return
    for number, judged in enumerate(calc.judged, 1):
        _criterion(sheet, number, judged)


def _criterion(sheet: Sheet, number: int, judged: Judged) -> None:
    outcome = judged.outcome
    measure = f" {outcome.measure}" if outcome.measure != "none" else ""
    if outcome.how_latex:
        sheet.equation(
            f"{judged.id}-limit",
            f"Limit of criterion {number}",
            outcome.how_latex,
            note=outcome.how,
        )
    rows: list[list[Inline]] = [
        ["Source", f"{outcome.source}" + (f", {outcome.clause}" if outcome.clause else "")],
    ]
    if outcome.edition:
        rows.append(["Edition and basis", f"{outcome.edition}; {outcome.basis}"])
    if outcome.how and not outcome.how_latex:
        rows.append(["How the limit is found", outcome.how])
    rows += [
        [
            "Value",
            sheet.show(outcome.value, outcome.quantity) + measure * (outcome.value is not None),
        ],
        [
            "Limit",
            "–"
            if outcome.limit is None
            else f"{outcome.sense} {sheet.show(outcome.limit, outcome.quantity)}{measure}",
        ],
    ]
    if outcome.margin is not None:
        rows.append(["Margin", f"{sheet.show(outcome.margin, 'percent', 3)} of the limit"])
    if outcome.reason:
        rows.append(["Remark", outcome.reason])
    rows.append(["Verdict", {"strong": outcome.verdict}])
    sheet.table(
        judged.where,
        f"Criterion {number}: {outcome.title}",
        [{"title": "", "width": 0.26}, {"title": "Finding", "width": 0.74}],
        rows,
    )


def second_computations(sheet: Sheet, calc: Assessment) -> None:
    """Show each result beside its second computation, the difference and the tolerance."""
    rows: list[list[Inline]] = []
    for finding in calc.findings:
        if finding.second is None or finding.value is None:
            continue
        difference = finding.second.difference(finding.value)
        rows.append(
            [
                finding.title,
                sheet.show(finding.value, finding.quantity, 6),
                sheet.show(finding.second.value, finding.quantity, 6),
                _power(difference),
                _power(finding.second.tolerance),
                {"strong": "agrees" if finding.agrees else "DISAGREES"},
                f"{finding.second.method}; {finding.second.because}".rstrip("; "),
            ]
        )
    sheet.table(
        "second-computations",
        "Results computed twice",
        [
            {"title": "Result"},
            {"title": "First", "align": "right"},
            {"title": "Second", "align": "right"},
            {"title": "Relative difference", "align": "right"},
            {"title": "Tolerance", "align": "right"},
            {"title": "Outcome"},
            {"title": "Second method, and why that tolerance"},
        ],
        rows,
    )


def _power(value: float) -> str:
    """Return a small number as one digit and a power of ten."""
    if value < 1e-15:
        return "< 10⁻¹⁵"
    digit, exponent = f"{value:.0e}".split("e")
    raised = str(int(exponent)).translate(str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹"))
    return f"{digit}×10{raised}"


def cautions(sheet: Sheet, calc: Assessment) -> None:
    """Show the cautions, and what the calculation does not assess."""
    for caution in calc.cautions:
        sheet.caution(caution.title, caution.text)
    sheet.paragraph("This calculation does not assess:")
    sheet.listing(calc.not_assessed)


def provenance(sheet: Sheet) -> None:
    """Show what made the report: template, versions, and the digests of what went in."""
    record: dict[str, Any] = sheet.provenance
    rows: list[list[Inline]] = [[key, str(value)] for key, value in record.items()]
    sheet.table(
        "provenance",
        "What made this report; the full list is in environment.json of the package",
        [{"title": "", "width": 0.3}, {"title": "Version or digest", "width": 0.7}],
        rows,
    )
