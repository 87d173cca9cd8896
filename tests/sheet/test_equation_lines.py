"""An equation line says what was computed: formula, values, result."""

from __future__ import annotations

import pytest

from reportgen.errors import PublishError
from reportgen.sheet.lines import equation_line, plain


def line(formula: str, values: dict[str, tuple[float, str]], **kw: object) -> dict[str, object]:
    given = {"title": "Natural frequency", "result": (100.0, "speed"), "system": "si"} | kw
    return dict(equation_line("wn", formula=formula, values=values, **given))  # type: ignore[arg-type]


def test_marks_print_as_symbols_and_as_values() -> None:
    block = line(
        r"\omega_n = \sqrt{\frac{<k>}{<m>}}",
        {"k": (2.0e6, "stiffness"), "m": (50.0, "mass")},
    )
    assert block["formula"] == r"\omega_n = \sqrt{\frac{k}{m}}"
    substituted = str(block["substituted"])
    assert substituted.startswith(r"\sqrt{\frac{\left(")
    assert r"50\ \text{kg}" in substituted
    assert "<" not in substituted
    assert str(block["result"]).startswith(r"\omega_n = 954.9")


def test_units_follow_the_reader() -> None:
    block = line("W = <m>", {"m": (0.45359237, "mass")}, system="us", result=None)
    assert r"1\ \text{lb}" in str(block["substituted"])
    assert "result" not in block


def test_a_mark_without_a_value_is_refused() -> None:
    with pytest.raises(PublishError, match=r"'wn'.*: m$"):
        line("a = <k> <m>", {"k": (1.0, "stiffness")})


def test_a_value_without_a_mark_is_refused() -> None:
    with pytest.raises(PublishError, match="e"):
        line("a = <k>", {"k": (1.0, "stiffness"), "e": (1.0, "length")})


def test_the_alternative_text_carries_the_result() -> None:
    assert "954.9 r/min" in str(line("a = <k>", {"k": (1.0, "stiffness")})["alt"])


def test_plain_text_of_nested_inlines() -> None:
    assert plain(["a ", {"strong": ["b", {"math": "c"}]}, {"ref": "d"}]) == "a bcd"
