"""Where the shipped templates and demo cases stand: in the wheel, or in a checkout."""

from __future__ import annotations

import base64
import hashlib
from importlib.metadata import Distribution, PackageNotFoundError
from pathlib import Path

_HERE = Path(__file__).resolve().parent


def shipped(kind: str) -> Path:
    """Return the folder of the shipped ``templates`` or ``cases``."""
    in_wheel = _HERE / "_shipped" / kind
    return in_wheel if in_wheel.is_dir() else _HERE.parent / kind


def templates() -> dict[str, Path]:
    """Return the shipped templates by name, sorted."""
    return {path.stem: path for path in sorted(shipped("templates").glob("*.ipynb"))}


def as_shipped(path: Path, installed: Distribution | None = None) -> bool:
    """Say whether a shipped file is byte for byte the one that was installed.

    Parameters
    ----------
    path
        The file.
    installed
        The installation whose list of files is looked at; reportgen's own by default. What is
        not on the list, as in a checkout, is taken as it is.
    """
    try:
        files = (installed or Distribution.from_name("reportgen")).files or ()
    except PackageNotFoundError:
        return True
    for one in files:
        if one.hash is not None and one.name == path.name and Path(str(one.locate())) == path:
            digest = hashlib.new(one.hash.mode, path.read_bytes()).digest()
            return base64.urlsafe_b64encode(digest).decode().rstrip("=") == one.hash.value
    return True
