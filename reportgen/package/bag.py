"""The bytes of a BagIt bag (RFC 8493) that holds a package.

The ``bagit`` library changes the process's working folder and writes today's date and its
own name into the bag; a package must come out the same bytes from any thread on any day.
What is written here is the little that a bag needs; the tests hold it against ``bagit``
and ``sha512sum``.
"""

from __future__ import annotations

import hashlib
import re
from collections.abc import Mapping

from reportgen.errors import PackageError
from reportgen.package.names import clashes, name_fault

DECLARATION = b"BagIt-Version: 1.0\nTag-File-Character-Encoding: UTF-8\n"
BAG_INFO = "bag-info.txt"
MANIFEST = "manifest-sha512.txt"
TAG_MANIFEST = "tagmanifest-sha512.txt"
TAG_FILES = ("bag-info.txt", "bagit.txt", MANIFEST)
"""The tag files that the tag manifest covers."""
PAYLOAD = "data/"
SIGNATURES = "signatures/"

_LABEL = re.compile(r"[A-Za-z0-9][A-Za-z0-9 -]*")


def sha512(content: bytes) -> str:
    """Give the SHA-512 digest in lower-case hexadecimal."""
    return hashlib.sha512(content).hexdigest()


def manifest_bytes(digests: Mapping[str, str]) -> bytes:
    """Give a manifest's bytes: one line a file, in the order of the names."""
    text = "".join(f"{digests[name]}  {name}\n" for name in sorted(digests))
    # A name on a disk need not be UTF-8; it is faulted elsewhere and must not stop us here.
    return text.encode(errors="surrogateescape")


def bag_files(payload: Mapping[str, bytes], bag_info: Mapping[str, str]) -> dict[str, bytes]:
    """Give every file of an unsigned bag, by path.

    Parameters
    ----------
    payload
        Content of each payload file by its path inside ``data/``.
    bag_info
        Lines of ``bag-info.txt``; ``Payload-Oxum`` is added.

    Returns
    -------
    dict
        Content by path relative to the bag: ``data/…``, ``bagit.txt``, ``bag-info.txt``,
        ``manifest-sha512.txt``, ``tagmanifest-sha512.txt``.

    Raises
    ------
    PackageError
        The payload is empty, or a name or a line cannot be written.
    """
    if not payload:
        raise PackageError("a package without files cannot be written")
    for name in payload:
        if fault := name_fault(name):
            raise PackageError(f"the file name {name!r} cannot go into a package: {fault}")
    for one, other in clashes(list(payload)):
        raise PackageError(f"{one!r} and {other!r} cannot both go into one package: they collide")
    files = {PAYLOAD + name: content for name, content in payload.items()}
    tags = {
        "bagit.txt": DECLARATION,
        BAG_INFO: _bag_info(bag_info, payload),
        MANIFEST: manifest_bytes({name: sha512(content) for name, content in files.items()}),
    }
    tags[TAG_MANIFEST] = manifest_bytes({name: sha512(tags[name]) for name in TAG_FILES})
    return files | tags


def payload_oxum(payload: Mapping[str, bytes]) -> str:
    """Give ``bytes.files``, the payload's size as RFC 8493 section 2.2.2 writes it."""
    return f"{sum(map(len, payload.values()))}.{len(payload)}"


def _bag_info(lines: Mapping[str, str], payload: Mapping[str, bytes]) -> bytes:
    out = []
    for label, value in {**lines, "Payload-Oxum": payload_oxum(payload)}.items():
        if not _LABEL.fullmatch(label):
            raise PackageError(f"{label!r} cannot be a label in {BAG_INFO}")
        out.append(f"{label}: {' '.join(value.split())}\n")
    return "".join(sorted(out)).encode()


def read_bag_info(content: bytes) -> dict[str, str]:
    """Read ``bag-info.txt`` as this module writes it (one line a label, no folding)."""
    pairs = (line.partition(": ") for line in content.decode().splitlines())
    return {label: value for label, _, value in pairs}
