"""Make the README's table of outside checks from a run of them.

``python tests/outside/table.py`` runs the tests of this folder and rewrites the table between its
two marks. One row for each test function: of the values that it compares, the one closest to its
tolerance.
"""

from __future__ import annotations

import ast
import json
import re
import subprocess
import sys
import tempfile
from pathlib import Path
from typing import Any

HERE = Path(__file__).resolve().parent
README = HERE.parents[1] / "README.md"
BEGIN, END = "<!-- outside checks -->", "<!-- end of outside checks -->"
OBTAINED = re.compile(r"^Obtained: (.+)$", re.MULTILINE)


def main() -> int:
    """Run, and rewrite the table."""
    with tempfile.TemporaryDirectory() as folder:
        file = Path(folder) / "catalogue.jsonl"
        done = subprocess.run(
            [sys.executable, "-m", "pytest", "-q", "-p", "no:cacheprovider", "-n", "0",
             str(HERE), "--catalogue", str(file)], check=False,
        )  # fmt: skip
        if done.returncode:
            return done.returncode
        notes = [json.loads(line) for line in file.read_text("utf-8").splitlines()]
    text = README.read_text("utf-8")
    start, end = text.index(BEGIN) + len(BEGIN), text.index(END)
    README.write_text(text[:start] + "\n" + "\n".join(rows(notes)) + "\n" + text[end:], "utf-8")
    return 0


def rows(notes: list[dict[str, Any]]) -> list[str]:
    """Return the lines of the table."""
    found = ["| source | what is compared | ours | theirs | difference | tolerance | obtained |",
             "| --- | --- | --- | --- | --- | --- | --- |"]  # fmt: skip
    best: dict[tuple[str, str], dict[str, Any]] = {}
    for note in notes:
        key = (note["file"], note["test"])
        share = note["gap"] / note["tolerance"] if "gap" in note else -1.0
        if key not in best or share > best[key]["share"]:
            best[key] = {**note, "share": share}
    for (file, test), note in sorted(best.items()):
        about = described(HERE / file)
        what = test.removeprefix("test_").replace("_", " ")
        values = ["judged as a whole", "", "", ""]
        if "gap" in note:
            gap = note["gap"]
            values = [f"{note['ours']:.6g}", f"{note['theirs']:.6g}",
                      f"{gap:.1e}" if gap else "0", f"{note['tolerance']:.1e}"]  # fmt: skip
        cells = [f"{about[0]} (`{file}`)", what, *values, about[1]]
        found.append("| " + " | ".join(cell.replace("|", "∣") for cell in cells) + " |")
    return found


def described(path: Path) -> tuple[str, str]:
    """Return the first sentence of a file's account, and how its values were obtained."""
    words = ast.get_docstring(ast.parse(path.read_text("utf-8"))) or ""
    first = " ".join(words.split("\n\n")[0].split()).removeprefix("Source: ")
    first = re.split(r"(?<=[.;])\s|, read\b|; from memory|, from memory", first)[0].rstrip(".;")
    obtained = OBTAINED.search(words)
    return first, obtained[1].rstrip(".") if obtained else ""


if __name__ == "__main__":
    sys.exit(main())
