"""The base of every part of a case: keys in plain words, checked with their places."""

from __future__ import annotations

import types
import typing
from collections.abc import Iterable, Iterator
from functools import cache
from typing import Annotated, Any, ClassVar

from pydantic import (
    BaseModel,
    BeforeValidator,
    ConfigDict,
    Field,
    StringConstraints,
    model_validator,
)
from pydantic_core.core_schema import ValidationInfo

from reportgen.case.given import Given, Status
from reportgen.case.nodes import ListNode, MapNode, ShortNode, TextNode
from reportgen.case.reading import Reading, described, fault, nearest
from reportgen.case.tables import Table


def words_of(name: str) -> str:
    """Return a field's key in a case file: ``maximum_continuous`` is ``maximum continuous``."""
    return name.rstrip("_").replace("_", " ")


class Section(BaseModel):
    """A mapping of a case file.

    A field's key is its name with spaces for underscores. ``words`` says what the section
    is, for messages; ``prefix`` and ``suffix`` stand around a given's title in print, where
    the field has no title of its own.
    """

    model_config = ConfigDict(
        frozen=True,
        extra="forbid",
        alias_generator=words_of,
        allow_inf_nan=False,
        validate_by_alias=True,
        validate_by_name=False,
        protected_namespaces=(),
    )
    words: ClassVar[str] = "a mapping"
    prefix: ClassVar[str] = ""
    suffix: ClassVar[str] = ""

    @model_validator(mode="before")
    @classmethod
    def _keys(cls, data: Any, info: ValidationInfo) -> Any:
        """Report unknown and missing keys, each at its place, and go on with the rest."""
        reading = info.context
        if not isinstance(reading, Reading):
            return data
        if not isinstance(data, MapNode):
            keys = ", ".join(f"{key}:" for key in _required(cls)) or "its keys"
            raise fault(reading, data, f"found {described(data)}", f"write {cls.words} with {keys}")
        return cls._known(data, reading)

    @classmethod
    def _known(cls, data: MapNode, reading: Reading) -> MapNode:
        aliases = [words_of(name) for name in cls.model_fields]
        kept = MapNode(data.path, data.mark)
        kept.key_marks = data.key_marks
        meant = set()
        for key, value in data.items():
            if key in aliases and value is not None:
                kept[key] = value
                continue
            if key in aliases:
                place = data.key_marks[key]
                remedy = "write its value after the colon, or leave the key out"
                reading.report(f"{key} is empty", remedy, place, data.child(key))
                continue
            near = nearest(key, (a for a in aliases if a not in data))
            meant.add(near)
            remedy = f"did you mean {near!r}?" if near else f"give one of {', '.join(aliases)}"
            what = f"the key {_short(key)} is not known here"
            reading.report(what, remedy, data.key_marks[key], data.child(key[:80]))
        for key in _required(cls):
            if key not in data and key not in meant:
                example = _example(cls, key)
                remedy = f"add {key}:{f', such as {key}: {example}' if example else ''}"
                what = f"{key} is missing"
                reading.report(what, remedy, data.mark, data.child(key))
        return kept


class GivenSection(Section):
    """A section that holds givens; its own source and status hold for those that state none."""

    source: str | None = None
    status: Status | None = None

    @classmethod
    def _known(cls, data: MapNode, reading: Reading) -> MapNode:
        kept = super()._known(data, reading)
        stated = {key: kept[key] for key in ("source", "status") if kept.get(key) is not None}
        if stated:
            for key, value in kept.items():
                if value is not None and key not in stated and _takes_givens(cls, key):
                    kept[key] = _handed_down(value, stated, _is_by_name(cls, key))
        return kept


def _handed_down(node: Any, stated: dict[str, Any], by_name: bool = False) -> Any:
    """Return a node with a section's source and status where it states none of its own."""
    if isinstance(node, MapNode) and by_name:
        named = type(node)(node.path, node.mark)
        named.key_marks = node.key_marks
        named.update({key: _handed_down(value, stated) for key, value in node.items()})
        return named
    if isinstance(node, ListNode):
        copy = ListNode(node.path, node.mark)
        copy.marks = node.marks
        copy.extend(_handed_down(item, stated) for item in node)
        return copy
    if isinstance(node, TextNode):
        node = ShortNode.of(node)
    if not isinstance(node, MapNode):
        return node
    copy_map = type(node)(node.path, node.mark)
    copy_map.key_marks = {**dict.fromkeys(stated, node.mark), **node.key_marks}
    copy_map.update(node)
    for key, value in stated.items():
        if copy_map.get(key) is None:
            copy_map[key] = value
    return copy_map


