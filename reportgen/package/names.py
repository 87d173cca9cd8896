"""Names of packages and of the files in them.

A name must mean the same file on every system that a package may pass through, so the
rules are those of the strictest one: NFC, no ``%`` (BagIt escapes with it), no characters
that Windows refuses, no reserved device names.
"""

from __future__ import annotations

import re
import unicodedata
from pathlib import PurePosixPath

from reportgen.errors import PackageError

LONGEST_NAME = 120
"""Longest package name, bytes of UTF-8; leaves room for the name of a temporary folder."""

_FORBIDDEN = re.compile(r'[<>:"/\\|?*%]')
_RESERVED = re.compile(r"(?i)(con|prn|aux|nul|com[0-9¹²³]|lpt[0-9¹²³])(\..*)?")
_UNPRINTABLE = {"Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp"}


def package_name(number: str, revision: str) -> str:
    """Give the folder name of a document, ``<number>_<revision>``.

    Parameters
    ----------
    number, revision
        As printed on the document. Characters that a file name cannot hold on some
        system (separators, ``%``, line ends) become ``-``.

    Raises
    ------
    PackageError
        Nothing is left of a part, the name is reserved on Windows, or it is too long.
    """
    parts = []
    for title, text in (("number", number), ("revision", revision)):
        part = _clean(text)
        if not part:
            raise PackageError(
                f"the document's {title} {text!r} holds nothing that a folder name can hold; "
                "use letters and digits"
            )
        parts.append(part)
    name = "_".join(parts)
    if _RESERVED.fullmatch(parts[0]) or _RESERVED.fullmatch(name):
        raise PackageError(
            f"the document number {number!r} is a name that Windows reserves for a device; "
            "use another number"
        )
    if len(name.encode()) > LONGEST_NAME:
        raise PackageError(
            f"number and revision make a folder name of {len(name.encode())} bytes; "
            f"at most {LONGEST_NAME} are allowed"
        )
    return name


def _clean(text: str) -> str:
    text = unicodedata.normalize("NFC", text)
    text = "".join("-" if unicodedata.category(c) in _UNPRINTABLE else c for c in text)
    text = _FORBIDDEN.sub("-", text)
    return re.sub(r"\s+", "-", text.strip()).lstrip(".").rstrip(".")


def name_fault(path: str) -> str:
    """Say what is wrong with a file's path in a package; empty if nothing is.

    Parameters
    ----------
    path
        Relative to the package, parts separated by ``/``.
    """
    if not path:
        return "empty name"
    if unicodedata.normalize("NFC", path) != path:
        return "not in Unicode normal form C"
    if any(unicodedata.category(c) in _UNPRINTABLE for c in path):
        return "holds a control, format or unassigned character"
    if path.startswith("/"):
        return "absolute path"
    for part in path.split("/"):
        if part in ("", ".", ".."):
            return f"holds the path part {part!r}"
        if _FORBIDDEN.search(part):
            return f"holds one of the characters {_FORBIDDEN.pattern[1:-1]}"
        if _RESERVED.fullmatch(part):
            return "is reserved on Windows"
        if part != part.strip() or part.endswith("."):
            return "begins or ends with a space, or ends with a full stop"
        if len(part.encode()) > 255:
            return "is longer than 255 bytes"
    return ""


def clashes(paths: list[str]) -> list[tuple[str, str]]:
    """Give pairs of paths that are one file where case is not told apart, or file and folder."""
    seen: dict[str, str] = {}
    found = []
    for path in sorted(paths):
        key = path.casefold()
        if key in seen:
            found.append((seen[key], path))
        seen[key] = path
    for path in sorted(paths):
        for parent in PurePosixPath(path.casefold()).parents:
            if str(parent) in seen:
                found.append((seen[str(parent)], path))
    return found
