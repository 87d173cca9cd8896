"""Tiny templates for the tests of runs, executed by real kernels."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import nbformat
import pytest
from nbformat.v4 import new_code_cell, new_markdown_cell, new_notebook

END = """from IPython.display import display
display({"application/vnd.reportgen.results+json": {"case": case}}, raw=True)"""
"""A last cell that gives the case back as the results."""


def template_notebook(*cells: Any, parameters: str = "case = {}") -> Any:
    """Give a template of a heading, a parameters cell, and code cells."""
    first = new_code_cell(parameters, metadata={"tags": ["parameters"]})
    rest = [new_code_cell(cell) if isinstance(cell, str) else cell for cell in cells]
    kernelspec = {"name": "python3", "display_name": "Python 3", "language": "python"}
    return new_notebook(
        cells=[new_markdown_cell("# Purpose"), first, *rest], metadata={"kernelspec": kernelspec}
    )


@pytest.fixture
def template(tmp_path: Path) -> Callable[..., Path]:
    """Write a template; ``end=False`` leaves out the cell that gives results."""

    def write(*cells: Any, end: bool = True, name: str = "tiny.ipynb", **options: Any) -> Path:
        path = tmp_path / name
        notebook = template_notebook(*cells, *([END] if end else []), **options)
        path.write_text(nbformat.writes(notebook), encoding="utf-8")
        return path

    return write


@pytest.fixture(scope="session", autouse=True)
def _no_parent_left() -> Iterator[None]:
    """End the warm parent that the tests share."""
    from reportgen.run.warm import close_warm

    yield
    close_warm()


README = Path(__file__).resolve().parents[2] / "README.md"
SAG = """\
reportgen: 1
template: sag.ipynb
document: {number: CAL-0003, title: Sag of a test rotor, revision: A, status: for review,
  date: 2026-05-04, prepared: {name: N. Body}}
machine: {name: Test rotor, orientation: horizontal}
units: si
inputs:
  mass: {value: 62 kg, quantity: mass, source: drawing 7}
  stiffness: {value: 2e6 N/m, quantity: stiffness, source: beam calculation}
  allowed: {value: 0.2 mm, quantity: displacement, source: project specification}
"""


@pytest.fixture
def sag_folder(tmp_path: Path) -> Path:
    """Give a folder with the README's template and a case for it."""
    part = README.read_text(encoding="utf-8").split("### A template of one's own\n")[1]
    cells = re.findall(r"```python\n(.*?)```", part.split("\n## ")[0], re.DOTALL)
    notebook = nbformat.v4.new_notebook(cells=[nbformat.v4.new_code_cell(c) for c in cells])
    notebook.metadata["kernelspec"] = {"name": "python3", "display_name": "Python 3"}
    notebook.cells[0].metadata["tags"] = ["parameters"]
    notebook.cells.insert(1, nbformat.v4.new_markdown_cell("# Sag\n\nA desk check."))
    nbformat.write(notebook, tmp_path / "sag.ipynb")
    (tmp_path / "case.yaml").write_text(SAG)
    return tmp_path
