"""The same inputs give the same bytes, and the notebook still works on its own."""

from __future__ import annotations

import json
import os
import re
import subprocess
import sys
import tempfile
from collections.abc import Callable
from pathlib import Path
from typing import Any

import nbformat
import pytest
from nbclient import NotebookClient
from nbformat.v4 import new_code_cell, new_notebook, new_output

from reportgen.run.execute import execute
from reportgen.run.normalise import normalise, notebook_bytes

Write = Callable[..., Path]

RESTLESS = """import sys, time, os, warnings
for part in range(3):
    print("out", part, object(), flush=True)
    print("err", part, file=sys.stderr, flush=True)
    time.sleep(0.01 * (os.getpid() % 7))
warnings.warn("mind " + os.getcwd())
"""
FIGURE = """import matplotlib.pyplot as plt
figure, axes = plt.subplots()
axes.plot([1, 2], label=r"$\\omega_n$")
axes.legend();"""
BLOCK = """from IPython.display import display
display({"application/vnd.reportgen.block+json": {"kind": "paragraph", "text": case["text"]},
         "text/plain": case["text"]}, raw=True)"""
CASE = {"text": "62 kg, ζ = 0.02", "mass": 62.0}


def with_outputs(*outputs: Any) -> Any:
    return new_notebook(cells=[new_code_cell("x", execution_count=1, outputs=list(outputs))])


def printed(*pieces: tuple[str, str]) -> list[Any]:
    outputs = [new_output("stream", name=name, text=text) for name, text in pieces]
    (cell,) = normalise(with_outputs(*outputs)).cells
    return [(output.name, output.text) for output in cell.outputs]


def test_the_same_inputs_give_the_same_bytes_in_any_kernel(template: Write) -> None:
    path = template(RESTLESS, FIGURE, BLOCK)
    kernels = ("warm", "plain", "warm", "plain")
    first, *others = (
        notebook_bytes(execute(path, CASE, kernel=kernel).notebook)  # type: ignore[arg-type]
        for kernel in kernels
    )
    assert others == [first] * 3
    text = first.decode()
    assert "image/png" in text
    for private in (tempfile.gettempdir(), str(Path.home()), sys.prefix, "papermill"):
        assert private not in text
    assert not re.search(r"\d\d:\d\d:\d\d|0x[0-9a-f]{6}|ipykernel_", text)


def test_another_case_gives_other_bytes(template: Write) -> None:
    path = template(BLOCK)
    one, other = (execute(path, {**CASE, "mass": mass}).notebook for mass in (62.0, 62.5))
    assert notebook_bytes(one) != notebook_bytes(other)


def test_normalising_again_changes_nothing_and_leaves_the_original(template: Write) -> None:
    done = execute(template(RESTLESS, FIGURE, BLOCK), CASE).notebook
    before = notebook_bytes(done)
    assert notebook_bytes(normalise(done)) == before
    assert notebook_bytes(done) == before
    nbformat.validate(done)


def test_the_notebook_runs_on_its_own_in_jupyter(template: Write) -> None:
    done = execute(template(FIGURE, BLOCK), CASE).notebook
    again = nbformat.reads(notebook_bytes(done).decode(), as_version=4)
    for cell in again.cells:
        if cell.cell_type == "code":
            cell.outputs = []
    NotebookClient(again, timeout=60).execute()
    assert notebook_bytes(normalise(again)) == notebook_bytes(done)


def nbval(path: Path) -> subprocess.CompletedProcess[str]:
    options = ("-q", "-p", "no:cacheprovider", "-c", os.devnull, "--nbval")
    return subprocess.run(
        [sys.executable, "-m", "pytest", *options, path.name],
        cwd=path.parent,
        capture_output=True,
        text=True,
        check=False,
    )


def test_the_notebook_passes_nbval_with_its_outputs_and_fails_with_others(
    template: Write, tmp_path: Path
) -> None:
    done = execute(template("print(case['mass'])", BLOCK), CASE).notebook
    content = notebook_bytes(done)
    good, bad = tmp_path / "good.ipynb", tmp_path / "bad.ipynb"
    good.write_bytes(content)
    assert b'"62.0\\n"' in content
    bad.write_bytes(content.replace(b'"62.0\\n"', b'"62.1\\n"'))
    result = nbval(good)
    assert (result.returncode, "5 passed" in result.stdout) == (0, True), result.stdout
    assert nbval(bad).returncode == 1


def test_printed_text_is_joined_between_displays() -> None:
    shown = new_output("display_data", data={"text/plain": "shown"})
    outputs = [
        new_output("stream", name="stdout", text="a"),
        new_output("stream", name="stderr", text="x"),
        new_output("stream", name="stdout", text="b"),
        shown,
        new_output("stream", name="stdout", text="c"),
    ]
    (cell,) = normalise(with_outputs(*outputs)).cells
    found = [output.get("text") or output.data["text/plain"] for output in cell.outputs]
    assert found == ["ab", "x", "shown", "c"]


def test_only_what_varies_is_taken_out_of_printed_text() -> None:
    home = str(Path.home())
    lines = (
        f"{tempfile.gettempdir()}/ipykernel_123/456.py:1: UserWarning",
        f"{sys.prefix}/lib/x.py",
        f"{home}/cases/a.yaml",
        "<object at 0x7f12ab34cd56>",
    )
    ((_, text),) = printed(("stdout", "\n".join(lines)))
    assert text.splitlines() == [
        "<cell>:1: UserWarning",
        "<python>/lib/x.py",
        "~/cases/a.yaml",
        "<object at 0x0>",
    ]
    kept = f"peak{home} mean{home} 0x7f12ab34cd56 12:30 {home}"
    assert printed(("stdout", kept)) == [("stdout", kept)]


def test_metadata_of_the_run_goes_and_the_authors_stays() -> None:
    cell = new_code_cell(
        "x",
        metadata={
            "tags": ["keep"],
            "papermill": {"duration": 1.5},
            "execution": {"iopub.status.busy": "2026-03-02T10:00:00Z"},
            "jupyter": {"source_hidden": True},
        },
    )
    metadata = {
        "kernelspec": {"name": "python3", "display_name": "my env"},
        "language_info": {"name": "python", "version": "3.11.7"},
        "papermill": {"input_path": "/home/ann/a.ipynb"},
        "title": "Whirl",
    }
    done = normalise(new_notebook(cells=[cell], metadata=metadata))
    assert set(done.metadata) == {"kernelspec", "language_info", "title"}
    assert "version" not in done.metadata["language_info"]
    assert done.metadata["kernelspec"]["display_name"] == "Python 3"
    assert done.cells[0].metadata == {"tags": ["keep"], "jupyter": {"source_hidden": True}}
    assert done.cells[0].id == "cell-1"


def test_the_bytes_are_sorted_json_ending_in_one_newline() -> None:
    content = notebook_bytes(normalise(new_notebook(cells=[new_code_cell("ζ")])))
    raw = json.loads(content)
    assert list(raw) == sorted(raw)
    assert content.endswith(b"}\n")
    assert "ζ".encode() in content


@pytest.mark.parametrize("stream", ["stdout", "stderr"])
def test_an_empty_print_leaves_no_output(stream: str) -> None:
    assert printed((stream, "")) == []
