"""An executed notebook without what differs from run to run: the same inputs, the same bytes.

Taken away: times, durations, paths, versions of the interpreter, random cell ids, addresses of
objects, and the splitting of printed text that depends on timing. What a reader or Jupyter
needs stays: sources, outputs, execution counts, tags.
"""

from __future__ import annotations

import re
import sys
import tempfile
from pathlib import Path
from typing import Any

import nbformat
from nbformat import NotebookNode

_KERNELSPEC = {"display_name": "Python 3", "language": "python", "name": "python3"}
_LANGUAGE = {
    "file_extension": ".py",
    "mimetype": "text/x-python",
    "name": "python",
    "nbconvert_exporter": "python",
    "pygments_lexer": "ipython3",
}
_KEPT_OF_CELL = ("tags", "jupyter", "editable", "deletable", "reportgen")
SCRATCH_PREFIX = "rg-"
"""Start of the names of the folders that runs work in, below the folder for temporary files."""

_ADDRESS = re.compile(r"\bat 0x[0-9a-fA-F]{6,16}\b")
_CELL_FILE = re.compile(r"[^\s'\"<>]*ipykernel_\d+[/\\]\d+\.py")


def normalise(notebook: NotebookNode) -> NotebookNode:
    """Give a copy of an executed notebook that depends on its inputs alone.

    Parameters
    ----------
    notebook
        A notebook of format 4, executed or not; it is left as it was.

    Returns
    -------
    NotebookNode
        The copy, format 4.5. Normalising it again changes nothing.
    """
    cells = [_cell(cell, number) for number, cell in enumerate(notebook.cells, start=1)]
    metadata: dict[str, Any] = {"kernelspec": _KERNELSPEC, "language_info": _LANGUAGE}
    for key in ("title", "reportgen"):
        if key in notebook.metadata:
            metadata[key] = notebook.metadata[key]
    plain = {"cells": cells, "metadata": metadata, "nbformat": 4, "nbformat_minor": 5}
    result = nbformat.from_dict(plain)  # type: ignore[no-untyped-call]
    assert isinstance(result, NotebookNode)
    return result


def notebook_bytes(notebook: NotebookNode) -> bytes:
    """Give the bytes of the ``.ipynb`` file; equal for equal notebooks.

    Parameters
    ----------
    notebook
        A notebook of format 4.

    Returns
    -------
    bytes
        UTF-8 JSON with sorted keys, ending in a newline.
    """
    text: str = nbformat.writes(notebook)  # type: ignore[no-untyped-call]
    return (text.rstrip("\n") + "\n").encode("utf-8", errors="backslashreplace")


def _cell(cell: NotebookNode, number: int) -> dict[str, Any]:
    kept = {key: cell.metadata[key] for key in _KEPT_OF_CELL if cell.metadata.get(key)}
    plain = {
        "cell_type": cell.cell_type,
        "id": f"cell-{number}",
        "metadata": kept,
        "source": cell.source,
    }
    if cell.get("attachments"):
        plain["attachments"] = cell.attachments
    if cell.cell_type == "code":
        plain["execution_count"] = cell.get("execution_count")
        plain["outputs"] = _outputs(cell.get("outputs", []))
    return plain


def _outputs(outputs: list[NotebookNode]) -> list[dict[str, Any]]:
    """Clean each output and join the printed text between two displays.

    The kernel sends printed text in pieces cut by a timer, and so may interleave the two
    streams differently each time; between displays, where it flushes them, each is one piece.
    """
    result: list[dict[str, Any]] = []
    printed = {"stdout": "", "stderr": ""}

    def flush() -> None:
        for name, text in printed.items():
            if text:
                result.append({"output_type": "stream", "name": name, "text": _scrub(text)})
            printed[name] = ""

    for output in outputs:
        if output.output_type == "stream":
            printed[output.name] += "".join(output.text)
        else:
            flush()
            result.append(_output(output))
    flush()
    return result


def _output(output: NotebookNode) -> dict[str, Any]:
    if output.output_type == "error":
        return {
            "output_type": "error",
            "ename": output.ename,
            "evalue": _scrub(output.evalue),
            "traceback": [_scrub(line) for line in output.traceback],
        }
    plain: dict[str, Any] = {
        "output_type": output.output_type,
        "data": {mime: _data(mime, value) for mime, value in output.data.items()},
        "metadata": output.get("metadata", {}),
    }
    if output.output_type == "execute_result":
        plain["execution_count"] = output.get("execution_count")
    return plain


def _data(mime: str, value: Any) -> Any:
    readable = mime in ("text/plain", "text/html", "text/markdown")
    return _scrub("".join(value)) if readable else value


def _scrub(text: str) -> str:
    """Take what names this computer or this run out of printed text."""
    text = _ADDRESS.sub("at 0x0", _CELL_FILE.sub("<cell>", text))
    for pattern, replacement in _PRIVATE:
        text = pattern.sub(replacement, text)
    return text


def _private() -> list[tuple[re.Pattern[str], str]]:
    """Give the folders to replace, longest first so that none hides another.

    Only a whole leading part of a path is replaced: "peak/root" is no path under ``/root``.
    """
    places = {
        str(Path(__file__).resolve().parents[2]): "<reportgen>",
        sys.prefix: "<python>",
        sys.base_prefix: "<python>",
        str(Path.home()): "~",
    }
    scratch = {tempfile.gettempdir(), str(Path(tempfile.gettempdir()).resolve())}
    found = [
        (place, re.escape(place) + r"(?=[/\\])", name)
        for place, name in places.items()
        if len(Path(place).parts) > 1
    ]
    found += [
        (place, re.escape(place) + rf"[/\\]{SCRATCH_PREFIX}[^/\\\s'\"]+", "<scratch>")
        for place in scratch
    ]
    found.sort(key=lambda item: -len(item[0]))
    return [(re.compile(rf"(?<![\w.~/\\]){pattern}"), name) for _, pattern, name in found]


_PRIVATE = _private()
