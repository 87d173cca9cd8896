"""Calling the program as a user would."""

from __future__ import annotations

import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

ROOT = Path(__file__).parents[2]


@pytest.fixture
def reportgen(tmp_path: Path) -> Callable[..., subprocess.CompletedProcess[str]]:
    """Call the program with a home of its own."""

    def call(*arguments: Any) -> subprocess.CompletedProcess[str]:
        return subprocess.run(
            [sys.executable, "-m", "reportgen.cli", *map(str, arguments)],
            env={**os.environ, "REPORTGEN_HOME": str(tmp_path / "home")},
            capture_output=True,
            text=True,
            check=False,
        )

    return call


@pytest.fixture
def fan_of_revision_b() -> Path:
    """Give the demo fan as offered."""
    return ROOT / "cases" / "earlier" / "booster-fan-B.yaml"


@pytest.fixture
def fan() -> Path:
    """Give the demo fan as weighed and measured."""
    return ROOT / "cases" / "booster-fan.yaml"
