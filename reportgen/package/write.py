"""Writing a package: whole or not at all, and never over an issued one."""

from __future__ import annotations

import json
from collections.abc import Callable, Collection, Mapping
from pathlib import Path

from reportgen.errors import PackageError
from reportgen.package.bag import PAYLOAD, SIGNATURES, bag_files
from reportgen.package.changes import payload_changes
from reportgen.package.disk import (
    clear_leftovers,
    explained,
    move_into_place,
    require_writable,
    staging,
    swap_into_place,
    write_files,
)
from reportgen.package.names import name_fault

_MOST_SHOWN = 20


def write_package(
    out_dir: Path,
    name: str,
    payload: Mapping[str, bytes],
    bag_info: Mapping[str, str],
    *,
    replace_draft: bool = False,
    finish: Callable[[Path], object] | None = None,
    report: Callable[[str], object] | None = None,
) -> Path:
    """Write a package as a BagIt folder ``out_dir/name``, by one rename.

    Parameters
    ----------
    out_dir
        Folder for packages; made if absent.
    name
        Folder name, from :func:`reportgen.package.names.package_name`.
    payload
        Content of each file by its path inside ``data/``.
    bag_info
        Lines of ``bag-info.txt``.
    replace_draft
        Replace an existing package whose own status is draft and that nobody signed.
    finish
        Called with the complete temporary folder before it appears under its name, so
        that a first signature is there from the first moment on.
    report
        Told in one line what happened, if it was not plain writing.

    Returns
    -------
    pathlib.Path
        The package's folder.

    Raises
    ------
    PackageError
        A package of this name holds something else; the error names what changed. Whatever
        was there before is still there, unchanged.
    DiskError
        The folder cannot be written, or the disk is full; the same holds.
    """
    if (fault := name_fault(name)) or "/" in name or name.startswith("."):
        raise PackageError(f"{name!r} cannot name a package: {fault or 'use package_name'}")
    files = bag_files(payload, bag_info)
    tell = report or (lambda _: None)
    target = Path(out_dir) / name
    with explained(target):
        if target.exists() and _stands(target, payload, replace_draft):
            clear_leftovers(target.parent, name)
            tell(f"{name}: the same package is there already; kept as it is")
            return target
    with staging(Path(out_dir), name) as folder:
        package = folder / name
        write_files(package, files)
        if finish is not None:
            finish(package)
        while not move_into_place(package, target):
            # Something is there, or appeared while this was being written.
            if _stands(target, payload, replace_draft):
                tell(f"{name}: the same package is there already; kept as it is")
                return target
            if target.exists():
                swap_into_place(package, target)
                tell(f"{name}: the draft that was there is replaced")
                break
    return target


def require_place(
    out_dir: Path, name: str, known: Mapping[str, bytes], *, replace_draft: bool = False
) -> None:
    """Refuse before anything is calculated what :func:`write_package` would refuse after it.

    Parameters
    ----------
    out_dir, name, replace_draft
        As for :func:`write_package`.
    known
        Payload files that are known already, such as the inputs.

    Raises
    ------
    PackageError
        A package of this name is there that these files do not belong to.
    DiskError
        The folder cannot be written to.
    """
    target = Path(out_dir) / name
    with explained(target):
        require_writable(Path(out_dir))
        if target.exists():
            _stands(target, known, replace_draft, only=known.keys())


def _stands(
    target: Path,
    payload: Mapping[str, bytes],
    replace_draft: bool,
    only: Collection[str] | None = None,
) -> bool:
    """Say whether what is there is this package; false if it may be replaced."""
    if not target.is_dir():
        raise PackageError(f"{target}: a file with the package's name is there; move it away")
    whole = read_payload(target)
    old = {name: c for name, c in whole.items() if only is None or name in only}
    changes = payload_changes(old, payload)
    if not changes:
        return True
    if not (target / "bagit.txt").is_file():
        raise PackageError(f"{target}: a folder that is no package has this name; move it away")
    status = _status(whole)
    signed = (target / SIGNATURES).exists()
    if status == "draft" and not signed and replace_draft:
        return False
    shown = changes[:_MOST_SHOWN]
    if len(changes) > len(shown):
        shown.append(f"and {len(changes) - len(shown)} more")
    if status == "draft" and not signed:
        remedy = "it is a draft: it can be replaced when that is asked for"
    else:
        remedy = "an issued revision is never overwritten: raise the revision in the case"
    raise PackageError(
        f"{target}: this number and revision is there already with other content; {remedy}\n  "
        + "\n  ".join(shown)
    )


def read_payload(package: Path) -> dict[str, bytes]:
    """Read every payload file of a package folder, by its path inside ``data/``."""
    data = package / PAYLOAD
    paths = (path for path in sorted(data.rglob("*")) if not path.is_dir())
    return {path.relative_to(data).as_posix(): path.read_bytes() for path in paths}


def _status(payload: Mapping[str, bytes]) -> str:
    """Give the document's status; empty (hence never replaced) if it cannot be read."""
    try:
        return str(json.loads(payload["results.json"])["document"]["status"])
    except (KeyError, ValueError, TypeError):
        return ""
