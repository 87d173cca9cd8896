"""Where the shipped templates and demo cases stand: in the wheel, or in a checkout."""

from __future__ import annotations

from pathlib import Path

_HERE = Path(__file__).resolve().parent


def shipped(kind: str) -> Path:
    """Return the folder of the shipped ``templates`` or ``cases``."""
    in_wheel = _HERE / "_shipped" / kind
    return in_wheel if in_wheel.is_dir() else _HERE.parent / kind


def templates() -> dict[str, Path]:
    """Return the shipped templates by name, sorted."""
    return {path.stem: path for path in sorted(shipped("templates").glob("*.ipynb"))}
