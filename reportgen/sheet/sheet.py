"""The sheet a template writes on: it shows blocks in order and closes with the results."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import Any, cast

from reportgen import units
from reportgen.assess.model import Assessment, Finding, Judged
from reportgen.case import from_resolved
from reportgen.sheet import figures
from reportgen.sheet.blocks import (
    BLOCK_MIME,
    RESULTS_MIME,
    Block,
    Column,
    Criterion,
    Figure,
    Hold,
    Inline,
    Result,
    Results,
    Table,
)
from reportgen.sheet.conclusion import conclusion_of
from reportgen.sheet.lines import Value, equation_line, plain
from reportgen.sheet.plain import as_html, as_text


class Sheet:
    """A report in the making.

    Parameters
    ----------
    resolved
        The resolved case, as the run injects it into the template.

    Attributes
    ----------
    case
        The case, as its model.
    system
        Unit system of the reader, ``"si"`` or ``"us"``.
    provenance
        What made the report: names, versions and digests, as the run states them.
    """

    def __init__(self, resolved: Mapping[str, Any]) -> None:
        given = dict(resolved)
        self._template: dict[str, str] = given.pop("template_record", {})
        self.provenance: dict[str, str] = given.pop("provenance", {})
        self._document = given["document"]
        self.case: Any = from_resolved(given)
        self.system: units.System = self.case.units
        self._ids: set[str] = set()

    # --- values -----------------------------------------------------------------------

    def show(self, value: float | None, quantity: str, digits: int = 4) -> str:
        """Return a value in the reader's units; a dash where there is none."""
        return "–" if value is None else units.show(value, quantity, self.system, digits)

    def unit(self, quantity: str) -> str:
        """Return the reader's unit of a quantity."""
        return units.unit_of(quantity, self.system)

    def to_reader(self, values: Any, quantity: str) -> Any:
        """Return SI values in the reader's units; arrays keep their shape."""
        return units.to_reader(values, quantity, self.system)

    # --- blocks -----------------------------------------------------------------------

    def paragraph(self, *parts: Inline) -> None:
        """Show a paragraph whose text the calculation makes."""
        self._emit({"kind": "paragraph", "text": list(parts)})

    def listing(self, items: Iterable[Inline]) -> None:
        """Show a bulleted list."""
        self._emit({"kind": "list", "items": list(items)})

    def caution(self, title: Inline, text: Inline) -> None:
        """Show what can hurt people or void the calculation."""
        self._emit({"kind": "notice", "level": "caution", "title": title, "text": text})

    def finding(self, title: Inline, text: Inline) -> None:
        """Show a finding that a reader must not miss."""
        self._emit({"kind": "notice", "level": "finding", "title": title, "text": text})

    def equation(
        self,
        block_id: str,
        title: Inline,
        formula: str,
        values: Mapping[str, Value] | None = None,
        result: Value | Finding | None = None,
        note: Inline = "",
    ) -> None:
        """Show a formula, the same with values, and its result.

        See :func:`reportgen.sheet.lines.equation_line` for how a formula marks its values.
        """
        if isinstance(result, Finding):
            result = None if result.value is None else (result.value, result.quantity)
        self._emit(
            equation_line(block_id, title, formula, values or {}, result, self.system, note=note)
        )

    def table(
        self,
        block_id: str,
        caption: Inline,
        columns: Sequence[Inline | Column],
        rows: Iterable[Sequence[Inline]],
        note: Inline = "",
        row_header: bool = True,
    ) -> None:
        """Show a numbered table; a column is its title or a mapping with title and align."""
        block: Table = {
            "kind": "table",
            "id": block_id,
            "caption": caption,
            "columns": [
                cast("Column", c) if isinstance(c, dict) and "title" in c else {"title": c}
                for c in columns
            ],
            "rows": [list(row) for row in rows],
            "row_header": row_header,
        }
        if note:
            block["note"] = note
        self._emit(block)

    def figure(self, block_id: str, figure: Any, caption: Inline, alt: str) -> None:
        """Show a figure made with :func:`reportgen.sheet.figures.new`.

        ``alt`` tells the finding in words, for a reader who cannot see the figure.
        """
        svg, axes = figures.drawing(figure)
        block: Figure = {
            "kind": "figure",
            "id": block_id,
            "caption": caption,
            "alt": alt,
            "svg": svg,
            "axes": axes,
        }
        self._emit(block, extra={"image/svg+xml": svg})

    # --- the close --------------------------------------------------------------------

    def finish(
        self,
        assessment: Assessment,
        asked: Inline,
        conclusion: Inline = "",
        series: Mapping[str, Any] | None = None,
        lead: Sequence[Inline] = (),
    ) -> None:
        """Close the sheet: everything that page one and ``results.json`` are made from.

        ``lead`` is said before the verdicts, where there is something that they do not say.
        """
        holds = [cast("Hold", hold) for hold in self.case.holds()]
        for finding in assessment.disagreements():
            holds.append(
                {
                    "id": f"H{len(holds) + 1}",
                    "kind": "check",
                    "text": f"{finding.title}: the second computation disagrees beyond its "
                    "tolerance; the result may not be used until this is resolved",
                }
            )
        for text in assessment.open_points:
            holds.append({"id": f"H{len(holds) + 1}", "kind": "check", "text": text})
        criteria = [self._criterion(judged) for judged in assessment.judged]
        results: Results = {
            "format": 1,
            "document": self._document,
            "template": self._template,
            "units": self.system,
            "machine": machine_words(self.case),
            "asked": asked,
            "conclusion": conclusion or [*lead, *conclusion_of(criteria, len(holds))],
            "results": [self._result(f) for f in assessment.findings if f.headline],
            "criteria": criteria,
            "holds": holds,
            "cautions": [f"{c.title}. {c.text}" for c in assessment.cautions],
            "not_assessed": list(assessment.not_assessed),
            "series": dict(series or {}),
        }
        self._display(
            {
                RESULTS_MIME: cast("dict[str, Any]", results),
                "text/plain": plain(results["conclusion"]),
            }
        )

    def _result(self, finding: Finding) -> Result:
        result: Result = {
            "id": finding.id,
            "title": finding.title,
            "symbol": finding.symbol,
            "value": finding.value,
            "unit": units.QUANTITIES[finding.quantity].si_unit,
            "quantity": finding.quantity,
            "shown": self.show(finding.value, finding.quantity)
            + (f" {finding.measure}" if finding.measure != "none" else ""),
            "measure": finding.measure,
            "method": finding.method,
            "where": finding.where,
        }
        if finding.second and finding.value is not None:
            result["second"] = {
                "method": finding.second.method,
                "value": finding.second.value,
                "difference": finding.second.difference(finding.value),
                "tolerance": finding.second.tolerance,
                "agrees": finding.agrees,
            }
        return result

    def _criterion(self, judged: Judged) -> Criterion:
        outcome = judged.outcome
        measure = f" {outcome.measure}" if outcome.measure != "none" else ""
        return {
            "id": judged.id,
            "title": outcome.title,
            "source": outcome.source,
            "clause": outcome.clause,
            "value": outcome.value,
            "limit": outcome.limit,
            "sense": outcome.sense,
            "unit": units.QUANTITIES[outcome.quantity].si_unit,
            "margin": outcome.margin,
            "value_shown": self.show(outcome.value, outcome.quantity)
            + measure * (outcome.value is not None),
            "limit_shown": self.show(outcome.limit, outcome.quantity)
            + measure * (outcome.limit is not None),
            "margin_shown": self.show(outcome.margin, "percent", 3),
            "verdict": outcome.verdict,
            "reason": outcome.reason,
            "where": judged.where,
        }

    def _emit(self, block: Block, extra: Mapping[str, Any] | None = None) -> None:
        block_id = block.get("id")
        if block_id in self._ids:
            raise ValueError(f"two blocks are named {block_id!r}; give each its own name")
        if isinstance(block_id, str):
            self._ids.add(block_id)
        self._display(
            {
                BLOCK_MIME: block,
                "text/html": as_html(block),
                "text/plain": as_text(block),
                **(extra or {}),
            }
        )

    @staticmethod
    def _display(bundle: Mapping[str, Any]) -> None:
        from IPython.display import display

        display({k: v for k, v in bundle.items() if v}, raw=True)  # type: ignore[no-untyped-call]


def machine_words(case: Any) -> str:
    """Return the machine in one line: name, tag, service."""
    machine = case.machine
    words = [machine.name, machine.tag, machine.service]
    return ", ".join(word for word in words if word)
