"""The report's structure: what both writers walk, and nothing about how it looks."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Literal

Align = Literal["left", "right", "center"]


@dataclass(frozen=True, slots=True)
class Text:
    """Plain text; never read as markup."""

    text: str


@dataclass(frozen=True, slots=True)
class Code:
    """Text set as code."""

    text: str


@dataclass(frozen=True, slots=True)
class Math:
    """A formula in the line; ``latex`` is its key among the report's formulas."""

    latex: str


@dataclass(frozen=True, slots=True)
class Strong:
    body: Inlines


@dataclass(frozen=True, slots=True)
class Emphasis:
    body: Inlines


@dataclass(frozen=True, slots=True)
class Link:
    """A link that leaves the report."""

    url: str
    body: Inlines


@dataclass(frozen=True, slots=True)
class Reference:
    """A link to a numbered part; an empty body prints that part's name and number."""

    target: str
    body: Inlines = ()


@dataclass(frozen=True, slots=True)
class Mark:
    """A verdict, told by word and shape."""

    verdict: Literal["meets", "does not meet", "not assessed"]


@dataclass(frozen=True, slots=True)
class LineBreak:
    pass


Inline = Text | Code | Math | Strong | Emphasis | Link | Reference | Mark | LineBreak
Inlines = tuple[Inline, ...]


@dataclass(frozen=True, slots=True)
class Heading:
    """A section's title; level 1 is the highest. ``number`` is empty on page one."""

    level: int
    anchor: str
    number: str
    body: Inlines


@dataclass(frozen=True, slots=True)
class Paragraph:
    body: Inlines
    role: Literal["", "lead", "small"] = ""


@dataclass(frozen=True, slots=True)
class Display:
    """Formulas on a line of their own, without a number."""

    latex: str


@dataclass(frozen=True, slots=True)
class Listing:
    items: tuple[tuple[Block, ...], ...]
    start: int | None = None  # None: bullets


@dataclass(frozen=True, slots=True)
class Quote:
    body: tuple[Block, ...]


@dataclass(frozen=True, slots=True)
class CodeBlock:
    text: str


@dataclass(frozen=True, slots=True)
class Rule:
    pass


@dataclass(frozen=True, slots=True)
class Column:
    title: Inlines
    align: Align = "left"
    width: float | None = None


@dataclass(frozen=True, slots=True)
class Row:
    cells: tuple[Inlines, ...]
    anchor: str = ""


@dataclass(frozen=True, slots=True)
class Table:
    """``label`` is such as ``Table 3``; empty on page one, where headings name tables."""

    anchor: str
    label: str
    caption: Inlines
    columns: tuple[Column, ...]
    rows: tuple[Row, ...]
    note: Inlines = ()
    row_header: bool = False
    stacks: bool = False  # on a narrow screen each row stands as a list of named values


@dataclass(frozen=True, slots=True)
class Equation:
    anchor: str
    number: int
    title: Inlines
    lines: tuple[str, ...]  # LaTeX: formula, with values, result
    alt: str
    note: Inlines = ()


@dataclass(frozen=True, slots=True)
class Curve:
    name: str
    x: tuple[float, ...]
    y: tuple[float, ...]


@dataclass(frozen=True, slots=True)
class Axes:
    """One pair of axes inside a drawing; see :class:`reportgen.sheet.blocks.Axes`."""

    box: tuple[float, float, float, float]
    x_title: str
    y_title: str
    x_range: tuple[float, float]
    y_range: tuple[float, float]
    x_scale: str
    y_scale: str
    curves: tuple[Curve, ...]


@dataclass(frozen=True, slots=True)
class Figure:
    anchor: str
    number: int
    caption: Inlines
    alt: str
    svg: str
    axes: tuple[Axes, ...]


@dataclass(frozen=True, slots=True)
class Notice:
    """What a reader must not miss."""

    level: Literal["caution", "finding", "conclusion"]
    title: Inlines
    body: Inlines


Block = (
    Heading
    | Paragraph
    | Display
    | Listing
    | Quote
    | CodeBlock
    | Rule
    | Table
    | Equation
    | Figure
    | Notice
)


@dataclass(frozen=True, slots=True)
class Target:
    """Where a reference leads: the anchor in both outputs, and the words printed for it."""

    anchor: str
    label: str


@dataclass(frozen=True, slots=True)
class Field:
    """One entry of the title block."""

    name: str
    value: str


@dataclass(frozen=True, slots=True)
class Document:
    """One report, numbered and with every reference resolved; both outputs are made from it."""

    number: str
    revision: str
    title: str
    status: str
    date: str  # ISO
    machine: str
    author: str
    paper: Literal["a4", "letter"]
    fields: tuple[Field, ...]
    front: tuple[Block, ...]  # page one, below the title block
    body: tuple[Block, ...]
    closing: tuple[Block, ...]
    code: tuple[str, ...]
    targets: dict[str, Target] = field(default_factory=dict)

    @property
    def draft(self) -> bool:
        return self.status == "draft"

    def headings(self) -> Iterator[Heading]:
        """Yield the numbered sections and the closing ones, in order."""
        for block in (*self.body, *self.closing):
            if isinstance(block, Heading):
                yield block


def inlines_of(block: Block) -> Iterator[Inline]:
    """Yield every inline of a block, outer before inner."""
    match block:
        case Heading() | Paragraph():
            yield from deep(block.body)
        case Notice() | Equation():
            yield from deep(block.title)
            yield from deep(block.body if isinstance(block, Notice) else block.note)
        case Figure():
            yield from deep(block.caption)
        case Table():
            yield from deep((*block.caption, *block.note))
            for column in block.columns:
                yield from deep(column.title)
            for row in block.rows:
                for cell in row.cells:
                    yield from deep(cell)
        case Listing():
            for item in block.items:
                for inner in item:
                    yield from inlines_of(inner)
        case Quote():
            for inner in block.body:
                yield from inlines_of(inner)
        case _:
            return


def deep(body: Inlines) -> Iterator[Inline]:
    """Yield inlines and those within them."""
    for inline in body:
        yield inline
        if isinstance(inline, Strong | Emphasis | Link | Reference):
            yield from deep(inline.body)


def formulas_of(block: Block) -> Iterator[str]:
    """Yield the LaTeX of every formula in a block."""
    match block:
        case Display():
            yield block.latex
        case Equation():
            yield from block.lines
        case Listing():
            for item in block.items:
                for inner in item:
                    yield from formulas_of(inner)
            return
        case Quote():
            for inner in block.body:
                yield from formulas_of(inner)
            return
        case _:
            pass
    for inline in inlines_of(block):
        if isinstance(inline, Math):
            yield inline.latex
