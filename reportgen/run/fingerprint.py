"""Whether the package's own code has changed: by file times quickly, by content surely."""

from __future__ import annotations

import hashlib
from collections.abc import Iterator
from pathlib import Path

_PACKAGE = Path(__file__).resolve().parents[1]
_SUFFIXES = (".py", ".json", ".typ", ".css", ".js", ".j2", ".html")


def _files() -> Iterator[tuple[str, Path]]:
    for path in sorted(_PACKAGE.rglob("*")):
        if path.suffix in _SUFFIXES and path.is_file():
            yield path.relative_to(_PACKAGE).as_posix(), path


def code_fingerprint() -> str:
    """Tell by names, sizes and times of change whether the code is what it was; a few ms.

    Returns
    -------
    str
        Differs when a file was added, taken away or written; for use within one computer.
    """
    digest = hashlib.sha256()
    for name, path in _files():
        state = path.stat()
        digest.update(f"{name}\0{state.st_size}\0{state.st_mtime_ns}\n".encode())
    return digest.hexdigest()


def code_digest() -> str:
    """Digest the content of the package's code; the same wherever it is installed.

    Returns
    -------
    str
        SHA-512 in hex over the names and contents of the files that can change a report.
    """
    digest = hashlib.sha512()
    for name, path in _files():
        content = path.read_bytes()
        digest.update(f"{name}\0{len(content)}\0".encode())
        digest.update(content)
    return digest.hexdigest()
