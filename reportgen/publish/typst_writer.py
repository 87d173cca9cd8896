"""The report's structure as Typst: calls with quoted text, in code mode throughout.

No text of the report is ever read as Typst markup: a text is a string literal, a label a
string, a formula what :mod:`reportgen.publish.math_typst` writes.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from itertools import pairwise

from reportgen.publish import nodes
from reportgen.publish.characters import for_paper, long_runs, plain
from reportgen.publish.formulas import Formulas
from reportgen.publish.html_writer import plain_words
from reportgen.publish.widths import Layout, layout, pieces

_SHORT = 300.0  # points: a table this short never breaks across pages
_TALL = 1500  # characters: a cell this long may not fit a page, so its row may break


class TypstWriter:
    """Writes blocks of one document."""

    def __init__(self, document: nodes.Document, formulas: Formulas) -> None:
        self.document, self.formulas = document, formulas
        self.drawings: dict[str, bytes] = {}
        self.code_points: set[str] = set()

    def blocks(self, blocks: Iterable[nodes.Block]) -> str:
        """Return blocks, one statement each."""
        out: list[str] = []
        for before, block in pairwise([nodes.Rule(), *blocks]):
            if isinstance(before, nodes.Paragraph) and isinstance(block, nodes.Display):
                out[-1] = f"block(sticky: true, {out[-1]})"  # what leads to a formula stays by it
            out.append(self.block(block))
        return "\n".join(out)

    def block(self, block: nodes.Block) -> str:
        """Return one block as a statement of a code block."""
        match block:
            case nodes.Heading():
                body = self.inlines(block.body)
                if not block.number:
                    return f"rg.front-section({string(block.anchor)}, {body})"
                return _labelled(
                    f"rg.section({block.level}, {string(block.number)}, {body})", block.anchor
                )
            case nodes.Paragraph():
                body = self.inlines(block.body)
                return f"par(rg.small({body}))" if block.role == "small" else f"par({body})"
            case nodes.Display():
                return f"rg.display({self._alt(block.latex)}, {self._math(block.latex)})"
            case nodes.Listing():
                return self._listing(block)
            case nodes.Quote():
                return f"quote(block: true, {{{self.blocks(block.body)}}})"
            case nodes.CodeBlock():
                lines = " + linebreak() + ".join(
                    self._text(line) for line in block.text.split("\n")
                )
                return f"rg.code-listing({lines})"
            case nodes.Rule():
                return "line(length: 100%, stroke: 0.4pt + rg.rule-line)"
            case nodes.Table():
                return self._table(block)
            case nodes.Equation():
                return self._equation(block)
            case nodes.Figure():
                return self._figure(block)
            case nodes.Notice():
                colour = "house-main" if block.level == "conclusion" else "house-accent"
                return (
                    f"rg.notice({colour}, {string(block.level)}, {self.inlines(block.title)}, "
                    f"{self.inlines(block.body)})"
                )

    def _listing(self, block: nodes.Listing) -> str:
        items = ", ".join(f"{{{self.blocks(item)}}}" for item in block.items)
        if block.start is None:
            return f"list({items})"
        return f"enum(start: {block.start}, {items})"

    # --- tables ---------------------------------------------------------------------------

    def _table(self, table: nodes.Table) -> str:
        rows = []
        for row in table.rows:
            cells = [
                self.inlines(cell, column.align == "right")
                for cell, column in zip(row.cells, table.columns, strict=True)
            ]
            if row.anchor:
                cells[0] = f"[#metadata(none)#label({string(row.anchor)})#({cells[0]})]"
            rows.extend(cells)
        laid = self._layout(table)
        whole = laid.height < _SHORT
        widths = ", ".join(f"{share:.4f}fr" for share in laid.shares)
        head = ", ".join(
            f'table.cell(text(weight: "semibold", {self.inlines(c.title)}))' for c in table.columns
        )
        align = ", ".join(c.align for c in table.columns)
        tall = any(len(self._printed(cell)) > _TALL for row in table.rows for cell in row.cells)
        body = (
            f"rg.rows-of({laid.size}pt, ({widths},), ({align},), {_bool(tall)}, ({head},), "
            f"({', '.join(rows)}{',' if rows else ''}))"
        )
        note = self.inlines(table.note) if table.note else "none"
        if table.label:
            return (
                f"rg.numbered-table({string(table.anchor)}, {string(table.label)}, "
                f"{self.inlines(table.caption)}, {_bool(whole)}, {note}, {body})"
            )
        return f"rg.plain-table({_bool(whole)}, {note}, {body})"

    def _layout(self, table: nodes.Table) -> Layout:
        return layout(
            [self._printed(column.title) for column in table.columns],
            [[self._printed(cell) for cell in row.cells] for row in table.rows],
            [column.align == "right" for column in table.columns],
            [column.width for column in table.columns],
            self.document.paper,
        )

    def _printed(self, body: nodes.Inlines) -> str:
        """Return about as many letters as a cell prints."""
        out = []
        for inline in body:
            match inline:
                case nodes.Math():
                    out.append("".join(self.formulas.trees[inline.latex].itertext()))
                case nodes.Strong() | nodes.Emphasis():
                    out.append(self._printed(inline.body))
                case nodes.Mark():
                    out.append(f"{inline.verdict.replace(' ', '_')}mm")
                case _:
                    out.append(plain_words((inline,), self.document, self.formulas))
        return "".join(out)

    # --- equations and figures ------------------------------------------------------------

    def _equation(self, equation: nodes.Equation) -> str:
        lines = []
        for n, line in enumerate(equation.lines):
            words = self.formulas.words(line)
            said = f"{equation.alt.rstrip('.')}. {words}" if n == 0 and equation.alt else words
            lines.append(f"({string(plain(said))}, {self._math(line)})")
        note = self.inlines(equation.note) if equation.note else "none"
        return _labelled(
            f"rg.equation-block(house-main, {self.inlines(equation.title)}, "
            f"{string(f'({equation.number})')}, {note}, ({', '.join(lines)},))",
            equation.anchor,
        )

    def _figure(self, figure: nodes.Figure) -> str:
        name = f"{figure.anchor}.svg"
        self.drawings[name] = figure.svg.encode()
        return _labelled(
            f"rg.drawing({string(name)}, {string(plain(figure.alt))}, "
            f"{string(f'Figure {figure.number}')}, {self.inlines(figure.caption)})",
            figure.anchor,
        )

    def _alt(self, latex: str) -> str:
        return string(plain(self.formulas.words(latex)))

    def _math(self, latex: str) -> str:
        return f"${self.formulas.typst(latex)}$.body"

    # --- inlines --------------------------------------------------------------------------

    def inlines(self, body: nodes.Inlines, value: bool = False) -> str:
        """Return inlines as one content expression; in a value, numbers keep their units."""
        return " + ".join(self._inline(inline, value) for inline in body) if body else "[]"

    def _inline(self, inline: nodes.Inline, value: bool = False) -> str:
        match inline:
            case nodes.Text():
                return self._value(inline.text) if value else self._text(inline.text)
            case nodes.Code():
                return f"rg.code({self._text(inline.text)})"
            case nodes.Math():
                return f"rg.formula({self._alt(inline.latex)}, {self._math(inline.latex)})"
            case nodes.Strong():
                return f"strong({self.inlines(inline.body, value)})"
            case nodes.Emphasis():
                return f"emph({self.inlines(inline.body)})"
            case nodes.Link():
                return f"link({string(plain(inline.url))}, {self.inlines(inline.body)})"
            case nodes.Reference():
                target = self.document.targets[inline.target]
                body = self.inlines(inline.body, value) if inline.body else string(target.label)
                return f"link(label({string(target.anchor)}), {body})"
            case nodes.Mark():
                return f"rg.verdict({string(inline.verdict)})"
            case nodes.LineBreak():
                return "linebreak()"

    def _text(self, words: str) -> str:
        """Return a text as content: string literals, and code points told in their place."""
        parts = []
        for told, piece in for_paper(words):
            if told:
                self.code_points.add(piece)
                parts.append(f"rg.code-point({string(piece)})")
            else:
                parts.extend(
                    f"rg.breaking({string(run)})" if long else f"[#{string(run)}]"
                    for long, run in long_runs(piece)
                )
        return " + ".join(parts) or "[]"

    def _value(self, words: str) -> str:
        """Return a value with its measure; a line may break between the two only."""
        parts = [
            f"box({self._text(piece)})" if whole else self._text(piece)
            for piece, whole in pieces(words)
        ]
        return " + [ ] + ".join(parts) or "[]"

    def text(self, words: str) -> str:
        """Return a plain text as content."""
        return self._text(words)


def string(words: str) -> str:
    """Return a Typst string literal that stands for exactly these words."""
    out = []
    for character in words:
        if character in '\\"':
            out.append(f"\\{character}")
        elif ord(character) < 0x20 or 0x7F <= ord(character) < 0xA0:
            out.append(f"\\u{{{ord(character):x}}}")
        else:
            out.append(character)
    return f'"{"".join(out)}"'


def mapping(values: Mapping[str, str]) -> str:
    """Return a Typst dictionary whose values are expressions already."""
    return "(" + ", ".join(f"{string(key)}: {value}" for key, value in values.items()) + ")"


def _bool(value: bool) -> str:
    return "true" if value else "false"


def _labelled(expression: str, anchor: str) -> str:
    return f"[#{expression}#label({string(anchor)})]" if anchor else expression
