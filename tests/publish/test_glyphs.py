"""The list of what the PDF's fonts show is true of the typst wheel that is installed."""

from __future__ import annotations

import importlib.util
import unicodedata
from pathlib import Path

import pytest

from reportgen.publish import characters


def wheel() -> object:
    place = Path(__file__).with_name("glyphs_in_wheel.py")
    spec = importlib.util.spec_from_file_location("glyphs_in_wheel", place)
    assert spec
    assert spec.loader
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


def listed() -> list[int]:
    starts, ends = characters._glyphs()
    return [p for first, last in zip(starts, ends, strict=True) for p in range(first, last + 1)]


@pytest.mark.parametrize("style", ["", 'weight: "bold",', 'style: "italic",'])
def test_typst_sets_every_listed_character(style: str) -> None:
    points = listed()
    assert wheel().shown(points, style) == points  # type: ignore[attr-defined]


def test_little_that_the_fonts_hold_is_left_out() -> None:
    module = wheel()
    held = {
        p
        for p in module.covered()  # type: ignore[attr-defined]
        if unicodedata.category(chr(p)) not in module.HIDDEN  # type: ignore[attr-defined]
    }
    assert set(listed()) <= held
    assert len(held - set(listed())) < 30
