"""A template of one's own, as the README describes it."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest


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


def test_a_template_of_ones_own_must_be_allowed_and_is_told_from_ours(sag_folder: Path) -> None:
    folder = sag_folder
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
