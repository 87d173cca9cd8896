"""Each demo report opened once in a real Chromium; everything the tests ask about is noted."""

from __future__ import annotations

import importlib.util
from collections.abc import Callable
from functools import partial
from pathlib import Path
from typing import Any

import pytest


def _visiting() -> Any:
    place = Path(__file__).with_name("visiting.py")
    spec = importlib.util.spec_from_file_location("browser_visiting", place)
    assert spec
    assert spec.loader
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


@pytest.fixture(scope="session")
def visiting() -> Any:
    """Give the module that opens pages."""
    return _visiting()


@pytest.fixture(scope="session")
def visit(run_demo: Callable[[str], Any], made_once: Callable[..., Any]) -> Callable[[str], Any]:
    """Give what was seen of a demo's HTML report, by name of the demo."""

    def of(name: str) -> Any:
        page = run_demo(name).package / "data" / "report.html"
        return made_once(f"visit-{name}", partial(_visiting().visit, page))

    return of
