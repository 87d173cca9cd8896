"""The HTML report: one file that loads nothing, framed by our jinja2 template."""

from __future__ import annotations

import base64
import hashlib
from functools import cache
from importlib import resources
from typing import TYPE_CHECKING

from reportgen.errors import PublishError
from reportgen.publish import nodes
from reportgen.publish.characters import listed, plain, rare
from reportgen.publish.formulas import Formulas
from reportgen.publish.house import House
from reportgen.publish.html_writer import HtmlWriter, data_uri, text

if TYPE_CHECKING:
    from jinja2 import Template

_MOST = 5_000_000  # bytes a report's file may have


def html(document: nodes.Document, formulas: Formulas, house: House) -> bytes:
    """Return the report as HTML.

    Raises
    ------
    PublishError
        If the file would exceed 5 MB.
    """
    writer = HtmlWriter(document, formulas)
    standing = "DRAFT – not for use" if document.draft else document.status
    style = _style(house, f"{document.number} revision {document.revision}, {standing}")
    script = _page("report.js")
    front, body = writer.blocks(document.front), writer.blocks(document.body)
    page = (
        _template()
        .render(
            doc=document,
            house=house,
            heading=plain(f"{document.number} revision {document.revision}: {document.title}"),
            author=plain(document.author),
            style=style,
            style_hash=_hash(style),
            script=script,
            script_hash=_hash(script),
            logo=data_uri(house.logo, house.logo_kind) if house.logo else "",
            house_name=text(house.name),
            number=text(document.number),
            revision=text(document.revision),
            status=text(document.status),
            title=text(document.title),
            machine=text(document.machine),
            fields=[{"name": text(f.name), "value": text(f.value)} for f in document.fields],
            contents=[
                {
                    "level": h.level,
                    "anchor": h.anchor,
                    "number": h.number,
                    "title": writer.inlines(h.body),
                }
                for h in document.headings()
                if h.level <= 2
            ],
            front=front,
            body=body,
            told=listed(rare(front + body + document.title + document.machine)),
            closing=writer.blocks(document.closing),
            code=[text(cell, lines=True) for cell in document.code],
        )
        .encode()
    )
    if len(page) > _MOST:
        raise PublishError(
            f"the HTML report would have {len(page) / 1e6:.1f} MB, more than {_MOST / 1e6:.0f}; "
            "draw figures with fewer points"
        )
    return page


def _style(house: House, running: str) -> str:
    font = resources.files("reportgen.publish").joinpath("page/math.woff2").read_bytes()
    style = _page("report.css").replace("#23395b", house.main).replace("#8a4b08", house.accent)
    style = style.replace("%RUNNING%", _css_string(running))
    return style.replace("%MATH%", f"data:font/woff2;base64,{base64.b64encode(font).decode()}")


def _css_string(words: str) -> str:
    """Return what stands between the quotes of a CSS string: all but plain letters by number."""
    return "".join(
        c if c.isascii() and (c.isalnum() or c in " .,-") else f"\\{ord(c):x} "
        for c in plain(words)
    )


def _page(name: str) -> str:
    return resources.files("reportgen.publish").joinpath("page", name).read_text("utf-8")


@cache
def _template() -> Template:
    from jinja2 import Environment, StrictUndefined

    environment = Environment(
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
    )
    return environment.from_string(_page("report.html.j2"))


def _hash(content: str) -> str:
    digest = base64.b64encode(hashlib.sha256(content.encode()).digest()).decode()
    return f"sha256-{digest}"
