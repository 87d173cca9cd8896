"""The blocks a template shows: the one structure that every printed form is made from.

A template's code cells emit blocks as notebook outputs under the MIME type
:data:`BLOCK_MIME`; the last cell emits the results under :data:`RESULTS_MIME`.
Publishing reads nothing else from code cells. A block is plain JSON.

Text inside a block is *inline*: a plain string (always printed as text, never read
as markup), ``{"math": latex}``, ``{"ref": id}`` (a numbered reference to the block,
result or criterion with that id; with ``"text": inline`` beside it, that text as the link),
``{"strong": inline}``, or a list of these.
"""

from __future__ import annotations

from typing import Any, Literal, NotRequired, TypedDict

BLOCK_MIME = "application/vnd.reportgen.block+json"
RESULTS_MIME = "application/vnd.reportgen.results+json"

Inline = Any
"""A string, a mapping with one of the keys math, ref, strong, or a list of inlines."""

Verdict = Literal["meets", "does not meet", "not assessed"]


class Column(TypedDict):
    """A table's column."""

    title: Inline
    align: NotRequired[Literal["left", "right", "center"]]  # left unless stated
    width: NotRequired[float]  # share of the table's width; even by content where absent


class Table(TypedDict):
    """A numbered table; ``id`` is what references point at."""

    kind: Literal["table"]
    id: str
    caption: Inline
    columns: list[Column]
    rows: list[list[Inline]]
    note: NotRequired[Inline]
    row_header: NotRequired[bool]  # the first column names the row


class Equation(TypedDict):
    """A formula, the same with values, and its result; numbered once.

    ``formula``, ``substituted`` and ``result`` are LaTeX without delimiters; the last two
    may be absent for a formula that only states a method.
    """

    kind: Literal["equation"]
    id: str
    title: Inline
    formula: str
    substituted: NotRequired[str]
    result: NotRequired[str]
    alt: NotRequired[str]  # the equation in words, for a reader who cannot see it
    note: NotRequired[Inline]


class Curve(TypedDict):
    """The numbers behind one drawn curve, in the reader's units."""

    name: str
    x: list[float]
    y: list[float]


class Axes(TypedDict):
    """Where one pair of axes lies in the drawing and what it holds, for reading values.

    ``box`` is left, top, width, height as shares (0 to 1) of the drawing, top down.
    """

    box: tuple[float, float, float, float]
    x_title: str
    y_title: str
    x_range: tuple[float, float]
    y_range: tuple[float, float]
    x_scale: Literal["linear", "log"]
    y_scale: Literal["linear", "log"]
    curves: list[Curve]


class Figure(TypedDict):
    """A numbered figure. ``svg`` is the drawing; ``alt`` tells the finding in words."""

    kind: Literal["figure"]
    id: str
    caption: Inline
    alt: str
    svg: str
    axes: list[Axes]


class Paragraph(TypedDict):
    """A paragraph whose text is made by the calculation."""

    kind: Literal["paragraph"]
    text: Inline


class Listing(TypedDict):
    """A bulleted list of paragraphs."""

    kind: Literal["list"]
    items: list[Inline]


class Notice(TypedDict):
    """A caution, or a finding that a reader must not miss."""

    kind: Literal["notice"]
    level: Literal["caution", "finding"]
    title: Inline
    text: Inline


Block = Table | Equation | Figure | Paragraph | Listing | Notice


class Second(TypedDict):
    """A second, independent computation of a result."""

    method: str
    value: float
    difference: float  # relative, unless the result is zero
    tolerance: float
    agrees: bool


class Result(TypedDict):
    """One headline result; ``value`` in SI."""

    id: str
    title: str
    symbol: str  # LaTeX
    value: float | None
    unit: str  # SI
    quantity: str  # key of the reader's-unit table in reportgen.units
    shown: str  # value and unit as printed, reader's units
    measure: str  # 0-peak | peak-to-peak | r.m.s. | none
    method: str
    where: str  # id of the block where it is computed
    second: NotRequired[Second]


class Criterion(TypedDict):
    """One limit and how the calculation stands to it; values in SI."""

    id: str
    title: str
    source: str
    clause: str
    value: float | None
    limit: float | None
    sense: Literal["at most", "at least"]
    unit: str
    margin: float | None  # share of the limit left; negative when it is not met
    value_shown: str
    limit_shown: str
    margin_shown: str
    verdict: Verdict
    reason: str
    where: str


class Hold(TypedDict):
    """Something open that a reviewer must see on page one."""

    id: str
    text: str
    kind: Literal["preliminary", "assumption", "source", "check", "data"]


class Results(TypedDict):
    """Everything that page one and ``results.json`` are made from (format 1)."""

    format: Literal[1]
    document: dict[str, Any]  # number, title, revision, status, date, history, people …
    template: dict[str, str]  # name, digest, origin (ours | local)
    units: Literal["si", "us"]
    conclusion: Inline
    asked: Inline  # what the calculation was asked to find
    machine: str
    results: list[Result]
    criteria: list[Criterion]
    holds: list[Hold]
    cautions: list[str]
    not_assessed: list[str]
    series: dict[str, Any]
