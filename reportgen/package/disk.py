"""Putting folders and files on a disk so that they are there whole or not at all.

Everything is written into a temporary sibling first, flushed to the disk, and moved into
place by one rename. A process that dies leaves at most a hidden ``.….part`` folder, which
the next run of the same package clears away.
"""

from __future__ import annotations

import ctypes
import errno
import hashlib
import os
import platform
import shutil
import sys
from collections.abc import Iterator, Mapping
from contextlib import contextmanager, suppress
from pathlib import Path

from reportgen.errors import DiskError

_FULL = {errno.ENOSPC, errno.EDQUOT, errno.EFBIG}
_REFUSED = {errno.EROFS, errno.EACCES, errno.EPERM}


@contextmanager
def staging(parent: Path, name: str) -> Iterator[Path]:
    """Give an empty temporary folder beside ``name`` in ``parent``; gone again at the end.

    Raises
    ------
    DiskError
        The folder cannot be made, or the disk fails or fills while it is in use.
    """
    with explained(parent):
        parent.mkdir(parents=True, exist_ok=True)
        clear_leftovers(parent, name)
        folder = parent / f".{name}.{_here()}-{os.getpid()}-{os.urandom(4).hex()}.part"
        folder.mkdir()
    try:
        with explained(parent):
            yield folder
    finally:
        shutil.rmtree(folder, ignore_errors=True)


@contextmanager
def explained(place: Path) -> Iterator[None]:
    """Turn an operating-system error into a :class:`DiskError` that says what would do."""
    try:
        yield
    except OSError as error:
        if error.errno in _FULL:
            reason = "the disk is full (or a quota is reached); make room and run again"
        elif error.errno in _REFUSED:
            reason = "the folder cannot be written to; choose another with -o or change its rights"
        elif error.errno in (errno.EEXIST, errno.ENOTDIR):
            reason = "a file is where a folder should be; move it away or choose another folder"
        else:
            reason = error.strerror or str(error)
        raise DiskError(f"{place}: {reason}; nothing was changed") from error


def require_writable(folder: Path) -> None:
    """Raise ``OSError`` if a folder, or the one it would be made in, cannot be written to."""
    there = next(place for place in (folder, *folder.absolute().parents) if place.exists())
    if not there.is_dir():
        raise NotADirectoryError(errno.ENOTDIR, os.strerror(errno.ENOTDIR), str(there))
    effective = os.access in os.supports_effective_ids
    if not os.access(there, os.W_OK | os.X_OK, effective_ids=effective):
        raise PermissionError(errno.EACCES, os.strerror(errno.EACCES), str(there))


def write_files(folder: Path, files: Mapping[str, bytes], mode: int = 0o666) -> None:
    """Write files that do not exist yet under ``folder`` and flush them and their folders."""
    folders = {folder}
    for name, content in files.items():
        path = folder / name
        path.parent.mkdir(parents=True, exist_ok=True)
        folders.update(p for p in path.parents if p.is_relative_to(folder))
        descriptor = os.open(path, os.O_WRONLY | os.O_CREAT | os.O_EXCL | _BINARY, mode)
        with os.fdopen(descriptor, "wb") as file:
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
    for place in sorted(folders, key=lambda p: len(p.parts), reverse=True):
        flush_folder(place)


_BINARY = getattr(os, "O_BINARY", 0)


def write_file(path: Path, content: bytes) -> None:
    """Replace or make one file by a flushed temporary beside it and one rename."""
    temporary = path.with_name(f".{path.name}.{_here()}-{os.getpid()}-{os.urandom(4).hex()}.part")
    try:
        with explained(path):
            write_files(path.parent, {temporary.name: content})
            temporary.replace(path)
            flush_folder(path.parent)
    finally:
        with suppress(OSError):
            temporary.unlink()


def flush_folder(folder: Path) -> None:
    """Make the names in a folder durable, where the system can."""
    if sys.platform == "win32":
        return
    descriptor = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(descriptor)
    except OSError as error:
        # Some network drives cannot flush a folder; the rename is still atomic there.
        if error.errno not in (errno.EINVAL, errno.ENOTSUP):
            raise
    finally:
        os.close(descriptor)


def move_into_place(folder: Path, target: Path) -> bool:
    """Rename a folder to a name that is free; false if another is there already."""
    try:
        folder.rename(target)
    except OSError as error:
        if error.errno in (errno.ENOTEMPTY, errno.EEXIST, errno.ENOTDIR):
            return False
        raise
    flush_folder(target.parent)
    return True


def swap_into_place(folder: Path, target: Path) -> None:
    """Put ``folder`` where ``target`` is and take ``target`` away.

    One step where the system can exchange two names (Linux, macOS). Elsewhere two renames;
    if the process dies between them, :func:`clear_leftovers` puts the old folder back.
    """
    if not _exchange(folder, target):
        old = target.with_name(f".{target.name}.old")
        target.rename(old)
        try:
            folder.rename(target)
        except OSError:
            old.rename(target)
            raise
        shutil.rmtree(old, ignore_errors=True)
    flush_folder(target.parent)


def clear_leftovers(parent: Path, name: str) -> None:
    """Clear what killed runs left of this package; leave what a living run is writing."""
    old = parent / f".{name}.old"
    if old.is_dir():
        if (parent / name).exists():
            shutil.rmtree(old, ignore_errors=True)
        else:
            old.rename(parent / name)
    prefix = f".{name}.{_here()}-"
    with os.scandir(parent) as entries:
        stale = [e.name for e in entries if e.name.startswith(prefix) and e.name.endswith(".part")]
    for entry in stale:
        process = entry.removeprefix(prefix).split("-")[0]
        if process.isdigit() and int(process) != os.getpid() and not _alive(int(process)):
            shutil.rmtree(parent / entry, ignore_errors=True)


def _here() -> str:
    """Tell this machine from others on a shared drive, without writing its name."""
    return hashlib.sha256(platform.node().encode()).hexdigest()[:8]


def _alive(process: int) -> bool:
    if sys.platform == "win32":
        return True  # a signal would end the process there; leave the folder
    try:
        os.kill(process, 0)
    except ProcessLookupError:
        return False
    except PermissionError:
        return True
    return True


def _exchange(one: Path, other: Path) -> bool:
    """Exchange two names in one step; false where the system or the drive cannot."""
    names = (os.fsencode(one), os.fsencode(other))
    try:
        library = ctypes.CDLL(None, use_errno=True)
        if sys.platform == "linux":
            at_working_folder, exchange = -100, 2
            status = library.renameat2(
                at_working_folder, names[0], at_working_folder, names[1], exchange
            )
        elif sys.platform == "darwin":
            swap = 2
            status = library.renamex_np(names[0], names[1], swap)
        else:
            return False
    except (OSError, AttributeError, TypeError):
        return False
    return bool(status == 0)
