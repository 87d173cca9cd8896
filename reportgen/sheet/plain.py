"""How blocks look in a live notebook: enough to read while working, not the report."""

from __future__ import annotations

from html import escape

from reportgen.sheet.blocks import Block, Inline
from reportgen.sheet.lines import plain


def as_html(block: Block) -> str:
    """Return a block as HTML for the notebook; empty where another form serves better."""
    match block["kind"]:
        case "table":
            head = "".join(f"<th>{_inline(c['title'])}</th>" for c in block["columns"])
            body = "".join(
                "<tr>" + "".join(f"<td>{_inline(cell)}</td>" for cell in row) + "</tr>"
                for row in block["rows"]
            )
            return (
                f"<table><caption>{_inline(block['caption'])}</caption>"
                f"<thead><tr>{head}</tr></thead><tbody>{body}</tbody></table>"
            )
        case "equation":
            parts = [block["formula"], block.get("substituted"), block.get("result")]
            lines = "".join(f"$$ {part} $$" for part in parts if part)
            return f"<p>{_inline(block['title'])}</p>{lines}"
        case "list":
            return "<ul>" + "".join(f"<li>{_inline(i)}</li>" for i in block["items"]) + "</ul>"
        case "paragraph":
            return f"<p>{_inline(block['text'])}</p>"
        case "notice":
            return f"<p><strong>{_inline(block['title'])}.</strong> {_inline(block['text'])}</p>"
        case _:
            return ""


def as_text(block: Block) -> str:
    """Return a block as plain text."""
    match block["kind"]:
        case "table":
            rows = [" | ".join(plain(cell) for cell in row) for row in block["rows"]]
            return "\n".join([plain(block["caption"]), *rows])
        case "equation":
            return block.get("alt", plain(block["title"]))
        case "list":
            return "\n".join(f"- {plain(item)}" for item in block["items"])
        case "paragraph":
            return plain(block["text"])
        case "notice":
            return f"{plain(block['title'])}: {plain(block['text'])}"
        case "figure":
            return block["alt"]


def _inline(inline: Inline) -> str:
    if isinstance(inline, list):
        return "".join(_inline(part) for part in inline)
    if isinstance(inline, dict) and "text" in inline:
        return _inline(inline["text"])
    if isinstance(inline, dict):
        key, value = next(iter(inline.items()))
        if key == "math":
            return f"${escape(value)}$"
        return f"<strong>{_inline(value)}</strong>" if key == "strong" else f"[{escape(value)}]"
    return escape(str(inline))
