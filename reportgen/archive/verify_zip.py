"""Reading a package's zip without trusting it: judged before anything is taken out."""

from __future__ import annotations

import stat
import zipfile
from collections import Counter
from collections.abc import Iterator
from io import BytesIO
from pathlib import Path

from reportgen.errors import PackageError
from reportgen.package.contents import LARGEST_PACKAGE, MOST_FILES, Check, Contents
from reportgen.package.names import clashes, name_fault
from reportgen.package.zipped import zip_bytes

_ENCRYPTED = 0x1


def read_zip(path: Path) -> Contents:
    """Read the package in a zip; nothing is written to the disk.

    Only a zip that is byte for byte the one that the package makes is without fault: two
    programs could read any other differently. Where an entry is dangerous (it leads out of
    the folder, is a link, is there twice, or unpacks to more than the zip holds), nothing
    is read at all.

    Raises
    ------
    PackageError
        The file cannot be read, or is larger than any package.
    """
    try:
        if path.stat().st_size > LARGEST_PACKAGE:
            raise PackageError(f"{path}: larger than any package")
        content = path.read_bytes()
    except OSError as error:
        raise PackageError(f"{path}: cannot be read: {error.strerror}") from error
    return read_zip_bytes(path.stem, content)


def read_zip_bytes(stem: str, content: bytes) -> Contents:
    """Read the package in a zip's bytes; ``stem`` is the zip's name without ``.zip``."""
    try:
        return _read(stem, content)
    except (zipfile.BadZipFile, NotImplementedError, ValueError, EOFError, OSError) as error:
        fault = Check("container", f"{stem}.zip", False, f"is no intact zip: {error}")
        return Contents(stem, {}, (fault,))


def _read(stem: str, content: bytes) -> Contents:
    with zipfile.ZipFile(BytesIO(content)) as archive:
        entries = archive.infolist()
        if faults := tuple(_faults(entries, len(content))):
            return Contents(stem, {}, faults)
        name = entries[0].filename.split("/")[0]
        files = {entry.filename.removeprefix(name + "/"): archive.read(entry) for entry in entries}
    if zip_bytes(name, files) == content:
        return Contents(name, files, ())
    detail = (
        "is not the zip that this package makes (re-packed or changed); "
        "unpack it and verify the folder"
    )
    return Contents(name, files, (Check("container", f"{stem}.zip", False, detail),))


def _faults(entries: list[zipfile.ZipInfo], size: int) -> Iterator[Check]:
    if not entries:
        yield Check("container", "zip", False, "is empty")
        return
    if len(entries) > MOST_FILES:
        yield Check("container", "zip", False, f"holds more than {MOST_FILES} entries")
        return
    names = [entry.filename for entry in entries]
    for entry in entries:
        if fault := _entry_fault(entry):
            yield Check("container", entry.filename, False, fault)
    for name in sorted(name for name, count in Counter(names).items() if count > 1):
        yield Check("container", name, False, "is in the zip more than once")
    for one, other in clashes(sorted(set(names))):
        yield Check("container", other, False, f"collides with {one}")
    if sum(entry.file_size for entry in entries) > size:
        yield Check("container", "zip", False, "would unpack to more than it holds: a bomb")
    tops = {name.split("/")[0] for name in names}
    if len(tops) > 1 or any("/" not in name for name in names):
        yield Check("container", "zip", False, "does not hold one folder only")


def _entry_fault(entry: zipfile.ZipInfo) -> str:
    if entry.orig_filename != entry.filename:
        return "its name holds a zero byte or a backslash"
    if entry.is_dir():
        return "is a folder entry; a package's zip holds files only"
    if fault := name_fault(entry.filename):
        return fault
    mode = entry.external_attr >> 16
    if stat.S_IFMT(mode) not in (0, stat.S_IFREG):
        return "a link or special file"
    if entry.flag_bits & _ENCRYPTED:
        return "is encrypted"
    if entry.compress_type != zipfile.ZIP_STORED or entry.compress_size != entry.file_size:
        return "is compressed; a package's zip stores its files as they are"
    return ""