def walk(
    section: BaseModel, path: str = "", owner: str = ""
) -> Iterator[tuple[str, str, Given | Table]]:
    """Yield path, title and value of every given and side table, depth first, in order.

    ``owner`` names what the section belongs to, where it has no name of its own.
    """
    owner = getattr(section, "name", None) or owner
    for name in type(section).model_fields:
        value = getattr(section, name)
        at = f"{path}.{words_of(name)}" if path else words_of(name)
        if isinstance(value, (Given, Table)):
            yield at, title_of(section, name, owner), value
        elif isinstance(value, Section):
            yield from walk(value, at, owner)
        elif isinstance(value, tuple):
            for number, item in enumerate(value, 1):
                if isinstance(item, Section):
                    numbered = f"{type(item).prefix} {number}" if type(item).prefix else ""
                    yield from walk(item, f"{at}[{number}]", _joined(owner, numbered))
        elif isinstance(value, dict):
            for key, item in value.items():
                if isinstance(item, (Given, Table)):
                    yield f"{at}.{key}", key[:1].upper() + key[1:], item
                elif isinstance(item, Section):
                    yield from walk(item, f"{at}.{key}", f"{type(item).prefix} {key}".strip())


def _joined(owner: str, inner: str) -> str:
    return f"{owner}, {inner[:1].lower()}{inner[1:]}" if owner and inner else owner or inner


def title_of(section: BaseModel, name: str, owner: str = "") -> str:
    """Return a given's title in print, such as ``Shaft outer diameter``."""
    kind = type(section)
    prefix, words = getattr(kind, "prefix", ""), words_of(name)
    if stated := kind.model_fields[name].title:
        prefix, words = "", stated
    elif words == "both":
        words = ""
    if owner:
        said = prefix.lower() in owner.lower() or getattr(section, "name", None) == owner
        return _joined(owner, words if said else f"{prefix} {words}".strip())
    title = f"{prefix} {words} {kind.suffix if issubclass(kind, Section) else ''}".strip()
    return title[:1].upper() + title[1:]


@cache
def _required(cls: type[BaseModel]) -> tuple[str, ...]:
    return tuple(words_of(name) for name, f in cls.model_fields.items() if f.is_required())


@cache
def _takes_givens(cls: type[BaseModel], key: str) -> bool:
    """Tell whether the field under a key is a given, a section of givens, or a list of them."""
    for name, field in cls.model_fields.items():
        if words_of(name) == key:
            return any(_has_source(t) for t in _parts(field.annotation))
    return False


@cache
def _is_by_name(cls: type[BaseModel], key: str) -> bool:
    """Tell whether the field under a key holds sections by their names."""
    return any(
        words_of(name) == key and typing.get_origin(field.annotation) is dict
        for name, field in cls.model_fields.items()
    )


def _has_source(kind: Any) -> bool:
    return isinstance(kind, type) and (
        issubclass(kind, GivenSection) or {"source", "status"} <= set(_fields(kind))
    )


def _fields(kind: type) -> Iterable[str]:
    return kind.model_fields if issubclass(kind, BaseModel) else ()


def _parts(annotation: Any) -> Iterator[Any]:
    """Yield the plain types that an annotation is made of."""
    origin = typing.get_origin(annotation)
    if origin is Annotated:
        yield from _parts(typing.get_args(annotation)[0])
    elif origin in (typing.Union, types.UnionType, list, tuple, dict):
        for part in typing.get_args(annotation):
            yield from _parts(part)
    else:
        yield annotation


def _example(cls: type[BaseModel], key: str) -> str:
    for name, field in cls.model_fields.items():
        if words_of(name) == key and field.examples:
            return str(field.examples[0])
    return ""


def _short(text: str) -> str:
    return repr(text if len(text) <= 40 else f"{text[:40]}…")


def _text(value: Any, info: ValidationInfo) -> Any:
    """Return a text on one line, single spaces; numbers stand as they were typed."""
    if isinstance(info.context, Reading) and not isinstance(value, TextNode):
        remedy = "write a text, in quotes where it holds a colon"
        raise fault(info.context, value, f"found {described(value)}", remedy)
    return " ".join(value.split()) if isinstance(value, str) else value


# a schema's reader may have taken a text such as 1.10 for a number already
_TYPED = Field(json_schema_extra={"type": ["string", "number"]})

Line = Annotated[
    str, BeforeValidator(_text), StringConstraints(min_length=1, max_length=300), _TYPED
]
"""A short text."""

Prose = Annotated[str, BeforeValidator(_text), StringConstraints(min_length=1, max_length=4000)]
"""A text of some sentences."""

__all__ = ["GivenSection", "Line", "Prose", "Section", "title_of", "walk", "words_of"]
