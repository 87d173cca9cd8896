"""A template of one's own, as the README describes it."""

from __future__ import annotations

import json
import os
import re
import subprocess
import sys
from pathlib import Path

import nbformat
import pytest

README = Path(__file__).resolve().parents[2] / "README.md"
CASE = """\
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
def folder(tmp_path: Path) -> Path:
    """Give a folder with the README's template and a case for it."""
    part = README.read_text(encoding="utf-8").split("### A template of one's own\n")[1]
    cells = re.findall(r"```python\n(.*?)```", part.split("\n## ")[0], re.DOTALL)
    notebook = nbformat.v4.new_notebook(cells=[nbformat.v4.new_code_cell(c) for c in cells])
    notebook.metadata["kernelspec"] = {"name": "python3", "display_name": "Python 3"}
    notebook.cells[0].metadata["tags"] = ["parameters"]
    notebook.cells.insert(1, nbformat.v4.new_markdown_cell("# Sag\n\nA desk check."))
    nbformat.write(notebook, tmp_path / "sag.ipynb")
    (tmp_path / "case.yaml").write_text(CASE)
    return tmp_path


def run(folder: Path, *more: str) -> subprocess.CompletedProcess[str]:
    return reportgen(folder, "run", folder / "case.yaml", "-o", folder / "out", *more)


def reportgen(folder: Path, *words: object) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-m", "reportgen.cli", *map(str, words)],
        stdin=subprocess.DEVNULL,
        capture_output=True,
        text=True,
        env={**os.environ, "REPORTGEN_HOME": str(folder)},
        check=False,
    )


def test_a_template_of_ones_own_must_be_allowed_and_is_told_from_ours(folder: Path) -> None:
    refused = run(folder)
    assert refused.returncode == 2
    assert "--allow-template sag.ipynb" in refused.stderr
    assert not (folder / "out").exists()

    done = run(folder, "--allow-template", "sag.ipynb")
    assert done.returncode == 3, done.stderr
    data = folder / "out" / "CAL-0003_A" / "data"
    results = json.loads((data / "results.json").read_bytes())
    assert results["results"][0]["value"] == pytest.approx(62 * 9.80665 / 2e6)
    assert results["results"][0]["second"]["agrees"]
    assert results["criteria"][0]["verdict"] == "does not meet"
    assert results["template"]["origin"] == "local"
    page = (data / "report.html").read_text(encoding="utf-8")
    assert "sag.ipynb, a local one that is not shipped with reportgen" in page
    assert results["template"]["digest"].removeprefix("sha512:")[:20] in page
    assert (data / "template.ipynb").read_bytes() == (folder / "sag.ipynb").read_bytes()

    repeated_only_if_trusted(folder)


def repeated_only_if_trusted(folder: Path) -> None:
    package = folder / "out" / "CAL-0003_A"
    refused = reportgen(folder, "rerun", package)
    assert refused.returncode == 2
    assert "sag.ipynb is a template of the package's own" in refused.stderr
    anchor = folder / "body.pem"
    anchor.write_text(reportgen(folder, "identity", "--name", "N. Body", "--pem").stdout)
    done = reportgen(folder, "rerun", package, "--trust", anchor)
    assert done.returncode == 0, done.stderr
    assert done.stdout.splitlines()[-1].startswith("identical:")

    stranger = folder / "stranger.pem"
    stranger.write_text(reportgen(folder, "identity", "--name", "A. Stranger", "--pem").stdout)
    untrusted = reportgen(folder, "rerun", package, "--trust", stranger)
    assert untrusted.returncode == 4
    assert "not signed under the trust anchors" in untrusted.stderr
