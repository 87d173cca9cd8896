"""The register as one static HTML page and as CSV; both the same at any time and place."""

from __future__ import annotations

import base64
import csv
import hashlib
import io
import os
from collections.abc import Iterable, Sequence
from html import escape
from importlib import resources
from pathlib import Path
from urllib.parse import quote

from reportgen.archive.register import Entry, counts
from reportgen.package.disk import write_file
from reportgen.publish.characters import plain

_COLUMNS = (
    "Number",
    "Revision",
    "Title and machine",
    "Date",
    "Status",
    "Verdict",
    "Holds",
    "Sign-offs",
    "Package",
)
_CSV = (
    "number", "revision", "title", "machine", "date", "status", "verdict", "criteria not met",
    "open holds", "prepared", "prepared at", "checked", "checked at", "approved", "approved at",
    "superseded by", "fault", "verification", "template", "place",
)  # fmt: skip
_LISTED = (
    "Signatures are listed as their statements have them; they are not verified. "
    "Check a package with reportgen verify, or as its HOW-TO-CHECK.txt says."
)
_VERIFIED = (
    "Each package was verified when this register was made; who a self-issued signature is by "
    "rests on comparing its fingerprint."
)


def write_register(
    archive: Path, entries: Sequence[Entry], page: Path, table: Path, *, verified: bool = False
) -> None:
    """Write the page and the CSV, each whole or not at all.

    Parameters
    ----------
    archive
        Folder that the entries are of.
    entries
        As :func:`reportgen.archive.register.read_register` gives them.
    page, table
        Files to write; links lead from the page's folder to the packages.
    verified
        Whether each package was verified.

    Raises
    ------
    PackageError
        If a file cannot be written.
    """
    above = Path(os.path.relpath(archive.resolve(), page.resolve().parent)).as_posix()
    prefix = "" if above == "." else f"{above}/"
    write_file(page, register_html(entries, prefix, verified=verified))
    write_file(table, register_csv(entries))


def register_html(entries: Sequence[Entry], prefix: str = "", *, verified: bool = False) -> bytes:
    """Return the page; ``prefix`` leads from its folder to the archive."""
    style, script = _page("register.css"), _page("register.js")
    found = counts(entries)
    rows = "\n".join(_row(entry, prefix) for entry in entries)
    heads = "".join(f'<th scope="col">{name}</th>' for name in _COLUMNS)
    policy = (
        f"default-src 'none'; style-src '{_hash(style)}'; script-src '{_hash(script)}'; "
        "base-uri 'none'; form-action 'none'"
    )
    return f"""<!DOCTYPE html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta name="viewport" content="width=device-width, initial-scale=1">
<meta http-equiv="Content-Security-Policy" content="{policy}">
<title>Calculation register</title>
<style>{style}</style>
</head>
<body>
<main>
<h1>Calculation register</h1>
<p>{found["packages"]} packages, {found["latest"]} of them the latest of their number; of these
{found["do not meet"]} do not meet a criterion and {found["with holds"]} have open holds.
{found["damaged"]} packages of all are damaged or incomplete.</p>
<p class="small">{_VERIFIED if verified else _LISTED} A verdict speaks of the limits that the
calculation states, and of nothing else.</p>
<div class="tools" hidden>
<div><label for="words">Words to look for</label><input type="search" id="words"></div>
<div><label for="verdict">Verdict</label><select id="verdict"><option value="">all</option>
<option>meets</option><option>does not meet</option><option>not assessed</option>
<option>no criterion</option><option value="unread">unreadable</option></select></div>
<div><input type="checkbox" id="latest"> <label for="latest">latest revisions only</label></div>
<p id="count" role="status" aria-live="polite"></p>
</div>
<div class="scroll" tabindex="0" role="region" aria-label="Packages">
<table>
<caption>Packages, by number; the latest revision of each number first</caption>
<thead><tr>{heads}</tr></thead>
<tbody>
{rows}
</tbody>
</table>
</div>
</main>
<script>{script}</script>
</body>
</html>
""".encode()


