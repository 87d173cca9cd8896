"""The outline and text of the sample report, in both forms, as plain files to compare with.

Run as a program it writes ``tests/publish/snapshot/`` anew: do so when a change of the text is
meant, and read the difference before it goes in.
"""

from __future__ import annotations

import importlib.util
import subprocess
import tempfile
from html.parser import HTMLParser
from pathlib import Path
from typing import Any

import pikepdf

PLACE = Path(__file__).with_name("snapshot")
_BREAKS = {"p", "h1", "h2", "h3", "h4", "tr", "li", "dt", "figcaption", "caption", "summary",
           "pre", "div", "section"}  # fmt: skip


class _Text(HTMLParser):
    """Gathers a page's text, a line for each block; formulas by their words."""

    def __init__(self) -> None:
        super().__init__()
        self.lines, self.outline, self._skip, self._heading = [""], [], 0, ""

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        held = dict(attrs)
        if tag in ("script", "style", "svg", "math"):
            self._skip += 1
            said = held.get("alttext") or held.get("aria-label")
            if said and self._skip == 1:
                self.lines[-1] += f" [{said}] "
        elif tag in _BREAKS:
            self.lines.append("")
        elif tag in ("td", "th"):
            self.lines[-1] += " | "
        if tag in ("h1", "h2", "h3", "h4"):
            self._heading = tag

    def handle_endtag(self, tag: str) -> None:
        if tag in ("script", "style", "svg", "math"):
            self._skip -= 1
        elif tag == self._heading:
            level = int(tag[1]) - 1
            self.outline.append("  " * level + " ".join(self.lines[-1].split()))
            self._heading = ""

    def handle_data(self, data: str) -> None:
        if not self._skip:
            self.lines[-1] += data


def texts(html: bytes, pdf: bytes) -> dict[str, str]:
    """Return what is compared, by file name."""
    page = _Text()
    page.feed(html.decode())
    lines = [" ".join(line.split()).strip("| ") for line in page.lines]
    with tempfile.TemporaryDirectory() as folder:
        place = Path(folder) / "report.pdf"
        place.write_bytes(pdf)
        done = subprocess.run(["pdftotext", "-raw", place, "-"], capture_output=True, check=True)
        with pikepdf.open(place) as opened, opened.open_outline() as outline:
            items = _items(outline.root)
    paper = done.stdout.decode().replace("\f", "\n=== next page ===\n")
    return {
        "html-outline.txt": "\n".join(page.outline) + "\n",
        "html-text.txt": "\n".join(line for line in lines if line) + "\n",
        "pdf-outline.txt": "\n".join(items) + "\n",
        "pdf-text.txt": "\n".join(" ".join(line.split()) for line in paper.splitlines()) + "\n",
    }


def _items(items: Any, level: int = 0) -> list[str]:
    found = []
    for item in items:
        found.append("  " * level + item.title)
        found.extend(_items(item.children, level + 1))
    return found


if __name__ == "__main__":
    from reportgen.publish import publish

    spec = importlib.util.spec_from_file_location("sample", Path(__file__).with_name("sample.py"))
    assert spec
    assert spec.loader
    sample = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(sample)
    report = publish(sample.full())
    PLACE.mkdir(exist_ok=True)
    for name, text in texts(report.html, report.pdf).items():
        (PLACE / name).write_text(text, encoding="utf-8")
