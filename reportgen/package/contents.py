"""A package's files, read once and strictly; everything is judged on what was read."""

from __future__ import annotations

import os
import stat
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path

from reportgen.errors import PackageError

LARGEST_PACKAGE = 1 << 30
"""Most bytes that a package may hold; a case, its report and tables stay far below."""

MOST_FILES = 10_000
_DEEPEST = 16


@dataclass(frozen=True)
class Check:
    """One thing that was looked at.

    Parameters
    ----------
    kind
        What sort of thing: container, layout, file, manifest, document, signature,
        certificate, statement, order, pdf, time stamp.
    subject
        The file or sign-off that it is about.
    ok
        Whether it is as it must be.
    detail
        What was found.
    """

    kind: str
    subject: str
    ok: bool
    detail: str


@dataclass(frozen=True)
class Contents:
    """What a package holds.

    Parameters
    ----------
    name
        Name of the package's folder.
    files
        Content by path relative to the package, parts separated by ``/``.
    faults
        What a package must not hold: links, empty folders, special files.
    """

    name: str
    files: Mapping[str, bytes]
    faults: tuple[Check, ...] = field(default=())

    def below(self, prefix: str) -> dict[str, bytes]:
        """Give the files whose path begins with ``prefix``, by the rest of their path."""
        return {
            path.removeprefix(prefix): content
            for path, content in self.files.items()
            if path.startswith(prefix)
        }


def read_folder(path: Path) -> Contents:
    """Read a package's folder; follows no link and opens nothing but plain files.

    Raises
    ------
    PackageError
        There is no such folder, it cannot be read, or it is larger than any package.
    """
    if not path.is_dir():
        raise PackageError(f"{path}: there is no package here")
    reader = _Reader()
    if path.is_symlink():
        reader.fault(path.name, "the package's folder is a link")
    try:
        reader.read(path)
    except OSError as error:
        place = error.filename or path
        raise PackageError(f"{place}: cannot be read: {error.strerror}") from error
    return Contents(path.absolute().name, reader.files, tuple(reader.faults))


class _Reader:
    def __init__(self) -> None:
        self.files: dict[str, bytes] = {}
        self.faults: list[Check] = []
        self.size = 0

    def fault(self, subject: str, detail: str) -> None:
        self.faults.append(Check("layout", subject, False, detail))

    def read(self, folder: Path, prefix: str = "", depth: int = 0) -> None:
        if depth > _DEEPEST:
            raise PackageError(f"{folder}: folders are nested deeper than in any package")
        with os.scandir(folder) as entries:
            found = sorted(entries, key=lambda entry: entry.name)
        if not found:
            self.fault(prefix or folder.name, "empty folder")
        for entry in found:
            name = prefix + entry.name
            if entry.is_symlink():
                self.fault(name, "a link, not a file")
            elif entry.is_dir(follow_symlinks=False):
                self.read(folder / entry.name, name + "/", depth + 1)
            elif not entry.is_file(follow_symlinks=False):
                self.fault(name, "neither a file nor a folder")
            else:
                self.add(name, _read_file(folder / entry.name))

    def add(self, name: str, content: bytes) -> None:
        self.files[name] = content
        self.size += len(content)
        if len(self.files) > MOST_FILES or self.size > LARGEST_PACKAGE:
            raise PackageError(
                f"{name}: with it there are more than {MOST_FILES} files, or more than "
                f"{LARGEST_PACKAGE:,} bytes; this is no package"
            )


def _read_file(path: Path) -> bytes:
    flags = os.O_RDONLY | getattr(os, "O_NOFOLLOW", 0) | getattr(os, "O_NONBLOCK", 0)
    descriptor = os.open(path, flags | getattr(os, "O_BINARY", 0))
    with os.fdopen(descriptor, "rb") as file:
        status = os.fstat(file.fileno())
        if not stat.S_ISREG(status.st_mode):
            raise PackageError(f"{path}: changed from a file to something else while it was read")
        if status.st_size > LARGEST_PACKAGE:
            raise PackageError(f"{path}: larger than any package")
        return file.read(LARGEST_PACKAGE + 1)
