"""A template's prose, from pandoc's tree to the report's structure."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import Any

from reportgen.errors import PublishError
from reportgen.publish import nodes

Tree = dict[str, Any]
Section = Callable[[int, str, nodes.Inlines], nodes.Heading]
"""Numbers a section: level, id, title."""

_LINKS = ("https://", "http://", "mailto:")


def blocks(trees: list[Tree], section: Section) -> Iterator[nodes.Block]:
    """Yield the blocks of pandoc trees."""
    for tree in trees:
        yield from _block(tree, section)


def _block(tree: Tree, section: Section) -> Iterator[nodes.Block]:
    kind: str = tree["t"]
    content: Any = tree.get("c")
    match kind:
        case "Header":
            level, (anchor, _, _), title = content
            yield section(level, anchor, inlines(title))
        case "Para" | "Plain":
            yield from _paragraph(content)
        case "BulletList":
            yield nodes.Listing(_items(content, section))
        case "OrderedList":
            yield nodes.Listing(_items(content[1], section), start=content[0][0])
        case "BlockQuote":
            yield nodes.Quote(tuple(blocks(content, section)))
        case "CodeBlock":
            yield nodes.CodeBlock(content[1])
        case "HorizontalRule":
            yield nodes.Rule()
        case "Table":
            yield _table(content)
        case "RawBlock":
            if not content[1].lstrip().startswith("<!--"):  # a comment prints nothing
                yield nodes.Paragraph((nodes.Text(content[1]),))
        case "Div":
            yield from blocks(content[1], section)
        case _:
            raise PublishError(f"a markdown cell holds {kind}, which a report does not print")


def _items(items: list[list[Tree]], section: Section) -> tuple[tuple[nodes.Block, ...], ...]:
    return tuple(tuple(blocks(item, section)) for item in items)


def _paragraph(content: list[Tree]) -> Iterator[nodes.Block]:
    """Yield a paragraph, split where a formula stands on its own line."""
    start = 0
    for at, tree in enumerate(content):
        if tree["t"] == "Math" and tree["c"][0]["t"] == "DisplayMath":
            if before := _trimmed(content[start:at]):
                yield nodes.Paragraph(inlines(before))
            yield nodes.Display(tree["c"][1].strip())
            start = at + 1
    if rest := _trimmed(content[start:]):
        yield nodes.Paragraph(inlines(rest))


def _trimmed(content: list[Tree]) -> list[Tree]:
    blank = ("Space", "SoftBreak", "LineBreak")
    kept = list(content)
    while kept and kept[0]["t"] in blank:
        kept.pop(0)
    while kept and kept[-1]["t"] in blank:
        kept.pop()
    return kept


def _table(content: list[Any]) -> nodes.Table:
    _, (_, caption), columns, (_, head), bodies, _ = content
    align: dict[str, nodes.Align] = {"AlignRight": "right", "AlignCenter": "center"}
    titles = _cells(head[0]) if head else [()] * len(columns)
    return nodes.Table(
        anchor="",
        label="",
        caption=tuple(i for block in caption for i in inlines(block["c"])),
        columns=tuple(
            nodes.Column(title, align.get(spec[0]["t"], "left"))
            for title, spec in zip(titles, columns, strict=True)
        ),
        rows=tuple(
            nodes.Row(tuple(_cells(row))) for body in bodies for row in (*body[2], *body[3])
        ),
    )


def _cells(row: list[Any]) -> list[nodes.Inlines]:
    return [tuple(i for block in cell[4] for i in inlines(block["c"])) for cell in row[1]]


def inlines(content: list[Tree]) -> nodes.Inlines:
    """Return pandoc inlines as the report's, neighbouring texts joined."""
    joined: list[nodes.Inline] = []
    for inline in (i for tree in content for i in _inline(tree)):
        if isinstance(inline, nodes.Text) and joined and isinstance(joined[-1], nodes.Text):
            joined[-1] = nodes.Text(joined[-1].text + inline.text)
        else:
            joined.append(inline)
    return tuple(joined)


def _inline(tree: Tree) -> Iterator[nodes.Inline]:
    kind: str = tree["t"]
    content: Any = tree.get("c")
    match kind:
        case "Str":
            yield nodes.Text(str(content))
        case "Space" | "SoftBreak":
            yield nodes.Text(" ")
        case "LineBreak":
            yield nodes.LineBreak()
        case "Strong":
            yield nodes.Strong(inlines(content))
        case "Emph":
            yield nodes.Emphasis(inlines(content))
        case "Code":
            yield nodes.Code(content[1])
        case "Math":
            yield nodes.Math(content[1].strip())
        case "RawInline":
            raw = content[1]
            if not raw.startswith("<!--"):
                yield nodes.Text(raw)
        case "Link":
            yield _link(content)
        case "Span":
            yield from inlines(content[1])
        case _:
            raise PublishError(f"a markdown cell holds {kind}, which a report does not print")


def _link(content: list[Any]) -> nodes.Inline:
    _, body, (url, _) = content
    if url.startswith("#"):
        return nodes.Reference(url[1:], inlines(body))
    if not url.startswith(_LINKS):
        raise PublishError(
            f"a markdown cell links to {url!r}; a report links to its own parts (#id) "
            "or to an http, https or mailto address"
        )
    return nodes.Link(url, inlines(body) or (nodes.Text(url),))
