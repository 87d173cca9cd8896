"""A template's blocks as the report's structure."""

from __future__ import annotations

import math
from typing import Any, Literal, cast

from reportgen.errors import PublishError
from reportgen.publish import nodes
from reportgen.publish.numbering import Numbering


def converted(block: dict[str, Any], numbering: Numbering) -> nodes.Block:
    """Return a block with its number.

    Raises
    ------
    PublishError
        If the block is of a kind that is not known, or lacks what its kind needs.
    """
    try:
        return _converted(block, numbering)
    except (KeyError, TypeError, ValueError) as error:
        name = block.get("id") or block.get("kind")
        raise PublishError(f"the block {name!r} is not complete: {error!r}") from error


def _converted(block: dict[str, Any], numbering: Numbering) -> nodes.Block:
    match block["kind"]:
        case "paragraph":
            return nodes.Paragraph(inlines(block["text"]))
        case "list":
            items = tuple((nodes.Paragraph(inlines(item)),) for item in block["items"])
            return nodes.Listing(items)
        case "notice":
            level = cast("Literal['caution', 'finding']", block["level"])
            return nodes.Notice(level, inlines(block["title"]), inlines(block["text"]))
        case "table":
            return _table(block, *numbering.block("table", block["id"]))
        case "equation":
            return _equation(block, *numbering.block("equation", block["id"]))
        case "figure":
            return _figure(block, *numbering.block("figure", block["id"]))
        case kind:
            raise PublishError(f"a block is of the kind {kind!r}, which a report does not print")


def inlines(value: Any) -> nodes.Inlines:
    """Return a block's text; see :mod:`reportgen.sheet.blocks` for its forms."""
    if isinstance(value, str):
        return (nodes.Text(value),) if value else ()
    if isinstance(value, list | tuple):
        return tuple(inline for part in value for inline in inlines(part))
    if isinstance(value, dict) and set(value) == {"ref", "text"}:
        return (nodes.Reference(str(value["ref"]), inlines(value["text"])),)
    if isinstance(value, dict) and len(value) == 1:
        key, content = next(iter(value.items()))
        match key:
            case "math":
                return (nodes.Math(str(content).strip()),)
            case "ref":
                return (nodes.Reference(str(content)),)
            case "strong":
                return (nodes.Strong(inlines(content)),)
    raise PublishError(f"{value!r} is not text: a string, math, ref, strong or a list would do")


def _table(block: dict[str, Any], anchor: str, number: int) -> nodes.Table:
    columns = tuple(
        nodes.Column(inlines(c["title"]), c.get("align", "left"), c.get("width"))
        for c in block["columns"]
    )
    rows = tuple(nodes.Row(tuple(inlines(cell) for cell in row)) for row in block["rows"])
    for n, row in enumerate(rows, 1):
        if len(row.cells) != len(columns):
            raise PublishError(
                f"table {block['id']!r}, row {n}: {len(row.cells)} cells under "
                f"{len(columns)} columns"
            )
    return nodes.Table(
        anchor=anchor,
        label=f"Table {number}",
        caption=inlines(block["caption"]),
        columns=columns,
        rows=rows,
        note=inlines(block.get("note", "")),
        row_header=bool(block.get("row_header")),
    )


def _equation(block: dict[str, Any], anchor: str, number: int) -> nodes.Equation:
    lines = [block["formula"]]
    if substituted := block.get("substituted"):
        lines.append(substituted if _relates(substituted) else f"= {substituted}")
    if result := block.get("result"):
        lines.append(result)
    return nodes.Equation(
        anchor=anchor,
        number=number,
        title=inlines(block["title"]),
        lines=tuple(lines),
        alt=str(block.get("alt", "")),
        note=inlines(block.get("note", "")),
    )


def _relates(latex: str) -> bool:
    """Tell whether a formula has an equals sign of its own, outside any group."""
    depth = 0
    for character in latex:
        depth += (character == "{") - (character == "}")
        if character == "=" and depth == 0:
            return True
    return False


def _figure(block: dict[str, Any], anchor: str, number: int) -> nodes.Figure:
    if not str(block["alt"]).strip():
        raise PublishError(f"figure {block['id']!r} has no alt text; tell its finding in words")
    return nodes.Figure(
        anchor=anchor,
        number=number,
        caption=inlines(block["caption"]),
        alt=str(block["alt"]),
        svg=block["svg"],
        axes=tuple(_axes(axes) for axes in block.get("axes", ())),
    )


def _axes(axes: dict[str, Any]) -> nodes.Axes:
    left, top, width, height = (float(v) for v in axes["box"])
    return nodes.Axes(
        box=(left, top, width, height),
        x_title=str(axes["x_title"]),
        y_title=str(axes["y_title"]),
        x_range=_range(axes["x_range"]),
        y_range=_range(axes["y_range"]),
        x_scale=str(axes["x_scale"]),
        y_scale=str(axes["y_scale"]),
        curves=tuple(_curve(curve) for curve in axes["curves"]),
    )


def _range(ends: list[float]) -> tuple[float, float]:
    first, last = (float(v) for v in ends)
    return first, last


def _curve(curve: dict[str, Any]) -> nodes.Curve:
    x, y = (tuple(float(v) for v in curve[key]) for key in ("x", "y"))
    if len(x) != len(y) or not all(map(math.isfinite, x + y)):
        raise PublishError(
            f"curve {curve['name']!r} has {len(x)} abscissae and {len(y)} ordinates, "
            "or one that is not a finite number"
        )
    return nodes.Curve(str(curve["name"]), x, y)
