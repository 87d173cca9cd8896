"""Reading a template: what must hold before any of its cells runs."""

from __future__ import annotations

import hashlib
import json
from dataclasses import dataclass
from pathlib import Path

import nbformat
from nbformat import NotebookNode

from reportgen.errors import InputError, Problem
from reportgen.run.parameters import PARAMETER, names_set

KERNEL = "python3"
"""Name of the kernel of every template: the Python that runs reportgen."""


@dataclass(frozen=True)
class Template:
    """A template that has been read and found fit to run.

    Parameters
    ----------
    name
        File name.
    digest
        SHA-512 of the file's bytes, in hex.
    notebook
        Its cells.
    """

    name: str
    digest: str
    notebook: NotebookNode


def read_template(path: Path) -> Template:
    """Read a template and check that a case can be put into it.

    Parameters
    ----------
    path
        An ``.ipynb`` file.

    Returns
    -------
    Template
        The template with its digest.

    Raises
    ------
    InputError
        If the file cannot be read, is not a notebook of format 4, names another kernel than
        ``python3``, or has not exactly one cell tagged ``parameters`` that sets ``case``.
    """
    try:
        content = path.read_bytes()
    except OSError as error:
        raise _fault(path, f"cannot be read: {error.strerror}") from error
    notebook = _parse(path, content)
    _check_kernel(path, notebook)
    _check_parameters(path, notebook)
    return Template(path.name, hashlib.sha512(content).hexdigest(), notebook)


def _fault(path: Path, message: str, remedy: str = "", field: str = "") -> InputError:
    return InputError(Problem(message, remedy, file=path.name, field=field))


def _parse(path: Path, content: bytes) -> NotebookNode:
    try:
        raw = json.loads(content.decode("utf-8"))
    except (UnicodeDecodeError, json.JSONDecodeError, RecursionError) as error:
        raise _fault(
            path, f"not a notebook: {error}", "save it as an .ipynb file from Jupyter"
        ) from error
    if not isinstance(raw, dict) or raw.get("nbformat") != 4:
        found = raw.get("nbformat", "none") if isinstance(raw, dict) else "none"
        raise _fault(path, f"notebook format {found}", "save it in notebook format 4", "nbformat")
    _give_ids(raw)
    try:
        nbformat.validate(raw)
        notebook = nbformat.reads(json.dumps(raw), as_version=4)  # type: ignore[no-untyped-call]
    except (nbformat.ValidationError, AttributeError, TypeError, KeyError) as error:
        reason = str(getattr(error, "message", error)).splitlines()[0]
        raise _fault(path, f"not a valid notebook: {reason}") from error
    assert isinstance(notebook, NotebookNode)
    return notebook


def _give_ids(raw: dict[str, object]) -> None:
    """Bring formats 4.0 to 4.4, which have no cell ids, to 4.5 without random ids."""
    minor = raw.get("nbformat_minor")
    cells = raw.get("cells")
    if not isinstance(minor, int) or minor >= 5 or not isinstance(cells, list):
        return
    raw["nbformat_minor"] = 5
    for number, cell in enumerate(cells, start=1):
        if isinstance(cell, dict):
            cell["id"] = f"cell-{number}"


def _check_kernel(path: Path, notebook: NotebookNode) -> None:
    named = notebook.metadata.get("kernelspec", {}).get("name")
    if named != KERNEL:
        found = f"kernel {named!r}" if named else "no kernel is named"
        remedy = f"choose the kernel {KERNEL!r} in Jupyter and save"
        raise _fault(path, found, remedy, "metadata.kernelspec.name")


def _check_parameters(path: Path, notebook: NotebookNode) -> None:
    tagged = [
        (number, cell)
        for number, cell in enumerate(notebook.cells, start=1)
        if "parameters" in cell.metadata.get("tags", [])
    ]
    if len(tagged) != 1:
        found = ", ".join(str(number) for number, _ in tagged)
        message = f"cells {found} are tagged 'parameters'" if tagged else "no parameters cell"
        raise _fault(path, message, f"tag the one cell that sets '{PARAMETER}' with 'parameters'")
    number, cell = tagged[0]
    if cell.cell_type != "code" or PARAMETER not in names_set(cell.source):
        message = f"the parameters cell does not set '{PARAMETER}'"
        raise _fault(path, message, f"give it the line '{PARAMETER} = {{}}'", f"cell {number}")
    for later, other in enumerate(notebook.cells, start=1):
        injected = "injected-parameters" in other.metadata.get("tags", [])
        if injected and later != number + 1:
            message = "a cell tagged 'injected-parameters' does not follow the parameters cell"
            raise _fault(path, message, "delete that cell", f"cell {later}")
