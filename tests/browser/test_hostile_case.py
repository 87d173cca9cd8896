"""A case whose every text is hostile: through the whole job, into a browser and onto paper.

Whatever stands in a case is data. It is printed as text, or refused with its field named.
"""

from __future__ import annotations

import json
import re
import subprocess
import sys
import unicodedata
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import pytest
from ruamel.yaml import YAML

from reportgen.publish.characters import printable

ROOT = Path(__file__).parents[2]
KEPT = {"template", "units", "kind", "rule", "measure", "support", "orientation", "status", "date",
        "number", "revision", "value", "limit", "margin", "grade", "result", "sense", "at",
        "id", "tolerance", "reportgen", "clause_"}  # fmt: skip
TEXTS = [
    "<script>alert('x')</script><img src=x onerror=alert(1)>",
    "</style></script><!-- ]]> &lt;b&gt; &#60;i&#62;",
    '#panic(1) $x^2$ *bold* _it_ `raw` @ref <label> // no comment \\u{41} "quoted"',
    r"\input{/etc/passwd} \write18{ls} $\frac{1}{2}$ % \end{document}",
    "{{ 7*7 }} {% raw %} ${7*7} {0} %s %(name)s",
    "'single' \"double\" `back` “curly” \\ backslash",
    "[a link](javascript:alert(1)) ![x](http://example.invalid/x.png) **strong** # no heading",
    "中文 日本語 한국어 mixed with Latin",
    "עברית ועוד and العربية, 12 µm",
    "emoji 🙂🚀 flag 🇨🇭 and joined 👩‍🔧",
    "combining e\u0301 a\u0308 x\u0307, ligature ﬁ, soft\u00adhyphen, no-break\u00a0space",
    "W" + "o" * 270 + "rd",
    "'; DROP TABLE cases; -- $(rm -rf /) `ls` | cat > x & y",
    '=HYPERLINK("http://example.invalid") +1 -1 @SUM(1)',
]
REFUSED = {
    "bell \x07 inside": "U+0007",
    "escape \x1b[31m red": "U+001B",
    "override \u202e reversed": "U+202E",
    "null \x00 end": "U+0000",
}


def texts_of(case: Any, path: tuple[Any, ...] = ()) -> Iterator[tuple[Any, ...]]:
    """Yield the place of each free text of a case."""
    if isinstance(case, dict):
        for key, value in case.items():
            if isinstance(value, str) and key not in KEPT and not is_quantity(value):
                yield (*path, key)
            elif not isinstance(value, str):
                yield from texts_of(value, (*path, key))
    elif isinstance(case, list):
        for n, value in enumerate(case):
            yield from texts_of(value, (*path, n))


def is_quantity(text: str) -> bool:
    return re.match(r"[-\d.]", text) is not None


def with_texts(texts: list[str]) -> tuple[Any, list[tuple[Any, ...]]]:
    """Return the pump's case with its free texts replaced in turn, and where they stand."""
    case = YAML(typ="safe").load(ROOT / "cases" / "circulating-pump.yaml")
    places = list(texts_of(case))
    for n, place in enumerate(places):
        inner = case
        for key in place[:-1]:
            inner = inner[key]
        inner[place[-1]] = texts[n % len(texts)]
    return case, places


def run(case: Any, folder: Path, *command: str) -> subprocess.CompletedProcess[str]:
    folder.mkdir(exist_ok=True)
    place = folder / "case.yaml"
    place.write_text(
        json.dumps(case, default=str, indent=1, ensure_ascii=False), "utf-8"
    )  # JSON is YAML, whatever it holds
    return subprocess.run(
        [sys.executable, "-m", "reportgen.cli", *command, str(place)],
        capture_output=True,
        text=True,
        check=False,
        cwd=folder,
    )


@pytest.fixture(scope="session")
def hostile(made_once: Callable[..., Any], visiting: Any) -> Any:
    """Give what a run of the hostile case left, and what a visit to its page found."""

    def make(folder: Path) -> dict[str, Any]:
        case, places = with_texts(TEXTS)
        done = run(case, folder, "run", "--no-sign", "-o", str(folder / "out"))
        assert done.returncode == 0, done.stderr
        data = folder / "out" / "CAL-0417_B" / "data"
        return {
            "places": places,
            "data": str(data),
            "seen": visiting.visit(data / "report.html", folder),
        }

    return made_once("hostile-case", make)


