"""Files that a case names: beside it or below its folder, never elsewhere."""

from __future__ import annotations

import re
from pathlib import Path, PurePosixPath
from typing import Any

from reportgen.case.nodes import MapNode, ShortNode, TextNode
from reportgen.case.reading import Reading, described, fault

_OURS = frozenset({"case.yaml"})  # the package's own name for the case that is run


def file_beside(node: Any, reading: Reading, endings: tuple[str, ...]) -> tuple[Path, str]:
    """Return path and name of a file named in a case; refuse a name that leads elsewhere."""
    if isinstance(node, ShortNode):
        node = node["value"]
    if isinstance(node, MapNode) or not isinstance(node, TextNode):
        raise fault(reading, node, f"found {described(node)}", f"name a file {endings[0]}")
    name = str(node)
    pure = PurePosixPath(name)
    plain = not pure.is_absolute() and not set(pure.parts) & {"..", "."} and str(pure) == name
    if not plain or re.search(r'[\\:%<>|?*"\r\n]', name) or len(name) > 120:
        remedy = "name a file in the case's folder, with / between folders"
        raise fault(reading, node, f"{name!r} is no plain name of a file", remedy)
    if pure.suffix not in endings or name in _OURS:
        found = (
            f"{name!r} is how a package names the case that is run"
            if name in _OURS
            else f"{name!r} does not end in {endings[0]}"
        )
        raise fault(reading, node, found, f"name another file {endings[0]}")
    path = reading.folder / name
    if not path.resolve().is_relative_to(reading.folder.resolve()):
        remedy = "keep the file in the case's folder"
        raise fault(reading, node, f"{name!r} leads out of the case's folder", remedy)
    if not path.is_file():
        raise fault(reading, node, f"there is no file {name!r}", "name it from the case's folder")
    return path, name
