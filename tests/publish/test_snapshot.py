"""The sample report's outline and text stay as they are until somebody means to change them."""

from __future__ import annotations

import importlib.util
from pathlib import Path
from types import ModuleType

import pytest

from reportgen.publish import publish

NAMES = ("html-outline.txt", "html-text.txt", "pdf-outline.txt", "pdf-text.txt")


@pytest.fixture(scope="module")
def found(sample: ModuleType) -> dict[str, str]:
    place = Path(__file__).with_name("snapshot.py")
    spec = importlib.util.spec_from_file_location("publish_snapshot", place)
    assert spec
    assert spec.loader
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    report = publish(sample.full())
    texts: dict[str, str] = module.texts(report.html, report.pdf)
    return texts


@pytest.mark.parametrize("name", NAMES)
def test_outline_and_text_are_as_kept(found: dict[str, str], name: str) -> None:
    kept = Path(__file__).with_name("snapshot") / name
    assert found[name].splitlines() == kept.read_text("utf-8").splitlines()


def test_both_forms_have_one_outline(found: dict[str, str]) -> None:
    page, paper = (
        [line.strip() for line in found[name].splitlines() if line.strip()[0].isdigit()]
        for name in ("html-outline.txt", "pdf-outline.txt")
    )
    assert page == paper
    assert len(page) >= 8
