"""Whether a package is the bag that was written: every byte, every name, nothing more."""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping
from typing import Any

from reportgen.errors import PackageError, VerificationError
from reportgen.package.bag import (
    BAG_INFO,
    DECLARATION,
    MANIFEST,
    PAYLOAD,
    SIGNATURES,
    TAG_FILES,
    TAG_MANIFEST,
    manifest_bytes,
    payload_oxum,
    read_bag_info,
    sha512,
)
from reportgen.package.contents import Check, Contents
from reportgen.package.formats import current
from reportgen.package.names import clashes, name_fault, package_name
from reportgen.package.statement import open_holds, second_computations

_TOP = {*TAG_FILES, TAG_MANIFEST}


def bag_checks(contents: Contents) -> list[Check]:
    """Judge a package without its signatures.

    Parameters
    ----------
    contents
        The package as read.

    Returns
    -------
    list of Check
        What was looked at; anything that is not as it was written is not ``ok``.
    """
    return [
        *contents.faults,
        *_layout(contents.files),
        *_tag_manifest(contents.files),
        *_manifest(contents.files),
        *_document(contents),
    ]


def read_results(files: Mapping[str, bytes]) -> dict[str, Any]:
    """Read ``results.json`` of a package, of whatever format, as one of the current format.

    Raises
    ------
    PackageError
        It is missing, no JSON, of a format that is not known yet, or names no document.
    """
    try:
        results = current("results.json", json.loads(files[PAYLOAD + "results.json"]))
        document = results["document"]
        known = {key: document[key] for key in ("number", "revision", "status")}
        second_computations(results)
        open_holds(results)
    except KeyError as error:
        raise PackageError(f"results.json: {error.args[0]} is missing") from error
    except VerificationError as error:
        raise PackageError(str(error)) from error
    except (ValueError, TypeError, AttributeError, RecursionError) as error:
        raise PackageError(f"results.json cannot be read: {error}") from error
    if not all(isinstance(value, str) for value in known.values()):
        raise PackageError("results.json: number, revision and status must be text")
    if not isinstance(document, dict):
        raise PackageError("results.json: document must be an object")
    return dict(results)


def _layout(files: Mapping[str, bytes]) -> Iterator[Check]:
    faults = False
    for path in sorted(files):
        if path in _TOP or path.startswith((PAYLOAD, SIGNATURES)):
            detail = name_fault(path)
        elif path == "fetch.txt":
            detail = "would let files be fetched from elsewhere; a package holds all its files"
        elif path.startswith(("manifest-", "tagmanifest-")):
            detail = "a manifest of another hash; only SHA-512 is accepted"
        else:
            detail = "does not belong to a package"
        if detail:
            faults = True
            yield Check("layout", path, False, detail)
    for one, other in clashes(list(files)):
        faults = True
        yield Check("layout", other, False, f"collides with {one}")
    if files.get("bagit.txt") != DECLARATION:
        faults = True
        yield Check("layout", "bagit.txt", False, "is not the declaration of BagIt 1.0 in UTF-8")
    if not faults:
        yield Check("layout", "package", True, "BagIt 1.0; nothing but what belongs there")


def _tag_manifest(files: Mapping[str, bytes]) -> Iterator[Check]:
    present = {name: files[name] for name in TAG_FILES if name in files}
    yield from _compare(TAG_MANIFEST, files, present)


def _manifest(files: Mapping[str, bytes]) -> Iterator[Check]:
    payload = {path: content for path, content in files.items() if path.startswith(PAYLOAD)}
    yield from _compare(MANIFEST, files, payload)
    stated = None
    if BAG_INFO in files:
        try:
            stated = read_bag_info(files[BAG_INFO]).get("Payload-Oxum")
        except ValueError:
            stated = None
    oxum = payload_oxum(payload)
    if stated != oxum:
        yield Check("manifest", BAG_INFO, False, f"states the size {stated}, found {oxum}")


def _compare(
    manifest: str, files: Mapping[str, bytes], covered: Mapping[str, bytes]
) -> Iterator[Check]:
    """Compare a manifest with the one that the files make, byte for byte."""
    digests = {path: sha512(content) for path, content in covered.items()}
    if manifest not in files:
        yield Check("manifest", manifest, False, "missing")
        return
    if files[manifest] == manifest_bytes(digests):
        size = sum(map(len, covered.values()))
        detail = f"SHA-512 of {len(covered)} files agrees ({size:,} bytes)"
        yield Check("manifest", manifest, True, detail)
        return
    stated = _read_manifest(files[manifest])
    if stated is None:
        yield Check("manifest", manifest, False, "is not a list of SHA-512 digests and names")
        return
    missing = stated.keys() - digests.keys()
    added = digests.keys() - stated.keys()
    for path in sorted(missing):
        same = sorted(new for new in added if digests[new] == stated[path])
        detail = f"renamed to {same[0]}" if same else "missing"
        yield Check("file", path, False, detail)
    for path in sorted(added):
        yield Check("file", path, False, "not in the manifest: added")
    changed = [path for path in sorted(stated.keys() & digests) if stated[path] != digests[path]]
    for path in changed:
        yield Check("file", path, False, f"changed: its digest is not the one in {manifest}")
    if not missing and not added and not changed:
        yield Check("manifest", manifest, False, "is not written as it was: order or line ends")


def _read_manifest(content: bytes) -> dict[str, str] | None:
    stated = {}
    try:
        for line in content.decode().split("\n")[:-1]:
            digest, _, path = line.partition("  ")
            if len(digest) != 128 or set(digest) - set("0123456789abcdef") or path in stated:
                return None
            stated[path] = digest
    except UnicodeDecodeError:
        return None
    return stated


def _document(contents: Contents) -> Iterator[Check]:
    try:
        document = read_results(contents.files)["document"]
        expected = package_name(document["number"], document["revision"])
    except PackageError as error:
        yield Check("document", "results.json", False, str(error))
        return
    title = f"{document['number']}, revision {document['revision']}, {document['status']}"
    if contents.name == expected:
        yield Check("document", contents.name, True, title)
    else:
        detail = f"holds {title}; its folder must be named {expected}"
        yield Check("document", contents.name, False, detail)
