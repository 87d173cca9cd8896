"""The report's structure as HTML: parts for the page template to frame."""

from __future__ import annotations

import base64
import csv
import io
import json
import re
import unicodedata
from html import escape
from typing import Any
from urllib.parse import quote

from reportgen.publish import drawing, nodes
from reportgen.publish.characters import for_screen, plain
from reportgen.publish.formulas import Formulas
from reportgen.publish.widths import pieces

_FEW_ROWS = 11  # a table of so many stays whole on a printed page
_MARKS = {"meets": "meets", "does not meet": "fails", "not assessed": "open"}
_MAY_BREAK = re.compile(r"[\s/-]")
_RIGHT_TO_LEFT = ("R", "AL", "AN")


class HtmlWriter:
    """Writes blocks of one document."""

    def __init__(self, document: nodes.Document, formulas: Formulas) -> None:
        self.document, self.formulas = document, formulas

    def blocks(self, blocks: tuple[nodes.Block, ...]) -> str:
        """Return blocks, each numbered section wrapped with what follows it."""
        out: list[str] = []
        opened: list[int] = []
        for block in blocks:
            if isinstance(block, nodes.Heading):
                while opened and opened[-1] >= block.level:
                    out.append("</section>")
                    opened.pop()
                out.append(f'<section aria-labelledby="{block.anchor}">')
                opened.append(block.level)
            out.append(self.block(block))
        out.extend("</section>" for _ in opened)
        return "\n".join(out)

    def block(self, block: nodes.Block) -> str:
        """Return one block."""
        match block:
            case nodes.Heading():
                tag = f"h{min(block.level + 1, 6)}"
                number = f'<span class="number">{block.number}</span> ' if block.number else ""
                return f'<{tag} id="{block.anchor}">{number}{self.inlines(block.body)}</{tag}>'
            case nodes.Paragraph():
                role = f' class="{block.role}"' if block.role else ""
                return f"<p{role}>{self.inlines(block.body)}</p>"
            case nodes.Display():
                return self._scrolled("display", self.formulas.html(block.latex, display=True))
            case nodes.Listing():
                return self._listing(block)
            case nodes.Quote():
                return f"<blockquote>{''.join(map(self.block, block.body))}</blockquote>"
            case nodes.CodeBlock():
                return self._scrolled(
                    "code", f"<pre><code>{text(block.text, lines=True)}</code></pre>"
                )
            case nodes.Rule():
                return "<hr>"
            case nodes.Table():
                return self._table(block)
            case nodes.Equation():
                return self._equation(block)
            case nodes.Figure():
                return self._figure(block)
            case nodes.Notice():
                return self._notice(block)

    @staticmethod
    def _scrolled(role: str, inner: str) -> str:
        return f'<div class="scroll {role}">{inner}</div>'

    def _listing(self, block: nodes.Listing) -> str:
        items = "".join(f"<li>{self._item(item)}</li>" for item in block.items)
        if block.start is None:
            return f"<ul>{items}</ul>"
        start = f' start="{block.start}"' if block.start != 1 else ""
        return f"<ol{start}>{items}</ol>"

    def _item(self, item: tuple[nodes.Block, ...]) -> str:
        if len(item) == 1 and isinstance(item[0], nodes.Paragraph):
            return self.inlines(item[0].body)
        return "".join(map(self.block, item))

    def _notice(self, block: nodes.Notice) -> str:
        title = self.inlines(block.title)
        role = ""
        if block.level != "conclusion":
            role = f' role="note" aria-label="{escape(self.words(block.title))}"'
        return (
            f'<div class="notice {block.level}"{role}><p class="notice-title">{title}</p>'
            f"<p>{self.inlines(block.body)}</p></div>"
        )

    # --- tables ---------------------------------------------------------------------------

    def _table(self, table: nodes.Table) -> str:
        caption = ""
        if table.label:
            words = f"<b>{table.label}</b> {self.inlines(table.caption)}"
            caption = f'<caption><span class="caption">{words}</span></caption>'
        head = "".join(
            f'<th scope="col"{_role("columnheader") if table.stacks else ""} class="{c.align}">'
            f"{self.inlines(c.title)}</th>"
            if c.title
            else f'<td class="{c.align}"></td>'
            for c in table.columns
        )
        rows = "".join(self._row(table, row) for row in table.rows)
        note = f'<p class="note">{self.inlines(table.note)}</p>' if table.note else ""
        anchor = f' id="{table.anchor}"' if table.anchor else ""
        kind = "table stack" if table.stacks else "table"
        if len(table.rows) <= _FEW_ROWS:
            kind += " short"
        role = _role("table") if table.stacks else ""
        groups = _role("rowgroup") if table.stacks else ""
        return (
            f'<div class="{kind}"{anchor}><div class="scroll"><table{role}>{caption}'
            f"<thead{groups}><tr{_role('row') if groups else ''}>{head}</tr></thead>"
            f"<tbody{groups}>{rows}</tbody></table></div>{note}</div>"
        )

    def _row(self, table: nodes.Table, row: nodes.Row) -> str:
        anchor = f' id="{row.anchor}"' if row.anchor else ""
        role = _role("row") if table.stacks else ""
        cells = []
        for n, (cell, column) in enumerate(zip(row.cells, table.columns, strict=True)):
            inner = self.inlines(cell, column.align == "right")
            if n == 0 and table.row_header and inner:
                named = _role("rowheader") if table.stacks else ""
                cells.append(f'<th scope="row"{named} class="{column.align}">{inner}</th>')
            else:
                named = ""
                if table.stacks:
                    named = f'{_role("cell")} data-name="{escape(self.words(column.title))}"'
                cells.append(f'<td{named} class="{column.align}">{inner}</td>')
        return f"<tr{anchor}{role}>{''.join(cells)}</tr>"

    # --- equations and figures ------------------------------------------------------------

    def _equation(self, equation: nodes.Equation) -> str:
        lines = "".join(
            f'<div class="line">{self.formulas.html(line, display=True)}</div>'
            for line in equation.lines
        )
        name = f"Equation {equation.number}: {self.words(equation.title)}"
        note = f'<p class="note">{self.inlines(equation.note)}</p>' if equation.note else ""
        return (
            f'<div class="equation" id="{equation.anchor}" role="group" '
            f'aria-label="{escape(name)}">'
            f'<p class="equation-title">{self.inlines(equation.title)}</p>'
            f'<div class="equation-body"><div class="scroll">{lines}</div>'
            f'<p class="equation-number">({equation.number})</p></div>{note}</div>'
        )

    def _figure(self, figure: nodes.Figure) -> str:
        svg = drawing.inline(figure.svg, figure.anchor, plain(figure.alt))
        reading = data = ""
        if any(axes.curves for axes in figure.axes):
            name = f"{self.document.number}-{figure.anchor}.csv"
            href = "data:text/csv;charset=utf-8," + quote(_csv(figure), safe=",.-+:()")
            data = (
                f'<a class="data" download="{escape(_file_name(name))}" '
                f'href="{escape(href)}">Data of Figure {figure.number} (CSV)</a>'
            )
            reading = (
                f'<script type="application/json" class="axes">{_json(_axes(figure))}</script>'
            )
        return (
            f'<figure id="{figure.anchor}"><div class="scroll"><div class="plot">{svg}</div></div>'
            f"{reading}"
            f"<figcaption><b>Figure {figure.number}</b> {self.inlines(figure.caption)} {data}"
            "</figcaption></figure>"
        )

    # --- inlines --------------------------------------------------------------------------

    def inlines(self, body: nodes.Inlines, value: bool = False) -> str:
        """Return inlines as HTML; in a value, numbers keep their units in the line."""
        return "".join(self._inline(inline, value) for inline in body)

    def _inline(self, inline: nodes.Inline, value: bool = False) -> str:
        match inline:
            case nodes.Text():
                return _value(inline.text) if value else text(inline.text)
            case nodes.Code():
                return f"<code>{text(inline.text)}</code>"
            case nodes.Math():
                return self.formulas.html(inline.latex)
            case nodes.Strong():
                return f"<strong>{self.inlines(inline.body, value)}</strong>"
            case nodes.Emphasis():
                return f"<em>{self.inlines(inline.body)}</em>"
            case nodes.Link():
                body = self.inlines(inline.body)
                return f'<a href="{escape(inline.url)}" rel="noreferrer">{body}</a>'
            case nodes.Reference():
                target = self.document.targets[inline.target]
                body = self.inlines(inline.body, value) or text(target.label)
                return f'<a href="#{target.anchor}">{body}</a>'
            case nodes.Mark():
                return f'<span class="verdict {_MARKS[inline.verdict]}">{inline.verdict}</span>'
            case nodes.LineBreak():
                return "<br>"

    def words(self, body: nodes.Inlines) -> str:
        """Return inlines as plain words."""
        return plain_words(body, self.document, self.formulas)


