"""YAML text as plain nodes that know where they stand.

Built from the parser's events, not from loaded values: every scalar stays the text it is
(a revision ``1.10`` or a number ``0417`` is not turned into another), and what YAML offers
beyond plain data (anchors, tags, several documents, keys that are not text) is refused at
its place.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterator
from pathlib import Path
from typing import Any, NamedTuple

from reportgen.errors import InputError, Problem

LARGEST_FILE = 1 << 20  # bytes; real cases are a hundredth of it
_DEEPEST = 20
_MOST_NODES = 10_000  # a long shaft in full takes some hundreds
_NULLS = {"", "~", "null", "Null", "NULL"}
# Text that a reader cannot see, or that changes the order of what stands around it, has no
# place in a document that is signed.
_UNSEEN = re.compile(r"[\x00-\x08\x0b\x0c\x0e-\x1f\x7f-\x9f\u202a-\u202e\u2066-\u2069\ufeff]")


class Mark(NamedTuple):
    """A place in a file, counted from 1."""

    line: int
    column: int


class TextNode(str):
    """A scalar; its text as it stands."""

    __slots__ = ("mark", "path")
    mark: Mark
    path: str

    @classmethod
    def of(cls, text: str, path: str, mark: Mark) -> TextNode:
        """Return the text with its place."""
        node = cls(text)
        node.path, node.mark = path, mark
        return node


class MapNode(dict[str, Any]):
    """A mapping; ``key_marks`` holds the place of each key."""

    def __init__(self, path: str, mark: Mark) -> None:
        super().__init__()
        self.path, self.mark = path, mark
        self.key_marks: dict[str, Mark] = {}

    def child(self, key: str) -> str:
        """Return the path of the value under a key."""
        return f"{self.path}.{key}" if self.path else key

    def place(self, key: str) -> Mark:
        """Return where the value under a key stands, or its key where there is no value."""
        value = self.get(key)
        return getattr(value, "mark", self.key_marks.get(key, self.mark))


class ShortNode(MapNode):
    """A mapping written short, as only the value of its first key; its path is that value's."""

    @classmethod
    def of(cls, text: TextNode) -> ShortNode:
        """Return what a text is short for."""
        node = cls(text.path, text.mark)
        node["value"] = text
        node.key_marks["value"] = text.mark
        return node

    def child(self, key: str) -> str:
        """Return the path of the value under a key."""
        del key
        return self.path


class ListNode(list[Any]):
    """A sequence; ``marks`` holds the place of each item."""

    def __init__(self, path: str, mark: Mark) -> None:
        super().__init__()
        self.path, self.mark = path, mark
        self.marks: list[Mark] = []


Node = TextNode | MapNode | ListNode | None


def read_text(path: Path, kind: str = "case file") -> tuple[bytes, str]:
    """Return a text file's bytes and text.

    Raises
    ------
    InputError
        If there is no such file, it cannot be read, is larger than 1 MiB, is binary, or is
        not UTF-8.
    """
    name = str(path)

    def at_fault(message: str, remedy: str, line: int = 0, column: int = 0) -> InputError:
        return InputError(Problem(message, remedy, file=name, line=line, column=column))

    try:
        if not path.is_file():
            found = "is a folder" if path.is_dir() else "does not exist"
            if path.exists() and not path.is_dir():
                found = "is not a regular file"
            raise at_fault(f"this {kind} {found}", "check the path")
        with path.open("rb") as stream:
            content = stream.read(LARGEST_FILE + 1)
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise at_fault(f"this {kind} cannot be read: {reason}", "check the path") from None
    if len(content) > LARGEST_FILE:
        raise at_fault(f"this {kind} is larger than 1 MiB", "give plain data only, no pictures")
    if content.startswith((b"\xff\xfe", b"\xfe\xff")):
        raise at_fault(f"this {kind} is UTF-16, not UTF-8", "save it as UTF-8")
    if b"\x00" in content:
        offset = content.index(b"\x00")
        raise at_fault(f"this {kind} is binary: a zero byte at offset {offset}", "give a text file")
    try:
        text = content.decode("utf-8")
    except UnicodeDecodeError as error:
        before = content[: error.start]
        raise at_fault(
            f"this {kind} is not UTF-8: byte 0x{content[error.start]:02x} at offset {error.start}",
            "save it as UTF-8",
            before.count(b"\n") + 1,
            len(before.rpartition(b"\n")[2].decode("utf-8")) + 1,
        ) from None
    text = text.removeprefix("\ufeff")
    if unseen := _UNSEEN.search(text):
        before_text = text[: unseen.start()]
        raise at_fault(
            f"this {kind} holds {_named(unseen[0])}, which cannot be seen",
            "delete it",
            before_text.count("\n") + 1,
            len(before_text.rpartition("\n")[2]) + 1,
        )
    return content, text


def _named(character: str) -> str:
    name = unicodedata.name(character, "a control character")
    return f"U+{ord(character):04X} ({name.lower()})"


def read_nodes(text: str, file: str) -> Node:
    """Return the nodes of a YAML text.

    Raises
    ------
    InputError
        With every problem that leaves the rest readable, or the one that does not.
    """
    return _Builder(text, file).build()


