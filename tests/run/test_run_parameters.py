"""No text of a case becomes code: what is injected is a literal equal to the case."""

from __future__ import annotations

import ast
import enum
import math
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from papermill.translators import PythonTranslator

from reportgen.errors import RunError
from reportgen.run.execute import execute
from reportgen.run.parameters import injected_value, names_set, require_plain

HOSTILE = [
    '"',
    "'",
    '"""',
    "'''",
    "\\",
    '\\"',
    "\\\\",
    "\n",
    "\r\n",
    "a\nimport os\nos._exit(1)",
    '"}\nimport os; os._exit(1)\ncase = {"',
    "{case}",
    "{}",
    "{{x}}",
    "%s %(x)s",
    "$HOME ${x}",
    "\\u0041 \\x41 \\N{DIGIT ONE}",
    "\u2028\u2029\x85",
    "\x00\x07\x1b[31m",
    "ζ ≤ ½ 𝛚 日本",
    "\N{RIGHT-TO-LEFT OVERRIDE}abc",
    "#comment",
    "!ls",
    "%run x",
    "?print",
    "__import__('os').system('true')",
    "nan",
    "None",
    "",
    " ",
    "\t",
]


def test_hostile_text_comes_through_a_kernel_unchanged(
    template: Callable[..., Path],
) -> None:
    case = {"values": HOSTILE, "keys": {text: index for index, text in enumerate(HOSTILE)}}
    assert execute(template(), case).results["case"] == case


plain = st.recursive(
    st.none()
    | st.booleans()
    | st.integers(-(2**63) + 1, 2**63 - 1)
    | st.floats(allow_nan=False, allow_infinity=False)
    | st.text(st.characters(codec="utf-8"))
    | st.sampled_from(HOSTILE),
    lambda inner: (
        st.lists(inner, max_size=4)
        | st.dictionaries(st.text(st.characters(codec="utf-8")), inner, max_size=4)
    ),
    max_leaves=20,
)


@given(case=st.dictionaries(st.text(st.characters(codec="utf-8")), plain, max_size=4))
@settings(deadline=None, max_examples=100)
def test_what_papermill_writes_is_one_literal_equal_to_the_case(case: dict[str, Any]) -> None:
    require_plain(case)
    found = injected_value(PythonTranslator.codify({"case": case}))
    assert found == case
    assert repr(found) == repr(case)  # tells 1 from 1.0 and from True, and 0.0 from -0.0


class Text(str):
    """A string that prints as something else."""

    __slots__ = ()

    def __str__(self) -> str:
        return '"; import os; "'


class Level(enum.IntEnum):
    """An integer that prints as its name."""

    HIGH = 3


@pytest.mark.parametrize(
    ("value", "reason"),
    [
        (math.nan, "nan is not a finite number"),
        (math.inf, "inf is not a finite number"),
        (-math.inf, "-inf is not a finite number"),
        ((1, 2), "type tuple"),
        ({1, 2}, "type set"),
        (b"x", "type bytes"),
        (Text("x"), "type Text"),
        (Level.HIGH, "type Level"),
        (object(), "type object"),
        ({1: 2}, "the key 1 is not a string"),
        ({"a": {None: 2}}, "the key None is not a string"),
        ("\ud800", "not Unicode"),
        ({"\udfff": 1}, "not Unicode"),
        (2**63, "more than 64 bits"),
    ],
)
def test_what_would_not_come_back_equal_is_refused(value: object, reason: str) -> None:
    with pytest.raises(RunError, match=reason):
        require_plain({"here": [value]})


def test_the_place_of_a_refused_value_is_named() -> None:
    with pytest.raises(RunError, match=r"^case\.rotor\.bearings\[1\]\.k: nan"):
        require_plain({"rotor": {"bearings": [{"k": 1.0}, {"k": math.nan}]}})


def test_a_tuple_shows_why_types_are_refused() -> None:
    """Papermill writes an unknown type's text between quotes without escaping it."""
    written = PythonTranslator.codify({"case": ('"+str(1)+"',)})
    assert not isinstance(ast.parse(written).body[0].value, ast.Constant)  # type: ignore[attr-defined]


def test_nesting_beyond_the_parser_is_refused() -> None:
    deep: list[Any] = []
    for _ in range(51):
        deep = [deep]
    with pytest.raises(RunError, match="nested deeper than 50 levels"):
        require_plain(deep)
    assert injected_value(PythonTranslator.codify({"case": deep[0]})) == deep[0]


@pytest.mark.parametrize(
    "source",
    [
        "case = {}\nimport os",
        "import os",
        "case = dict()",
        "case = {'a': __import__('os')}",
        "case = other = {}",
        "other = {}",
        "case: dict = {}",
        "case = (",
        "",
    ],
)
def test_an_injected_cell_that_is_more_than_a_literal_is_refused(source: str) -> None:
    with pytest.raises(RunError):
        injected_value(source)


def test_names_set_sees_the_top_level_only() -> None:
    assert names_set("a = b = 1\nc: int = 2\nd: int\ndef f():\n    e = 1") == {"a", "b", "c"}
    assert names_set("a = (") == set()
