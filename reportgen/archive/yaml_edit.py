"""Changing a YAML text by paths, its comments, order and quotes kept."""

from __future__ import annotations

import io
import re
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from reportgen.case.nodes import read_text
from reportgen.case.reading import nearest
from reportgen.errors import InputError, Problem

_STEP = re.compile(r"(?P<key>[^.\[\]]+)|\[(?P<item>\d+)\]")


def loaded(path: Path) -> tuple[str, Any, Any]:
    """Return a YAML file's text, its data with comments, and what writes them again."""
    _, text = read_text(path)
    yaml = _reader()
    sequence, offset = _indentation(text)
    yaml.indent(mapping=2, sequence=sequence, offset=offset)
    return text, yaml.load(text), yaml


def _reader() -> Any:
    """Return a reader and writer that keeps comments, and every scalar as the text it is."""
    from ruamel.yaml import YAML, ScalarNode
    from ruamel.yaml.resolver import VersionedResolver

    class Words(VersionedResolver):
        """No 1.10 becomes 1.1, no 0417 an octal, no date another."""

        def resolve(self, kind: Any, value: Any, implicit: Any) -> Any:
            if kind is ScalarNode:
                return self.DEFAULT_SCALAR_TAG
            return super().resolve(kind, value, implicit)

    yaml = YAML(typ="rt")
    yaml.Resolver = Words
    yaml.preserve_quotes = True
    yaml.width = 10_000
    return yaml


def _indentation(text: str) -> tuple[int, int]:
    """Return how the file indents its lists: width of an item, place of its hyphen."""
    found = re.search(r"^( *)[^\s#-][^\n]*:[ \t]*(?:#[^\n]*)?\n(?: *(?:#[^\n]*)?\n)*( *)- ",
                      text, re.MULTILINE)  # fmt: skip
    offset = len(found[2]) - len(found[1]) if found else 2
    return offset + 2, max(offset, 0)


def dumped(data: Any, yaml: Any, like: str) -> str:
    """Return data as text, with the line ends of the text that it was read from."""
    out = io.StringIO()
    yaml.dump(data, out)
    text = out.getvalue()
    return text.replace("\n", "\r\n") if "\r\n" in like else text


def value_of(text: str) -> Any:
    """Return a value as written: a mapping or list in braces or brackets, else a text."""
    if text[:1] not in ("{", "["):
        return scalar(text)
    from ruamel.yaml.error import YAMLError

    try:
        return _reader().load(text)
    except YAMLError as error:
        found = f"{text!r} is not YAML: {getattr(error, 'problem', None) or error}"
        raise InputError(Problem(found, "check brackets, braces and quotes")) from None


def scalar(text: str) -> Any:
    """Return a text as it is to be written."""
    from ruamel.yaml.scalarstring import DoubleQuotedScalarString

    # what YAML reads as nothing stands in quotes; the writer sees to all else
    return DoubleQuotedScalarString(text) if text in ("~", "null", "Null", "NULL") else text


def steps(path: str) -> list[str | int]:
    """Return the keys and items (from 0) of a path such as ``criteria[2].margin``.

    Raises
    ------
    InputError
        If it is no path.
    """
    found: list[str | int] = []
    end = 0
    for match in _STEP.finditer(path):
        between = path[end : match.start()]
        if between not in (("", ".") if match["key"] else ("",)) or (not found and between):
            break
        if match["item"] is not None:
            if int(match["item"]) == 0:
                raise InputError(Problem("items count from 1", "write [1] for the first", "", 0, 0,
                                         path))  # fmt: skip
            found.append(int(match["item"]) - 1)
        else:
            found.append(match["key"].strip())
        end = match.end()
    if end != len(path) or not found or not isinstance(found[0], str):
        remedy = "write keys with points and items in brackets, as in criteria[2].margin"
        raise InputError(Problem(f"{path!r} is no path", remedy))
    return found


def parent(data: Any, path: str) -> tuple[Any, str | int]:
    """Return the mapping or list that holds a path's last part, and that part.

    Raises
    ------
    InputError
        If the path leads nowhere.
    """
    parts = steps(path)
    at = data
    for part in parts[:-1]:
        at = _child(at, part, path)
    return at, parts[-1]


def _child(at: Any, part: str | int, path: str) -> Any:
    if isinstance(part, int):
        if not isinstance(at, list):
            raise InputError(Problem("there is no list here", "leave the brackets out", field=path))
        if part >= len(at):
            found = f"the list has {len(at)} items, none of number {part + 1}"
            raise InputError(Problem(found, f"give 1 to {len(at)}", field=path))
        return at[part]
    if not isinstance(at, Mapping):
        raise InputError(Problem(f"{part!r} lies below a single value", "give its parent a mapping",
                                 field=path))  # fmt: skip
    if part not in at:
        near = nearest(part, [str(key) for key in at])
        remedy = f"did you mean {near!r}?" if near else f"there are {', '.join(map(str, at))}"
        raise InputError(Problem(f"there is no {part!r} here", remedy, field=path))
    return at[part]


def set_value(data: Any, path: str, value: Any) -> None:
    """Set the value at a path; the next item of a list is appended, a new key is added.

    A text set where a given stands as a mapping replaces its value, and leaves its source.

    Raises
    ------
    InputError
        If the path leads nowhere, or a text is set in place of a section.
    """
    at, last = parent(data, path)
    if isinstance(last, int):
        if isinstance(at, list) and last == len(at):
            at.append(value)
            return
        old = _child(at, last, path)
    else:
        if not isinstance(at, dict):
            if last in ("source", "status", "tolerance", "distribution", "value"):
                _widen(data, path, at, str(last), value)
                return
            _child(at, last, path)
        old = at.get(last)
    if isinstance(old, dict) and "value" in old and isinstance(value, str):
        old["value"] = value
    elif isinstance(old, (Mapping, list)) and isinstance(value, str):
        found = "a section stands here, not a value"
        keys = ", ".join(map(str, old)) if isinstance(old, Mapping) else f"[1] to [{len(old)}]"
        raise InputError(Problem(found, f"set one of {keys}", field=path))
    else:
        at[last] = value


def _widen(data: Any, path: str, short: Any, key: str, value: Any) -> None:
    """Set a source or tolerance of a given that is written short, as its value alone."""
    above = path.rpartition(".")[0]
    at, last = parent(data, above)
    at[last] = flow({"value": str(short), key: value})


def flow(pairs: Mapping[str, Any]) -> Any:
    """Return a mapping that is written in braces on one line."""
    from ruamel.yaml.comments import CommentedMap

    made = CommentedMap(pairs)
    made.fa.set_flow_style()
    return made


def remove(data: Any, path: str) -> None:
    """Take a key or an item out."""
    at, last = parent(data, path)
    _child(at, last, path)
    del at[last]
