"""Signing from the command line: tokens and time stamps that are not there."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest


@pytest.mark.parametrize(
    ("words", "status", "told"),
    [
        (["--pkcs11", "none.so"], 2, "--token and --key"),
        (["--pkcs11", "none.so", "--token", "a", "--key", "b"], 1, "python-pkcs11"),
        (["--timestamp", "http://127.0.0.1:9/"], 1, "time"),
        (["--timestamp", "ftp://127.0.0.1/"], 2, "http"),
    ],
)
def test_what_cannot_sign_says_so_and_leaves_the_package_as_it_was(
    workshop: Any, tmp_path: Path, words: list[str], status: int, told: str
) -> None:
    package = workshop.package(tmp_path)
    before = sorted(path.name for path in package.rglob("*"))
    done = subprocess.run(
        [sys.executable, "-m", "reportgen.cli", "sign", str(package), "--role", "prepared",
         "--name", "Ann Ash", *words],
        env={**os.environ, "REPORTGEN_HOME": str(tmp_path / "home"), "REPORTGEN_PASSPHRASE": "x"},
        capture_output=True,
        text=True,
        check=False,
    )  # fmt: skip
    assert done.returncode == status, done.stderr
    assert told in done.stderr
    assert sorted(path.name for path in package.rglob("*")) == before
