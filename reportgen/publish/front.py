"""Page one and the closing page: what document control and a reviewer look for first."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from typing import Any

from reportgen.publish import nodes
from reportgen.publish.blocks import inlines
from reportgen.publish.house import House
from reportgen.publish.numbering import Numbering
from reportgen.sheet.blocks import Criterion, Result, Results

_HOLD_KINDS = {
    "preliminary": "preliminary value",
    "assumption": "assumption to be confirmed",
    "source": "source missing",
    "check": "check",
    "data": "data",
}
_ORIGINS = {
    "ours": ", shipped with reportgen and unmodified",
    "local": ", a local one that is not shipped with reportgen",
}
_ROLES = (("prepared", "Prepared"), ("checked", "Checked"), ("approved", "Approved"))
_NOBODY = "nobody named"
_STANDS = (
    "This document stands only with the signatures of the persons named above. Once given, "
    "each lies in its folder of the package that holds this file; HOW-TO-CHECK.txt there tells "
    "how to check it, and reportgen verify does it."
)
_DRAFT = (
    "A draft: not for use. It cannot be signed; nobody has taken responsibility for its content."
)


def text(words: str) -> nodes.Inlines:
    """Return words as one text."""
    return (nodes.Text(words),) if words else ()


def title_block(results: Results, house: House) -> Iterator[nodes.Field]:
    """Yield the entries of the title block that have a value."""
    about = results["document"]
    values = {
        "number": about["number"],
        "revision": about["revision"],
        "status": about["status"],
        "date": about["date"],
        "project": about.get("project"),
        "client_reference": about.get("client_reference"),
        **{key: (about.get(key) or {}).get("name", _NOBODY) for key, _ in _ROLES},
    }
    for key, value in values.items():
        if value:
            yield nodes.Field(house.field_name(key), str(value))


def page_one(results: Results) -> Iterator[nodes.Block]:
    """Yield page one below the title block."""
    if asked := inlines(results["asked"]):
        yield _heading("asked", "What was asked")
        yield nodes.Paragraph(asked)
    yield nodes.Notice("conclusion", text("Conclusion"), inlines(results["conclusion"]))
    yield from _verdicts(results["criteria"])
    yield from _holds(results)
    yield from _sign_off(results["document"])
    yield from _history(results["document"].get("history") or [])
    yield from _headline(results["results"])


def _heading(name: str, title: str) -> nodes.Heading:
    return nodes.Heading(1, f"page-one-{name}", "", text(title))


def _plain_table(
    name: str, columns: Iterable[nodes.Column], rows: Iterable[nodes.Row], note: str = ""
) -> nodes.Table:
    return nodes.Table(f"{name}-table", "", (), tuple(columns), tuple(rows), text(note), True, True)


def _linked(shown: str, where: str) -> nodes.Inlines:
    return (nodes.Reference(where, text(shown)),) if where and shown else text(shown)


def _verdicts(criteria: list[Criterion]) -> Iterator[nodes.Block]:
    yield _heading("verdicts", "Verdicts")
    if not criteria:
        yield nodes.Paragraph(text("The case states no criterion; nothing is judged."))
        return
    rows = []
    for n, c in enumerate(criteria, 1):
        clause = ", ".join(part for part in (c["source"], c["clause"]) if part)
        limit = f"{c['sense']} {c['limit_shown']}" if c["limit"] is not None else c["limit_shown"]
        title = f"{c['title']}: {c['reason']}" if _open(c) else c["title"]
        rows.append(
            nodes.Row(
                (
                    text(f"C{n}\u2002{title}"),
                    _linked(c["value_shown"], c["where"]),
                    text(limit),
                    text(c["margin_shown"]),
                    text(clause),
                    (nodes.Mark(c["verdict"]),),
                ),
                anchor=f"criterion-{n}",
            )
        )
    yield _plain_table(
        "verdicts",
        (
            nodes.Column(text("Criterion")),
            nodes.Column(text("Value"), "right"),
            nodes.Column(text("Limit"), "right"),
            nodes.Column(text("Margin"), "right"),
            nodes.Column(text("Clause")),
            nodes.Column(text("Verdict")),
        ),
        rows,
        "Margin: the share of the limit that is left. Each value leads to where it is computed.",
    )


def _open(criterion: Criterion) -> bool:
    return criterion["verdict"] == "not assessed" and bool(criterion["reason"])


def _headline(results: list[Result]) -> Iterator[nodes.Block]:
    if not results:
        return
    yield _heading("results", "Headline results")
    rows = []
    for n, r in enumerate(results, 1):
        second = r.get("second")
        agrees = "none"
        if second:
            agrees = "agrees" if second["agrees"] else "disagrees"
        rows.append(
            nodes.Row(
                (
                    text(f"R{n}\u2002{r['title']}"),
                    (nodes.Math(r["symbol"]),) if r["symbol"] else (),
                    _linked(r["shown"], r["where"]),
                    (nodes.Reference(r["where"]),) if r["where"] else (),
                    text(agrees),
                ),
                anchor=f"result-{n}",
            )
        )
    yield _plain_table(
        "results",
        (
            nodes.Column(text("Result")),
            nodes.Column(text("Symbol")),
            nodes.Column(text("Value"), "right"),
            nodes.Column(text("Computed in")),
            nodes.Column(text("Second computation")),
        ),
        rows,
    )


def _holds(results: Results) -> Iterator[nodes.Block]:
    yield _heading("holds", "Open holds")
    if not results["holds"]:
        yield nodes.Paragraph(text("None."))
        return
    yield _plain_table(
        "holds",
        (
            nodes.Column(text("Hold")),
            nodes.Column(text("Kind")),
            nodes.Column(text("What is open")),
        ),
        (
            nodes.Row((text(h["id"]), text(_HOLD_KINDS.get(h["kind"], h["kind"])), text(h["text"])))
            for h in results["holds"]
        ),
    )


def _history(history: list[dict[str, Any]]) -> Iterator[nodes.Block]:
    if not history:
        return
    yield _heading("history", "Revision history")
    yield _plain_table(
        "history",
        (
            nodes.Column(text("Revision")),
            nodes.Column(text("Date")),
            nodes.Column(text("What changed")),
            nodes.Column(text("By")),
        ),
        (
            nodes.Row(
                tuple(text(str(entry.get(key) or "")) for key in ("revision", "date", "text", "by"))
            )
            for entry in history
        ),
    )


def _sign_off(about: dict[str, Any]) -> Iterator[nodes.Block]:
    yield _heading("sign-off", "Sign-off")
    rows = []
    for key, name in _ROLES:
        person = about.get(key) or {}
        rows.append(
            nodes.Row(
                (
                    text(name),
                    text(str(person.get("name") or _NOBODY)),
                    text(str(person.get("role") or "")),
                    text(_signature(key, about, bool(person))),
                )
            )
        )
    yield _plain_table(
        "sign-off",
        (
            nodes.Column(text("Step")),
            nodes.Column(text("Name")),
            nodes.Column(text("Role")),
            nodes.Column(text("Signature")),
        ),
        rows,
        _DRAFT if about["status"] == "draft" else _STANDS,
    )


def _signature(step: str, about: dict[str, Any], named: bool) -> str:
    if about["status"] == "draft":
        return "none: a draft"
    return f"once given: signatures/{step}/" if named else "none"


def closing(
    results: Results, house: House, attached: Iterable[str], numbering: Numbering
) -> Iterator[nodes.Block]:
    """Yield the last section: what this document is made of, and the house's closing text."""
    template = results["template"]
    yield numbering.section(1, "", text("About this document"))
    made = (
        f"Made from the template {template.get('name') or 'without a name'}"
        + _ORIGINS.get(template.get("origin", ""), "")
        + (f" (digest {template['digest']})" if template.get("digest") else "")
        + ". The HTML and the PDF come from one calculation and hold the same numbers, "
        "tables, figures and equations under the same numbers."
    )
    yield nodes.Paragraph(text(made))
    names = ", ".join(attached)
    if names:
        yield nodes.Paragraph(text(f"Attached to the PDF: {names}."))
    for paragraph in house.closing:
        yield nodes.Paragraph(text(paragraph))
