"""The two runs of pandoc that a report takes: prose to a tree, formulas to MathML."""

from __future__ import annotations

import json
import re
import shutil
import subprocess
from functools import cache
from pathlib import Path
from typing import Any
from xml.etree import ElementTree

from reportgen.errors import PublishError

PROSE = "commonmark+tex_math_dollars+pipe_tables+attributes+gfm_auto_identifiers"
"""What templates are written in: the prose that Jupyter shows, with math and tables."""

_BARS = ("|", "\u2016")
_MATHML = "{http://www.w3.org/1998/Math/MathML}"


@cache
def executable() -> str:
    """Return pandoc's path: the one inside the ``pypandoc-binary`` wheel, else the PATH's.

    pypandoc's own search starts pandoc several times to compare versions, which costs
    more than the whole conversion.
    """
    import pypandoc  # type: ignore[import-untyped]

    for name in ("pandoc", "pandoc.exe"):
        inside = Path(pypandoc.__file__).parent / "files" / name
        if inside.is_file():
            return str(inside)
    found = shutil.which("pandoc")
    if not found:
        raise PublishError("pandoc was not found; reinstall the package pypandoc-binary")
    return found


def run(arguments: list[str], text: str) -> str:
    """Run pandoc once; its warnings are errors."""
    done = subprocess.run(
        [executable(), *arguments, "--sandbox", "--fail-if-warnings", "--wrap=none"],
        input=text.encode(),
        capture_output=True,
        check=False,
    )
    if done.returncode:
        raise PublishError(done.stderr.decode(errors="replace").strip() or "pandoc failed")
    return done.stdout.decode()


def prose(cells: list[str]) -> list[list[dict[str, Any]]]:
    """Return the tree of each markdown cell; all are parsed in one run.

    Raises
    ------
    PublishError
        If a cell leaves something open (a code fence, say) and swallows the next.
    """
    if not cells:
        return []
    mark = "cell-border"
    while any(mark in cell for cell in cells):
        mark += "-x"
    parts = [f"{cell}\n\n{mark}-{n}\n\n" for n, cell in enumerate(cells)]
    tree = json.loads(run(["-f", PROSE, "-t", "json"], "".join(parts)))
    split: list[list[dict[str, Any]]] = [[]]
    for block in tree["blocks"]:
        if block["t"] == "Para" and block["c"][0] == {"t": "Str", "c": f"{mark}-{len(split) - 1}"}:
            split.append([])
        else:
            split[-1].append(block)
    if len(split) != len(cells) + 1 or split.pop():
        start = cells[len(split) - 1].strip().splitlines()[:1]
        raise PublishError(
            f"the markdown cell that begins {start} leaves a block open (a code fence?); close it"
        )
    return split


def mathml(formulas: list[str]) -> dict[str, ElementTree.Element]:
    """Return the MathML tree of each formula; all are converted in one run.

    Raises
    ------
    PublishError
        If a formula is not understood; the message names it.
    """
    unique = list(dict.fromkeys(formulas))
    if not unique:
        return {}
    for latex in unique:
        if not latex.strip():
            raise PublishError("a formula is empty")
    blocks = [{"t": "Para", "c": [{"t": "Math", "c": [{"t": "DisplayMath"}, f]}]} for f in unique]
    tree = {"pandoc-api-version": [1, 23, 1], "meta": {}, "blocks": blocks}
    try:
        html = run(["-f", "json", "-t", "html5", "--mathml"], json.dumps(tree))
    except PublishError as error:
        raise PublishError(_named(str(error), unique)) from error
    root = ElementTree.fromstring(f"<all>{html}</all>")
    found = list(root.iter(f"{_MATHML}math"))
    if len(found) != len(unique):
        raise PublishError("a formula was lost on the way to MathML")
    return {latex: _bare(math) for latex, math in zip(unique, found, strict=True)}


def _named(message: str, formulas: list[str]) -> str:
    bad = [f for f in formulas if f in message]
    if not bad:
        return message
    longest = max(bad, key=len)
    reason = re.sub(r"^\[WARNING\]\s*", "", message.split(longest, 1)[1]).strip(" \n:,")
    reason = " ".join(reason.split())
    return f"the formula {longest!r} cannot be set: {reason}"


def _bare(math: ElementTree.Element) -> ElementTree.Element:
    """Return the one presentation child, with namespaces and annotations removed."""
    shown = math.find(f"{_MATHML}semantics/*")
    if shown is None:
        raise PublishError("a formula has no presentation in MathML")
    for element in shown.iter():
        element.tag = str(element.tag).removeprefix(_MATHML)
    for element in shown.iter():
        _close_bars(element)
    return shown


def _close_bars(row: ElementTree.Element) -> None:
    """Make every second bar of a row a closing one; pandoc takes all of them for opening."""
    opened: dict[str | None, bool] = {}
    for child in row:
        scripted = child.tag in ("msub", "msup", "msubsup") and len(child)
        sign = child[0] if scripted else child
        if sign.tag == "mo" and sign.text in _BARS and sign.get("stretchy") == "false":
            opened[sign.text] = not opened.get(sign.text, False)
            sign.set("form", "prefix" if opened[sign.text] else "postfix")
