r"""Equation lines: a formula, the same with values, and its result.

A formula is LaTeX in which each quantity that has a value stands in angle brackets:
``\omega_n = \sqrt{\frac{<k>}{<m>}}``. The formula prints the symbol, the substituted
line prints the value with its unit, and the result closes the line.
"""

from __future__ import annotations

import re
from collections.abc import Mapping

from reportgen import units
from reportgen.errors import PublishError
from reportgen.sheet.blocks import Equation, Inline

_MARK = re.compile(r"<([^<>]+)>")
Value = tuple[float, str]
"""A value in SI and the key of its quantity in :data:`reportgen.units.QUANTITIES`."""


def equation_line(
    block_id: str,
    title: Inline,
    formula: str,
    values: Mapping[str, Value],
    result: Value | None,
    system: units.System,
    alt: str = "",
    note: Inline = "",
) -> Equation:
    """Return the equation block of one line of calculation.

    Parameters
    ----------
    block_id, title
        Id that references use, and what is computed, in words.
    formula
        LaTeX with marked quantities; see the module's text.
    values
        Value of each marked quantity, by the symbol between the brackets.
    result
        The value of the left-hand side; None for a formula that states a method.
    system
        Unit system of the reader.
    alt
        The equation in words; made from the title and the result where empty.
    note
        A remark printed below the equation.

    Raises
    ------
    PublishError
        If a mark has no value or a value has no mark: the line would tell a falsehood.
    """
    marks = set(_MARK.findall(formula))
    if values and (unmatched := marks ^ set(values)):
        raise PublishError(
            f"equation {block_id!r}: marks and values do not match: {', '.join(sorted(unmatched))}"
        )
    left, _, right = formula.partition("=")
    block: Equation = {
        "kind": "equation",
        "id": block_id,
        "title": title,
        "formula": _MARK.sub(lambda m: m[1], formula),
    }
    if values:
        block["substituted"] = _MARK.sub(lambda m: _bracketed(*values[m[1]], system), right).strip()
    if result is not None:
        shown = units.show_latex(*result, system)
        block["result"] = f"{_MARK.sub(lambda m: m[1], left).strip()} = {shown}"
    block["alt"] = alt or _spoken(title, result, system)
    if note:
        block["note"] = note
    return block


def _bracketed(value: float, quantity: str, system: units.System) -> str:
    """Return the value with its unit, in brackets where a bare one could be misread."""
    shown = units.show_latex(value, quantity, system)
    bare = quantity == "ratio" and value >= 0 and "times" not in shown
    return shown if bare else rf"\left({shown}\right)"


def _spoken(title: Inline, result: Value | None, system: units.System) -> str:
    words = plain(title)
    return f"{words}: {units.show(*result, system)}" if result else f"Formula for: {words}"


def plain(inline: Inline) -> str:
    """Return an inline as plain words, for alternative texts."""
    if isinstance(inline, str):
        return inline
    if isinstance(inline, list):
        return "".join(plain(part) for part in inline)
    if "ref" in inline and "text" in inline:
        return plain(inline["text"])
    return plain(next(iter(inline.values())))
