"""One deterministic ``.zip`` of a package."""

from __future__ import annotations

import zipfile
from collections.abc import Mapping
from io import BytesIO
from pathlib import Path

from reportgen.errors import PackageError
from reportgen.package.contents import read_folder
from reportgen.package.disk import write_file
from reportgen.package.names import name_fault

_EARLIEST = (1980, 1, 1, 0, 0, 0)
_UNIX = 3
_PLAIN_FILE = 0o100644 << 16


def zip_bytes(name: str, files: Mapping[str, bytes]) -> bytes:
    """Give the one zip that holds these files under the folder ``name``.

    Entries are sorted by name, stored without compression, and carry a fixed time and mode:
    equal packages give equal bytes, and a reader can rebuild the zip to compare.
    """
    out = BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_STORED) as archive:
        for path in sorted(files):
            entry = zipfile.ZipInfo(f"{name}/{path}", _EARLIEST)
            entry.create_system = _UNIX
            entry.external_attr = _PLAIN_FILE
            archive.writestr(entry, files[path])
    return out.getvalue()


def zip_package(path: Path, target: Path | None = None) -> Path:
    """Write the zip of a package.

    Parameters
    ----------
    path
        The package's folder.
    target
        Where the zip goes; ``<package>.zip`` beside the folder by default. An older zip
        there is replaced by one rename.

    Raises
    ------
    PackageError
        The package holds what cannot be put into a zip (a link, an odd name), or the zip
        cannot be written.
    """
    contents = read_folder(path)
    faults = [f"{fault.subject}: {fault.detail}" for fault in contents.faults]
    faults += [f"{name}: {fault}" for name in contents.files if (fault := name_fault(name))]
    if faults:
        raise PackageError(f"{path}: a damaged package is not zipped:\n  " + "\n  ".join(faults))
    target = target or path.with_name(contents.name + ".zip")
    write_file(target, zip_bytes(contents.name, contents.files))
    return target
