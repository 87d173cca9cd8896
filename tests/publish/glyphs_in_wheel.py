"""Reads the fonts inside the typst wheel, and writes what they show.

Run as a program it writes ``reportgen/publish/page/glyphs.txt`` anew: do so when the pinned
version of typst changes.
"""

from __future__ import annotations

import io
import re
import struct
import unicodedata
from pathlib import Path

import typst
from fontTools.ttLib import TTFont, TTLibError

HIDDEN = {"Mn", "Me", "Mc", "Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp"}
STYLES = ("", 'weight: "bold",', 'style: "italic",', 'font: "DejaVu Sans Mono",')


def covered() -> set[int]:
    """Return every code point that one of the wheel's fonts has a glyph for."""
    library = next(Path(typst.__file__).parent.glob("_typst*"))
    data = library.read_bytes()
    found: set[int] = set()
    for match in re.finditer(rb"OTTO|\x00\x01\x00\x00", data):
        start = match.start()
        tables = struct.unpack(">H", data[start + 4 : start + 6])[0]
        if not 8 <= tables <= 40:
            continue
        entries = [
            struct.unpack(">4sIII", data[start + 12 + 16 * n : start + 28 + 16 * n])
            for n in range(tables)
        ]
        end = max(offset + length for _, _, offset, length in entries)
        if end > 20_000_000 or b"cmap" not in {tag for tag, *_ in entries}:
            continue
        try:
            font = TTFont(io.BytesIO(data[start : start + end]), lazy=True)
            found |= set(font.getBestCmap())
        except (TTLibError, KeyError, TypeError):
            continue
    return found


def shown(points: list[int], style: str) -> list[int]:
    """Return the code points that Typst sets in a style, by halving until it does."""
    texts = ", ".join(f'"\\u{{{point:x}}}"' for point in points)
    source = (
        '#set document(title: "x")\n#set text(font: ("Libertinus Serif", "New Computer Modern", '
        f'"DejaVu Sans Mono"))\n#for c in ({texts},) [#text({style} c) ]'
    )
    try:
        typst.compile(
            source.encode(), format="pdf", ignore_system_fonts=True, pdf_standards=["a-3a", "ua-1"]
        )
    except typst.TypstError:
        if len(points) == 1:
            return []
        half = len(points) // 2
        return shown(points[:half], style) + shown(points[half:], style)
    return points


def glyphs() -> list[int]:
    """Return the code points that stand in every style."""
    points = sorted(p for p in covered() if unicodedata.category(chr(p)) not in HIDDEN)
    for style in STYLES:
        points = shown(points, style)
    return points


if __name__ == "__main__":
    lines = [
        f"# Code points that every text style of the fonts inside typst {typst.__version__} shows;",
        "# combining marks left out. tests/publish/glyphs_in_wheel.py writes this file.",
    ]
    ranges: list[list[int]] = []
    for point in glyphs():
        if ranges and ranges[-1][1] == point - 1:
            ranges[-1][1] = point
        else:
            ranges.append([point, point])
    lines += [f"{a:X}-{b:X}" if a != b else f"{a:X}" for a, b in ranges]
    place = Path(__file__).parents[2] / "reportgen/publish/page/glyphs.txt"
    place.write_text("\n".join(lines) + "\n", encoding="ascii")
