"""Tiny templates for the tests of runs, executed by real kernels."""

from __future__ import annotations

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
