"""Single files of a package, from its folder or straight from its zip."""

from __future__ import annotations

import os
import zipfile
from collections.abc import Iterator
from pathlib import Path
from typing import Protocol, Self

from reportgen.errors import PackageError
from reportgen.package.bag import PAYLOAD

LARGEST_READ = 64 << 20
"""Most bytes of one file that a register reads; real results are below one megabyte."""
_DEEPEST = 12


class PackageFiles(Protocol):
    """Files of a package by their path in it."""

    def __enter__(self) -> Self:
        """Open."""

    def __exit__(self, *reason: object) -> None:
        """Close."""

    def read(self, name: str) -> bytes | None:
        """Return a file's bytes, None where there is none."""

    def names(self) -> Iterator[str]:
        """Yield the paths of all files."""


class FolderFiles:
    """Files of a package that is a folder."""

    def __init__(self, path: Path) -> None:
        self.path = path

    def __enter__(self) -> Self:
        return self

    def __exit__(self, *reason: object) -> None:
        return None

    def read(self, name: str) -> bytes | None:
        """Return a file's bytes; a link is not followed."""
        place = self.path / name
        if place.is_symlink() or not place.is_file():
            return None
        if place.stat().st_size > LARGEST_READ:
            raise PackageError(f"{name} is larger than any that a run writes")
        return place.read_bytes()

    def names(self) -> Iterator[str]:
        """Yield the paths of all files."""
        yield from _names(str(self.path), "", 0)


def _names(folder: str, prefix: str, depth: int) -> Iterator[str]:
    if depth > _DEEPEST:
        raise PackageError("folders are nested deeper than in any package")
    with os.scandir(folder) as entries:
        for entry in entries:
            if entry.is_dir(follow_symlinks=False):
                yield from _names(entry.path, f"{prefix}{entry.name}/", depth + 1)
            else:
                yield prefix + entry.name


class ZipFiles:
    """Files of a package that is a zip; only what is asked for is read."""

    def __init__(self, path: Path) -> None:
        self.path = path

    def __enter__(self) -> Self:
        self.archive = zipfile.ZipFile(self.path)
        tops = {name.split("/")[0] for name in self.archive.namelist()}
        if len(tops) != 1:
            self.archive.close()
            raise PackageError("the zip does not hold one package folder")
        self.top = tops.pop() + "/"
        return self

    def __exit__(self, *reason: object) -> None:
        self.archive.close()

    def read(self, name: str) -> bytes | None:
        """Return a file's bytes."""
        try:
            entry = self.archive.getinfo(self.top + name)
        except KeyError:
            return None
        # a package's zip stores its files as they are: nothing here can swell
        if entry.compress_type != zipfile.ZIP_STORED or entry.file_size > LARGEST_READ:
            raise PackageError(f"{name} is compressed or too large for a package's zip")
        return self.archive.read(entry)

    def names(self) -> Iterator[str]:
        """Yield the paths of all files."""
        for name in self.archive.namelist():
            yield name.removeprefix(self.top)


def packages_below(folder: Path, depth: int = 0) -> Iterator[Path]:
    """Yield the folders and zips below a folder that are packages or look like one, sorted.

    A folder with ``bagit.txt`` or ``data/results.json`` counts, so that one that lost the other
    is found too. Hidden names are passed over: they are of runs in progress. So is a folder
    that cannot be read.
    """
    if depth > _DEEPEST:
        return
    try:
        with os.scandir(folder) as found:
            entries = sorted(found, key=lambda entry: entry.name)
    except OSError:
        return
    for entry in entries:
        if entry.name.startswith(".") or entry.is_symlink():
            continue
        path = folder / entry.name
        if entry.is_file(follow_symlinks=False):
            if entry.name.lower().endswith(".zip"):
                yield path
        elif entry.is_dir(follow_symlinks=False):
            if (path / "bagit.txt").is_file() or (path / PAYLOAD / "results.json").is_file():
                yield path
            else:
                yield from packages_below(path, depth + 1)