def plain_words(body: nodes.Inlines, document: nodes.Document, formulas: Formulas) -> str:
    """Return inlines as plain words, for names and alternative texts."""
    out = []
    for inline in body:
        match inline:
            case nodes.Text() | nodes.Code():
                out.append(plain(inline.text))
            case nodes.Math():
                out.append(formulas.words(inline.latex))
            case nodes.Reference() if not inline.body:
                out.append(document.targets[inline.target].label)
            case nodes.Strong() | nodes.Emphasis() | nodes.Link() | nodes.Reference():
                out.append(plain_words(inline.body, document, formulas))
            case nodes.Mark():
                out.append(inline.verdict)
            case nodes.LineBreak():
                out.append(" ")
    return "".join(out)


def text(words: str, lines: bool = False) -> str:
    """Return a text for a page: escaped, its code points told, its direction kept to itself."""
    if lines:
        return "\n".join(text(line) for line in words.split("\n"))
    out = "".join(
        f'<span class="codepoint">{piece}</span>' if told else escape(piece, quote=False)
        for told, piece in for_screen(words)
    )
    if any(unicodedata.bidirectional(c) in _RIGHT_TO_LEFT for c in words):
        return f"<bdi>{out}</bdi>"
    return out


def _value(words: str) -> str:
    """Return a value with its measure; a line may break between the two only."""
    parts = [
        f'<span class="whole">{text(piece)}</span>'
        if whole and _MAY_BREAK.search(piece)
        else text(piece)
        for piece, whole in pieces(words)
    ]
    return " ".join(parts)


