"""Reading a case file: all problems at once, each with its place."""

from __future__ import annotations

import re
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from reportgen.case.base import words_of
from reportgen.case.case import Case
from reportgen.case.models import MODELS, model_of
from reportgen.case.nodes import ListNode, MapNode, Mark, TextNode, read_nodes, read_text
from reportgen.case.reading import CHECK, REPORTED, Reading, described, nearest
from reportgen.errors import InputError, Problem

_MOST_SHOWN = 100
_RUN_ADDS = ("template_record", "provenance")


def read_case(path: Path) -> Case:
    """Read a case file and the side tables that it names.

    Parameters
    ----------
    path
        A YAML file; side tables are named from its folder.

    Returns
    -------
    Case
        The model of the case's template, validated, in SI.

    Raises
    ------
    InputError
        With every problem found, in the order of the file.
    """
    _, text = read_text(path)
    reading = Reading(str(path), path.parent)
    root = read_nodes(text, reading.file)
    model = _model_for(root, reading)
    case = None
    if model is not None and isinstance(root, MapNode):
        try:
            case = model.model_validate(root, context=reading)
        except ValidationError as error:
            _gather(error, root, reading)
    if case is None or reading.problems:
        raise InputError(_in_order(reading.problems))
    case._sides.update(reading.sides)
    return case


def from_resolved(resolved: Mapping[str, Any]) -> Case:
    """Return the case whose :meth:`Case.resolved` form this is.

    Raises
    ------
    InputError
        If it is not one.
    """
    plain = {key: value for key, value in resolved.items() if key not in _RUN_ADDS}
    model = model_of(str(plain.get("template", "")))
    if model is None:
        found = f"there is no template {plain.get('template')!r}"
        raise InputError(Problem(found, f"give one of {', '.join(MODELS)}", field="template"))
    try:
        return model.model_validate(plain, by_name=True, by_alias=False)
    except ValidationError as error:
        raise InputError(
            [
                Problem(e["msg"], field=".".join(str(part) for part in e["loc"]))
                for e in error.errors(include_url=False)
            ]
        ) from None


def side_files(case: Case) -> dict[str, bytes]:
    """Return the side tables of a case as they were read, by their names."""
    return dict(case._sides)


def _model_for(root: Any, reading: Reading) -> type[Case] | None:
    if not isinstance(root, MapNode):
        place = getattr(root, "mark", Mark(1, 1))
        remedy = "a case begins with reportgen: 1 and template:"
        reading.report(f"found {described(root)}, not a case", remedy, place, "")
        return None
    name = root.get("template")
    if not isinstance(name, TextNode):
        found = "template is missing" if "template" not in root else f"found {described(name)}"
        place = root.place("template") if "template" in root else root.mark
        reading.report(found, f"write template:, one of {', '.join(MODELS)}", place, "template")
        return None
    model = model_of(name)
    if model is None:
        near = nearest(name, MODELS)
        remedy = (
            f"did you mean {near!r}?"
            if near
            else (f"give one of {', '.join(MODELS)}, or the path of a notebook of your own")
        )
        found = f"there is no template {described(name)}"
        reading.report(found, remedy, name.mark, "template")
    return model


def _gather(error: ValidationError, root: MapNode, reading: Reading) -> None:
    """Add what the models found to the reading, in words."""
    before = [p for p in reading.problems if p.file == reading.file]
    for one in error.errors(include_url=False):
        if one["type"] in (REPORTED, "missing"):
            continue
        node, place, path = _find(root, one["loc"])
        if one["type"] == CHECK and isinstance(node, MapNode) and _faulty(node, before):
            continue  # what hangs together cannot be judged while a key is amiss
        context: dict[str, Any] = one.get("ctx", {})
        message, remedy = _in_words(one["type"], one["msg"], context, node)
        key = words_of(str(context.get("key", "")))
        if key and isinstance(node, MapNode):
            place, path = node.place(key), node.child(key)
        elif one["type"] == "union_tag_invalid" and isinstance(node, MapNode):
            place, path = node.place("kind"), node.child("kind")
        reading.report(message, remedy, place, path)


def _faulty(node: MapNode, problems: list[Problem]) -> bool:
    under = f"{node.path}." if node.path else ""
    return any(problem.field.startswith(under) for problem in problems)


def _find(root: MapNode, loc: tuple[int | str, ...]) -> tuple[Any, Mark, str]:
    """Return the node that an error is about, its place and its path."""
    node: Any = root
    place, path = root.mark, ""
    for part in loc:
        if isinstance(node, MapNode) and part in node:
            place, path = node.place(str(part)), node.child(str(part))
            node = node[str(part)]
        elif isinstance(node, ListNode) and isinstance(part, int) and part < len(node):
            place, path = node.marks[part], f"{node.path}[{part + 1}]"
            node = node[part]
    return node, place, path


def _in_words(kind: str, message: str, context: dict[str, Any], node: Any) -> tuple[str, str]:
    if kind == CHECK:
        return str(context["message"]), str(context["remedy"])
    if kind in ("literal_error", "union_tag_invalid"):
        given = context.get("tag", node)
        choices = re.findall(r"'([^']*)'", str(context.get("expected_tags", "")) or "")
        choices = choices or re.findall(r"'([^']*)'", str(context.get("expected", "")))
        near = nearest(str(given), choices) if isinstance(given, str) else ""
        all_of = f"give one of {', '.join(choices)}" if choices else f"write {context['expected']}"
        return f"found {described(given)}", f"did you mean {near!r}?" if near else all_of
    if kind == "union_tag_not_found":
        return "kind is missing", "add kind:, such as kind: separation margin"
    if kind in ("list_type", "tuple_type"):
        return f"found {described(node)}", "write a list, each item after a hyphen"
    if kind in ("string_too_long", "too_long"):
        what = "a text" if isinstance(node, TextNode) else "a list"
        return f"{what} longer than {context['max_length']}", "shorten it"
    if kind in ("string_too_short", "too_short"):
        return "nothing is written here", "write it, or leave the key out"
    if kind in ("int_parsing", "int_from_float", "int_type"):
        return f"found {described(node)}", "write a whole number"
    return f"found {described(node)}: {message[:1].lower()}{message[1:]}", ""


def _in_order(problems: list[Problem]) -> list[Problem]:
    """Return the problems in the order of the file, each once, no more than can be read."""
    unique = sorted(dict.fromkeys(problems), key=lambda p: (p.file, p.line, p.column))
    if len(unique) <= _MOST_SHOWN:
        return unique
    more = Problem(f"and {len(unique) - _MOST_SHOWN} more problems", "mend these first",
                   unique[0].file)  # fmt: skip
    return [*unique[:_MOST_SHOWN], more]
