"""The PDF report: Typst source, compiled to PDF/A-3a and PDF/UA-1 with its files attached."""

from __future__ import annotations

from collections.abc import Mapping
from datetime import UTC, datetime
from functools import cache
from importlib import resources
from pathlib import PurePosixPath
from typing import Any, cast

from reportgen.errors import PublishError
from reportgen.publish import nodes
from reportgen.publish.characters import listed, plain
from reportgen.publish.formulas import Formulas
from reportgen.publish.house import House
from reportgen.publish.typst_writer import TypstWriter, mapping, string

_STANDARDS = ["a-3a", "ua-1"]
_TYPES = {
    ".json": ("application/json", "data"),
    ".yaml": ("application/yaml", "source"),
    ".yml": ("application/yaml", "source"),
    ".ipynb": ("application/x-ipynb+json", "source"),
    ".csv": ("text/csv", "source"),
    ".txt": ("text/plain", "supplement"),
    ".svg": ("image/svg+xml", "supplement"),
    ".png": ("image/png", "supplement"),
}
_FEW = 30  # entries: contents this short stand on one page
_PAPERS = {"a4": "a4", "letter": "us-letter"}


def pdf(
    document: nodes.Document, formulas: Formulas, house: House, attachments: Mapping[str, bytes]
) -> bytes:
    """Return the report as PDF.

    The same document gives the same bytes; times in the file are the document's date.

    Raises
    ------
    PublishError
        If Typst refuses or warns: the report would not be what it claims.
    """
    import typst

    source, drawings = typst_source(document, formulas, house, list(attachments))
    files = {"main": source.encode(), "report.typ": _preamble(), **drawings}
    files |= {f"attached/{n}": content for n, content in enumerate(attachments.values())}
    if house.logo:
        files[f"logo.{house.logo_kind}"] = house.logo
    try:
        output, warnings = _compiler().compile_with_warnings(
            input=cast(Any, files),
            format="pdf",
            pdf_standards=cast(Any, _STANDARDS),
            timestamp=_noon(document.date),
        )
    except typst.TypstError as error:
        raise PublishError(f"the PDF cannot be made: {error.message}") from error
    if warnings:
        raise PublishError(f"the PDF cannot be made without fault: {warnings[0].message}")
    made = cast(bytes, output)
    return made if made.endswith(b"\n") else made + b"\n"


@cache
def _compiler() -> Any:
    """Return the compiler, which sees no fonts but those in its wheel."""
    import typst

    return typst.Compiler(ignore_system_fonts=True)


def _noon(date: str) -> datetime:
    try:
        return datetime.fromisoformat(f"{date}T12:00:00").replace(tzinfo=UTC)
    except ValueError as error:
        raise PublishError(f"the document's date {date!r} is not a day of the calendar") from error


def typst_source(
    document: nodes.Document, formulas: Formulas, house: House, attached: list[str]
) -> tuple[str, dict[str, bytes]]:
    """Return the report as Typst source, and the drawings it shows by file name."""
    writer = TypstWriter(document, formulas)
    front = writer.blocks(document.front)
    body = writer.blocks(document.body)
    closing = writer.blocks(document.closing)
    about = _about(document, house, writer)
    fields = ", ".join(f"({writer.text(f.name)}, {writer.text(f.value)})" for f in document.fields)
    entries = sum(heading.level <= 2 for heading in document.headings())
    lines = [
        # all names of ours stand behind rg: a bare one could hide one that formulas use
        '#import "report.typ" as rg',
        f"#let house-main = rgb({string(house.main)})",
        f"#let house-accent = rgb({string(house.accent)})",
        f"#let about = {mapping(about)}",
        "#show: rg.report.with(about)",
        "#{",
        *(_attach(n, name) for n, name in enumerate(attached)),
        f"rg.title-block(about, ({fields},))",
        front,
        f"rg.contents({str(entries < _FEW).lower()})",
        body,
        closing,
        _told(writer),
        "}",
    ]
    return "\n".join(lines), writer.drawings


@cache
def _preamble() -> bytes:
    return resources.files("reportgen.publish").joinpath("page/report.typ").read_bytes()


def _about(document: nodes.Document, house: House, writer: TypstWriter) -> dict[str, str]:
    year, month, day = (int(part) for part in document.date.split("-"))
    name = f"{document.number} revision {document.revision}"
    logo = "none"
    if house.logo:
        file = f"logo.{house.logo_kind}"
        logo = f"image({string(file)}, alt: {string(plain(house.logo_alt))}, height: 14mm)"
    return {
        "heading": string(plain(f"{name}: {document.title}")),
        "author": string(plain(document.author)),
        "description": string(plain(f"{document.machine}. Status: {document.status}.")),
        "keywords": f'({string(plain(document.number))}, "lateral vibration", "calculation")',
        "date": f"datetime(year: {year}, month: {month}, day: {day})",
        "main": "house-main",
        "paper": string(_PAPERS[document.paper]),
        "draft": str(document.draft).lower(),
        "status": writer.text(document.status),
        "running": writer.text(f"{_clipped(name)}  {_clipped(document.title)}"),
        "foot": writer.text(f"{_clipped(name)}, {document.status}, {document.date}"),
        "house": writer.text(house.name) if house.name else "none",
        "logo": logo,
        "title": writer.text(document.title),
        "machine": writer.text(document.machine),
    }


def _clipped(words: str) -> str:
    """Return what fits a line at a page's edge; page one has the words whole."""
    return words if len(words) <= 70 else f"{words[:69].rstrip()}…"


def _attach(n: int, name: str) -> str:
    mime, relation = _TYPES.get(
        PurePosixPath(name).suffix.lower(), ("application/octet-stream", "supplement")
    )
    what = {"data": "Results", "source": "Source of the calculation"}.get(relation, "Supplement")
    return (
        f"pdf.attach({string(plain(name))}, read({string(f'attached/{n}')}, encoding: none), "
        f"relationship: {string(relation)}, mime-type: {string(mime)}, "
        f"description: {string(what)})"
    )


def _told(writer: TypstWriter) -> str:
    """Return the note on characters that the fonts do not show, where there are any."""
    if not writer.code_points:
        return ""
    shown = listed(writer.code_points)
    words = (
        "Characters that the typefaces of this PDF do not hold, and characters that act "
        f"instead of showing, are printed as their Unicode code points in a frame: {shown}. "
        "The HTML report and the attached files hold the characters themselves."
    )
    return f"par({writer.text(words)})"
