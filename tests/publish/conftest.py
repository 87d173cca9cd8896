"""The sample report, published once for all tests of this folder."""

from __future__ import annotations

import importlib.util
from pathlib import Path
from types import ModuleType

import pytest

from reportgen.publish import Published, publish


def _load(name: str) -> ModuleType:
    place = Path(__file__).with_name(f"{name}.py")
    spec = importlib.util.spec_from_file_location(f"publish_{name}", place)
    assert spec
    assert spec.loader
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


@pytest.fixture(scope="session")
def sample() -> ModuleType:
    """Return the module that makes sample notebooks."""
    return _load("sample")


ATTACHED = {"case.yaml": b"a: 1\n", "results.json": b"{}\n", "calculation.ipynb": b"{}\n"}


@pytest.fixture(scope="session")
def published(sample: ModuleType) -> Published:
    """Return the full sample report."""
    return publish(sample.full(), attachments=ATTACHED)
