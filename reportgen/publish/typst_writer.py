"""The report's structure as Typst: calls with quoted text, in code mode throughout.

No text of the report is ever read as Typst markup: a text is a string literal, a label a
string, a formula what :mod:`reportgen.publish.math_typst` writes.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping

from reportgen.publish import nodes
from reportgen.publish.characters import for_paper, long_runs, plain
from reportgen.publish.formulas import Formulas
from reportgen.publish.html_writer import plain_words

_SIZES = ((6, "9.5pt"), (9, "8.5pt"), (10**6, "7pt"))  # type size by number of columns
_SHORT, _SHORT_NUMBER = 14, 24  # characters: a column this narrow keeps its natural width


class TypstWriter:
    """Writes blocks of one document."""

    def __init__(self, document: nodes.Document, formulas: Formulas) -> None:
        self.document, self.formulas = document, formulas
        self.drawings: dict[str, bytes] = {}
        self.code_points: set[str] = set()

    def blocks(self, blocks: Iterable[nodes.Block]) -> str:
        """Return blocks, one statement each."""
        return "\n".join(self.block(block) for block in blocks)

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
            cells = [self.inlines(cell) for cell in row.cells]
            if row.anchor:
                cells[0] = f"[#metadata(none)#label({string(row.anchor)})#({cells[0]})]"
            rows.extend(cells)
        size = next(s for most, s in _SIZES if len(table.columns) <= most)
        head = ", ".join(
            f'table.cell(text(weight: "semibold", {self.inlines(c.title)}))' for c in table.columns
        )
        align = ", ".join(c.align for c in table.columns)
        body = (
            f"rg.rows-of({size}, ({self._widths(table)},), ({align},), ({head},), "
            f"({', '.join(rows)}{',' if rows else ''}))"
        )
        note = self.inlines(table.note) if table.note else "none"
        if table.label:
            return (
                f"rg.numbered-table({string(table.anchor)}, {string(table.label)}, "
                f"{self.inlines(table.caption)}, {note}, {body})"
            )
        small = f"\nblock(above: 2mm, rg.small({note}))" if table.note else ""
        return body + small

    def _widths(self, table: nodes.Table) -> str:
        """Return column widths: short columns as they are, the others by their content.

        Where all are short they share the width, so that every table is as wide as the text.
        """
        longest, typical = [], []
        for n, column in enumerate(table.columns):
            lengths = [len(self._words(row.cells[n])) for row in table.rows]
            longest.append(max([len(self._words(column.title)), *lengths]))
            typical.append(sum(lengths) / len(lengths) if lengths else longest[-1])
        short = [
            length <= (_SHORT_NUMBER if column.align == "right" else _SHORT)
            for length, column in zip(longest, table.columns, strict=True)
        ]
        shared = all(short)
        widths = []
        for n, column in enumerate(table.columns):
            if column.width:
                widths.append(f"{column.width * 100:g}%")
            elif short[n] and not shared:
                widths.append("auto")
            else:
                share = (min(longest[n], 60) + min(typical[n], 60)) / 2
                widths.append(f"{max(share, 8):.3g}fr")
        return ", ".join(widths)

    def _words(self, body: nodes.Inlines) -> str:
        return plain_words(body, self.document, self.formulas)

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

    def inlines(self, body: nodes.Inlines) -> str:
        """Return inlines as one content expression."""
        return " + ".join(self._inline(inline) for inline in body) if body else "[]"

    def _inline(self, inline: nodes.Inline) -> str:
        match inline:
            case nodes.Text():
                return self._text(inline.text)
            case nodes.Code():
                return f"rg.code({self._text(inline.text)})"
            case nodes.Math():
                return f"rg.formula({self._alt(inline.latex)}, {self._math(inline.latex)})"
            case nodes.Strong():
                return f"strong({self.inlines(inline.body)})"
            case nodes.Emphasis():
                return f"emph({self.inlines(inline.body)})"
            case nodes.Link():
                return f"link({string(plain(inline.url))}, {self.inlines(inline.body)})"
            case nodes.Reference():
                target = self.document.targets[inline.target]
                body = self.inlines(inline.body) if inline.body else string(target.label)
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


def _labelled(expression: str, anchor: str) -> str:
    return f"[#{expression}#label({string(anchor)})]" if anchor else expression
