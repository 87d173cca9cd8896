"""The case as a cell of a notebook: only plain data goes in, and only a literal comes out."""

from __future__ import annotations

import ast
import math
from typing import Any

from reportgen.errors import RunError

PARAMETER = "case"
"""Name that a template's parameters cell gives a value to and that a run replaces."""

_DEEPEST = 50  # levels; Python's parser stops at about a hundred brackets
_LARGEST = 2**63  # what any reader of JSON holds as an integer


def require_plain(value: object, where: str = PARAMETER, depth: int = 0) -> None:
    """Refuse whatever does not come back equal from JSON and from a Python literal.

    Parameters
    ----------
    value
        A resolved case or a part of one.
    where
        Path of the part, for the message.
    depth
        Levels above the part.

    Raises
    ------
    RunError
        For a type other than dict, list, str, int, float, bool, None (subclasses count as
        other types: they may print as anything), a key that is not a string, a number that is
        not finite, an integer beyond 64 bits, text that is not Unicode, or more than 50 levels.
    """
    if depth > _DEEPEST:
        raise RunError(f"{where}: nested deeper than {_DEEPEST} levels")
    kind = type(value)
    if value is None or kind is bool:
        return
    if kind is str:
        _require_unicode(str(value), where)
    elif isinstance(value, float) and kind is float:
        if not math.isfinite(value):
            raise RunError(f"{where}: {value} is not a finite number")
    elif isinstance(value, int) and kind is int:
        if abs(value) >= _LARGEST:
            raise RunError(f"{where}: an integer of more than 64 bits")
    elif isinstance(value, list) and kind is list:
        for index, item in enumerate(value):
            require_plain(item, f"{where}[{index}]", depth + 1)
    elif isinstance(value, dict) and kind is dict:
        for key, item in value.items():
            if type(key) is not str:
                raise RunError(f"{where}: the key {key!r} is not a string")
            _require_unicode(key, where)
            require_plain(item, f"{where}.{key}", depth + 1)
    else:
        raise RunError(f"{where}: a value of type {kind.__name__} cannot be put in a notebook")


def _require_unicode(text: str, where: str) -> None:
    try:
        text.encode("utf-8")
    except UnicodeEncodeError as error:
        raise RunError(f"{where}: text that is not Unicode, {text!r}") from error


def names_set(source: str) -> set[str]:
    """Names to which the top level of a cell gives a value; none if it is not Python."""
    try:
        body = ast.parse(source).body
    except (SyntaxError, ValueError):
        return set()
    found: set[str] = set()
    for statement in body:
        targets: list[ast.expr] = []
        if isinstance(statement, ast.Assign):
            targets = statement.targets
        elif isinstance(statement, ast.AnnAssign) and statement.value is not None:
            targets = [statement.target]
        found.update(target.id for target in targets if isinstance(target, ast.Name))
    return found


def injected_value(source: str) -> Any:
    """Read an injected cell back as data, never running it.

    Parameters
    ----------
    source
        Source of the cell that papermill wrote.

    Returns
    -------
    Any
        The value that ``case`` would have.

    Raises
    ------
    RunError
        If the cell is anything but one assignment of one literal to ``case``.
    """
    try:
        body = ast.parse(source).body
        if len(body) == 1 and isinstance(body[0], ast.Assign):
            (target,) = body[0].targets
            if isinstance(target, ast.Name) and target.id == PARAMETER:
                return ast.literal_eval(body[0].value)
    except (SyntaxError, ValueError, RecursionError, MemoryError) as error:
        raise RunError(f"the injected case is not a literal: {error}") from error
    raise RunError("the injected case is not one assignment of a literal")