def data_uri(content: bytes, kind: str) -> str:
    """Return an image as an address that holds it."""
    mime = {"svg": "image/svg+xml", "png": "image/png"}[kind]
    return f"data:{mime};base64,{base64.b64encode(content).decode()}"


def _role(name: str) -> str:
    """Return a role spelled out: a table that a narrow screen stacks loses its own."""
    return f' role="{name}"'


def _axes(figure: nodes.Figure) -> list[dict[str, Any]]:
    """Return what the reading script needs beside the data file's columns."""
    return [
        {
            "box": axes.box,
            "x": [axes.x_title, *axes.x_range, axes.x_scale],
            "y": [axes.y_title, *axes.y_range, axes.y_scale],
            "curves": [curve.name for curve in axes.curves],
        }
        for axes in figure.axes
    ]


def _csv(figure: nodes.Figure) -> str:
    """Return a figure's numbers: two columns a curve, in the order of the axes."""
    columns: list[list[str]] = []
    for axes in figure.axes:
        for curve in axes.curves:
            columns.append([_cell(axes.x_title), *map(_shown, curve.x)])
            columns.append([_cell(f"{curve.name}: {axes.y_title}"), *map(_shown, curve.y)])
    longest = max(map(len, columns))
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    for n in range(longest):
        writer.writerow([column[n] if n < len(column) else "" for column in columns])
    return out.getvalue()


def _shown(value: float) -> str:
    return f"{value:.7g}"


def _cell(title: str) -> str:
    """Return a title that no spreadsheet takes for a formula."""
    safe = plain(title)
    return f"'{safe}" if safe[:1] in "=+-@" else safe


def _file_name(name: str) -> str:
    return "".join(c if c.isalnum() or c in "-_." else "-" for c in name)


def _json(value: object) -> str:
    """Return JSON that cannot end the element around it."""
    return json.dumps(value, ensure_ascii=True, separators=(",", ":"), allow_nan=False).replace(
        "<", "\\u003c"
    )