class _Builder:
    def __init__(self, text: str, file: str) -> None:
        self.text, self.file = text, file
        self.problems: list[Problem] = []
        self.count = 0

    def build(self) -> Node:
        from ruamel.yaml import YAML
        from ruamel.yaml.error import YAMLError

        self.events: Iterator[Any] = iter(YAML(typ="safe", pure=True).parse(self.text))
        try:
            root = self._document()
        except YAMLError as error:
            self._syntax(error)
            root = None
        except (ValueError, OverflowError, IndexError, AttributeError, AssertionError) as error:
            # the parser's own slips on text that is not YAML
            self._report(f"this is not YAML: {error}", "see the demo cases", None)
            root = None
        if self.problems:
            raise InputError(self.problems)
        return root

    def _document(self) -> Node:
        root: Node = None
        documents = 0
        for event in self.events:
            kind = type(event).__name__
            if kind == "DocumentStartEvent":
                documents += 1
                if documents > 1:
                    self._report(
                        "a second document starts here", "give one case a file", event.start_mark
                    )
                    return None
            elif kind not in ("StreamStartEvent", "StreamEndEvent", "DocumentEndEvent"):
                root = self._node(event, "", 0)
        return root

    def _node(self, event: Any, path: str, depth: int) -> Node:
        kind = type(event).__name__
        self.count += 1
        if self.count > _MOST_NODES or depth > _DEEPEST:
            what = f"more than {_MOST_NODES} values" if depth <= _DEEPEST else "nested too deep"
            raise InputError(
                [*self.problems, self._problem(f"{what}", "see the demo cases", event.start_mark)]
            )
        mark = self._mark(event.start_mark)
        if kind == "AliasEvent":
            self._report(f"an alias, *{event.anchor}", "write the value itself", event.start_mark)
            return None
        if event.anchor is not None:
            self._report(f"an anchor, &{event.anchor}", "write without anchors", event.start_mark)
        tag = getattr(event, "tag", None)
        if tag is not None and str(tag) != "!":
            self._report(f"a tag, {str(tag)[:40]}", "write plain values", event.start_mark)
        if kind == "ScalarEvent":
            return self._scalar(event, path, mark)
        if kind == "SequenceStartEvent":
            return self._sequence(path, mark, depth)
        return self._mapping(path, mark, depth)

    def _scalar(self, event: Any, path: str, mark: Mark) -> TextNode | None:
        plain = event.style is None or event.style == ""
        if plain and event.value in _NULLS:
            return None
        value = unicodedata.normalize("NFC", event.value)
        if unseen := _UNSEEN.search(value) or re.search("[\ud800-\udfff\ufffe\uffff]", value):
            self._report(f"the text holds {_named(unseen[0])}", "delete it", event.start_mark)
        return TextNode.of(value, path, mark)

    def _sequence(self, path: str, mark: Mark, depth: int) -> ListNode:
        node = ListNode(path, mark)
        for event in self.events:
            if type(event).__name__ == "SequenceEndEvent":
                return node
            node.marks.append(self._mark(event.start_mark))
            node.append(self._node(event, f"{path}[{len(node) + 1}]", depth + 1))
        return node

    def _mapping(self, path: str, mark: Mark, depth: int) -> MapNode:
        node = MapNode(path, mark)
        for event in self.events:
            if type(event).__name__ == "MappingEndEvent":
                return node
            key = self._node(event, path, depth + 1)
            place = self._mark(event.start_mark)
            if not isinstance(key, TextNode):
                if type(event).__name__ != "AliasEvent":
                    self._report("a key that is not a word", "write key: value", event.start_mark)
                key = None
            elif key in node:
                first = node.key_marks[key].line
                self._report(
                    f"the key {_short(key)} stands here a second time, first on line {first}",
                    "keep one of the two",
                    event.start_mark,
                    node.child(key),
                )
            name = str(key) if key is not None else ""
            value = self._node(next(self.events), node.child(name[:80]), depth + 1)
            if key is not None:
                node.setdefault(name, value)
                node.key_marks.setdefault(name, place)
        return node

    @staticmethod
    def _mark(mark: Any) -> Mark:
        return Mark(mark.line + 1, mark.column + 1)

    def _problem(self, message: str, remedy: str, mark: Any, field: str = "") -> Problem:
        line, column = self._mark(mark) if mark is not None else (0, 0)
        return Problem(message, remedy, self.file, line, column, field)

    def _report(self, message: str, remedy: str, mark: Any, field: str = "") -> None:
        self.problems.append(self._problem(message, remedy, mark, field))

    def _syntax(self, error: Any) -> None:
        mark = getattr(error, "problem_mark", None) or getattr(error, "context_mark", None)
        words = getattr(error, "problem", None) or str(error).splitlines()[0]
        remedy = "check indentation, colons, quotes and brackets at this place"
        if "\\t" in words:
            remedy = "indent with spaces, not with tabs"
        self._report(f"this is not YAML: {words}", remedy, mark)


def _short(text: str, longest: int = 40) -> str:
    return repr(str(text) if len(text) <= longest else f"{text[:longest]}…")
