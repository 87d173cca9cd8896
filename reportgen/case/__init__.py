"""Case files: reading with positions, models, units to SI, JSON Schema.

The package is light to import; the models and their libraries load on first use.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from reportgen.case.case import Case
    from reportgen.case.given import Given
    from reportgen.case.models import schema
    from reportgen.case.read import from_resolved, read_case, side_files

__all__ = ["Case", "Given", "from_resolved", "read_case", "schema", "side_files"]

_HOMES = {
    "Case": "case",
    "Given": "given",
    "schema": "models",
    "from_resolved": "read",
    "read_case": "read",
    "side_files": "read",
}


def __getattr__(name: str) -> Any:
    """Load what is asked for from its own file."""
    if name not in _HOMES:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    from importlib import import_module

    return getattr(import_module(f"{__name__}.{_HOMES[name]}"), name)