def _row(entry: Entry, prefix: str) -> str:
    latest = "yes" if entry.number and not entry.superseded_by else "no"
    verdict = entry.verdict or "unread"
    cells = [
        f'<th scope="row">{_t(entry.number) or "not readable"}</th>',
        f"<td>{_t(entry.revision)}{_after(entry)}</td>",
        f'<td class="title">{_t(entry.title)}<br><span class="small">{_t(entry.machine)}</span>'
        "</td>",
        f"<td>{_t(entry.date)}</td>",
        f"<td>{_t(entry.status)}</td>",
        f"<td>{_verdict(entry)}</td>",
        f"<td>{entry.holds if entry.verdict else '–'}</td>",
        f'<td class="signed">{_signed(entry)}</td>',
        f"<td>{_package(entry, prefix)}</td>",
    ]
    old = ' class="old"' if entry.superseded_by else ""
    return f'<tr{old} data-verdict="{verdict}" data-latest="{latest}">{"".join(cells)}</tr>'


def _t(text: str) -> str:
    return escape(plain(text))


def _after(entry: Entry) -> str:
    if not entry.superseded_by:
        return ""
    return f'<br><span class="small">superseded by {_t(entry.superseded_by)}</span>'


def _verdict(entry: Entry) -> str:
    if not entry.verdict:
        return "–"
    sort = {"meets": "", "does not meet": " fails"}.get(entry.verdict, " open")
    which = "".join(f'<br><span class="small">{_t(title)}</span>' for title in entry.not_met)
    return f'<span class="verdict{sort}">{entry.verdict}</span>{which}'


def _signed(entry: Entry) -> str:
    if not entry.sign_offs:
        return "none"
    return "<br>".join(
        f'{s.role}: {_t(s.name)} <span class="small">{s.time[:10]} {s.time[11:16]} UTC</span>'
        for s in entry.sign_offs
    )


def _package(entry: Entry, prefix: str) -> str:
    name = _t(entry.place)
    target = entry.place if entry.is_zip else f"{entry.place}/data/report.html"
    # a path that begins with a name and a colon would be read as another scheme
    href = quote(f"./{prefix}{target}".encode(errors="surrogateescape"))
    link = f'<a href="{escape(href)}">{name}</a>'
    if not entry.verdict and not entry.is_zip:
        link = name
    parts = [link]
    if entry.fault:
        parts.append(f'<span class="fault">{_t(entry.fault)}</span>')
    if entry.verified:
        parts.append(f'<span class="small">{_t(entry.verified)}</span>')
    return "<br>".join(parts)


def register_csv(entries: Iterable[Entry]) -> bytes:
    """Return the CSV: UTF-8 with a mark, commas, one line a package."""
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\r\n")
    writer.writerow(_CSV)
    for entry in entries:
        signed = {s.role: (s.name, s.time) for s in entry.sign_offs}
        people = [t for role in ("prepared", "checked", "approved")
                  for t in signed.get(role, ("", ""))]  # fmt: skip
        row = [
            entry.number, entry.revision, entry.title, entry.machine, entry.date, entry.status,
            entry.verdict, "; ".join(entry.not_met), str(entry.holds) if entry.verdict else "",
            *people, entry.superseded_by, entry.fault, entry.verified, entry.template,
            entry.place,
        ]  # fmt: skip
        writer.writerow([_cell(text) for text in row])
    return b"\xef\xbb\xbf" + out.getvalue().encode()


def _cell(text: str) -> str:
    """Return a text that no spreadsheet takes for a formula."""
    shown = plain(text)
    return f"'{shown}" if shown[:1] in ("=", "+", "-", "@") else shown


def _page(name: str) -> str:
    return resources.files("reportgen.archive").joinpath("page", name).read_text("utf-8")


def _hash(content: str) -> str:
    return f"sha256-{base64.b64encode(hashlib.sha256(content.encode()).digest()).decode()}"