def bare(text: str) -> str:
    """Return a text without white space."""
    return "".join(c for c in unicodedata.normalize("NFC", text) if not c.isspace())


def in_order(text: str) -> list[str]:
    """Return the parts of a text that stand on paper in the order of reading."""
    mixed = any(unicodedata.bidirectional(c) in ("R", "AL") for c in text)
    return text.replace(",", "").split() if mixed else [text]


def test_the_case_has_texts_of_every_kind_in_many_places(hostile: Any) -> None:
    assert len(hostile["places"]) >= len(TEXTS)
    told = {str(place[-1]) for place in hostile["places"]}
    assert told >= {"title", "project", "client reference", "name", "role", "tag", "service",
                    "text", "by", "source", "basis", "clause"}  # fmt: skip


def test_nothing_of_it_runs_loads_or_breaks_the_page(hostile: Any) -> None:
    seen = hostile["seen"]
    assert seen["console"] == []
    assert [url for url in seen["requests"] if not url.startswith(("data:", "file:"))] == []
    assert seen["axe"] == {"wide": [], "phone": []}
    assert set(seen["widths"].values()) == {0}
    assert seen["broken links"] == []


def test_the_page_shows_every_text_as_it_stands_in_the_case(hostile: Any) -> None:
    shown = bare(hostile["seen"]["text"])
    for text in TEXTS:
        assert bare(text) in shown, text


def test_paper_shows_every_text_or_tells_its_code_points(
    hostile: Any, pdf_faults: Callable[[bytes], list[str]]
) -> None:
    report = Path(hostile["data"]) / "report.pdf"
    assert pdf_faults(report.read_bytes()) == []
    done = subprocess.run(["pdftotext", "-raw", report, "-"], capture_output=True, check=True)
    shown = bare(done.stdout.decode()).replace("-", "")  # a break after a hyphen drops it
    for part in (part for text in TEXTS for part in in_order(text)):
        told = "".join(c if printable(c) else f"U+{ord(c):04X}" for c in bare(part))
        assert told.replace("-", "").replace("ﬁ", "fi") in shown.replace("ﬁ", "fi"), told


def test_no_word_stands_outside_the_margins(hostile: Any) -> None:
    report = Path(hostile["data"]) / "report.pdf"
    done = subprocess.run(["pdftotext", "-bbox", report, "-"], capture_output=True, check=True)
    boxes = re.findall(r'<word xMin="([\d.]+)"[^>]*xMax="([\d.]+)"', done.stdout.decode())
    assert len(boxes) > 1000
    assert min(float(left) for left, _ in boxes) > 65  # the margins are 24 and 18 mm
    assert max(float(right) for _, right in boxes) < 595 - 48


@pytest.mark.parametrize("text", REFUSED)
def test_what_acts_instead_of_showing_is_refused_with_its_place(text: str, tmp_path: Path) -> None:
    case, _ = with_texts(["plain text"])
    case["machine"]["service"] = text
    done = run(case, tmp_path, "check")
    assert done.returncode == 2
    lines = (tmp_path / "case.yaml").read_text("utf-8").splitlines()
    line = next(n for n, words in enumerate(lines, 1) if '"service"' in words)
    assert f"case.yaml:{line}:" in done.stderr
    assert REFUSED[text] in done.stderr
    assert text not in done.stderr


@pytest.mark.parametrize("place", [("machine", "service"), ("document", "title")])
def test_ten_thousand_characters_are_refused_where_a_line_belongs(
    place: tuple[str, str], tmp_path: Path
) -> None:
    case, _ = with_texts(["plain text"])
    case[place[0]][place[1]] = "x" * 10_000
    done = run(case, tmp_path, "check")
    assert done.returncode == 2
    assert place[1] in done.stderr
    assert len(done.stderr) < 2_000
