"""A family: one case with a grid or a table of variations, each a case of its own.

.. code-block:: yaml

    reportgen: 1
    family: Booster fan with other wheels
    case: booster-fan.yaml
    number: CAL-0460            # its cases are CAL-0460-01, CAL-0460-02, …
    source: offers of the wheel's makers
    grid:
      rotor.mass: [400 lb, 415 lb]
      speeds.rated: [1480 rpm, 1500 rpm]

Instead of ``grid`` a ``table`` names a CSV file: a column for each path, a row for each case.
"""

from __future__ import annotations

import csv
import io
import itertools
import re
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from reportgen.archive.yaml_edit import dumped, loaded, parent, scalar, set_value, value_of
from reportgen.case import read_case, side_files
from reportgen.case.nodes import ListNode, MapNode, Mark, TextNode, read_nodes, read_text
from reportgen.case.reading import Reading, described, nearest
from reportgen.errors import InputError, Problem
from reportgen.package.disk import write_files

MOST_CASES = 1_000
_KEYS = ("reportgen", "family", "case", "number", "source", "grid", "table")
_FAMILY = re.compile(r"^family[ \t]*:", re.MULTILINE)


@dataclass(frozen=True)
class Variation:
    """One case of a family: its values by path, and where they stand."""

    values: dict[str, str]
    place: Mark
    file: str


def is_family(path: Path) -> bool:
    """Tell whether a file is a family and not a case."""
    try:
        with path.open("rb") as stream:
            start = stream.read(1 << 16)
    except OSError:
        return False
    return _FAMILY.search(start.decode("utf-8", "replace")) is not None


def schema() -> dict[str, Any]:
    """Return the JSON Schema (draft 2020-12) of family files."""
    text = {"type": "string", "minLength": 1}
    values = {"type": "array", "minItems": 1, "items": {"type": ["string", "number"]}}
    return {
        "$schema": "https://json-schema.org/draft/2020-12/schema",
        "title": "reportgen family file, format 1",
        "type": "object",
        "properties": {
            "reportgen": {"const": 1},
            "family": {**text, "description": "what is varied, in words"},
            "case": {**text, "description": "the case file that is varied"},
            "number": {**text, "description": "document number that theirs begin with"},
            "source": {**text, "description": "where the varied values are from"},
            "grid": {
                "type": "object",
                "minProperties": 1,
                "additionalProperties": values,
                "description": "values by path, such as rotor.mass; all combinations are run",
            },
            "table": {**text, "description": "CSV file: a column for each path, a row a case"},
        },
        "required": ["reportgen", "family", "case", "number"],
        "oneOf": [{"required": ["grid"]}, {"required": ["table"]}],
        "additionalProperties": False,
    }


def expand(path: Path, folder: Path) -> list[Path]:
    """Write every case of a family into a folder, its side tables beside it.

    Parameters
    ----------
    path
        The family file.
    folder
        An empty folder.

    Returns
    -------
    list of Path
        The case files, in the order of the grid (its last path fastest) or of the table.

    Raises
    ------
    InputError
        With every problem found, each with file, line and path.
    """
    reading = Reading(str(path), path.parent)
    root = read_nodes(read_text(path, "family file")[1], reading.file)
    base = _checked(root, reading)
    if base is None:
        raise InputError(reading.problems)
    old = read_case(path.parent / str(base["case"]))
    sides = side_files(old)
    variations = list(_variations(base, reading))
    if reading.problems:
        raise InputError(reading.problems)
    width = max(2, len(str(len(variations))))
    cases: list[Path] = []
    for index, variation in enumerate(variations, start=1):
        place = folder / f"{index:0{width}d}"
        place.mkdir(parents=True)
        write_files(place, sides)
        number = f"{base['number']}-{index:0{width}d}"
        case = place / f"{number}.yaml"
        try:
            case.write_text(_varied(base, variation, number, path.parent), encoding="utf-8")
            read_case(case)
        except InputError as error:
            reading.problems += [_as_variation(p, variation, index) for p in error.problems]
        cases.append(case)
    if reading.problems:
        raise InputError(reading.problems)
    return cases


def _checked(root: Any, reading: Reading) -> dict[str, Any] | None:
    if not isinstance(root, MapNode):
        reading.report(f"found {described(root)}", "write a family", Mark(1, 1), "")
        return None
    for key in root:
        if key not in _KEYS:
            near = nearest(key, [k for k in _KEYS if k not in root])
            remedy = f"did you mean {near!r}?" if near else f"give one of {', '.join(_KEYS)}"
            reading.report(f"the key {key!r} is not known here", remedy, root.key_marks[key], key)
    for key in ("reportgen", "family", "case", "number"):
        if key not in root:
            reading.report(f"{key} is missing", f"add {key}:", root.mark, key)
        elif not isinstance(root[key], TextNode) or not root[key]:
            found = f"found {described(root[key])}"
            reading.report(found, "write it in words", root.place(key), key)
    if root.get("reportgen", "1") != "1":
        remedy = "this version reads format 1"
        reading.report(f"found format {root['reportgen']!r}", remedy, root.place("reportgen"), "")
    if ("grid" in root) == ("table" in root):
        remedy = "give grid: or table:, one of the two"
        reading.report("the variations are not told", remedy, root.mark, "grid")
    return None if reading.problems else root


def _variations(base: dict[str, Any], reading: Reading) -> Iterator[Variation]:
    return _of_grid(base["grid"], reading) if "grid" in base else _of_table(base, reading)


def _of_grid(grid: Any, reading: Reading) -> Iterator[Variation]:
    if not isinstance(grid, MapNode) or not grid:
        place = getattr(grid, "mark", Mark(1, 1))
        reading.report(f"found {described(grid)}", "write path: [value, value]", place, "grid")
        return
    count = 1
    for path, values in grid.items():
        good = isinstance(values, ListNode) and values
        if not good or not all(isinstance(v, TextNode) for v in values):
            remedy = "write a list of values, such as [60 kg, 62 kg]"
            found = f"found {described(values)}"
            reading.report(found, remedy, grid.place(path), grid.child(path))
            return
        count *= len(values)
    if count > MOST_CASES:
        reading.report(
            f"the grid has {count} cases", f"give at most {MOST_CASES}", grid.mark, "grid"
        )
        return
    for chosen in itertools.product(*grid.values()):
        values = {path: str(value) for path, value in zip(grid, chosen, strict=True)}
        yield Variation(values, grid.mark, reading.file)


def _of_table(base: dict[str, Any], reading: Reading) -> Iterator[Variation]:
    name = str(base["table"])
    path = reading.folder / name
    _, text = read_text(path, "table of variations")
    rows = list(csv.reader(io.StringIO(text)))
    kept = [(n, row) for n, row in enumerate(rows, start=1) if any(cell.strip() for cell in row)]
    if len(kept) < 2:
        raise InputError(
            Problem("there is no row of values", "a head, then a row a case", str(path))
        )
    head = [cell.strip() for cell in kept[0][1]]
    if not all(head) or len(set(head)) < len(head):
        found = "a column has no path, or two have the same"
        raise InputError(Problem(found, "name each column by its path", str(path), kept[0][0]))
    if len(kept) > MOST_CASES + 1:
        found = f"the table has {len(kept) - 1} cases"
        raise InputError(Problem(found, f"give at most {MOST_CASES}", str(path)))
    for line, row in kept[1:]:
        if len(row) != len(head):
            found = f"the row has {len(row)} cells, the head {len(head)}"
            problem = Problem(found, "give every column a cell", str(path), line)
            reading.problems.append(problem)
            continue
        values = {p: cell.strip() for p, cell in zip(head, row, strict=True) if cell.strip()}
        yield Variation(values, Mark(line, 1), str(path))


def _varied(base: dict[str, Any], variation: Variation, number: str, folder: Path) -> str:
    """Return the case's text with the values of one variation and a number of its own."""
    text, data, yaml = loaded(folder / str(base["case"]))
    for path, value in variation.values.items():
        set_value(data, path, value_of(value))
        if "source" in base:
            _state_source(data, path, str(base["source"]))
    words = ", ".join(f"{path} {value}" for path, value in variation.values.items())
    data["document"]["number"] = scalar(number)
    data["document"]["title"] = scalar(f"{data['document']['title']}: {words}"[:300])
    return dumped(data, yaml, text)


def _state_source(data: Any, path: str, source: str) -> None:
    """Say where a varied given is from, if it is a given that states a source of its own."""
    at, last = parent(data, path)
    if isinstance(at[last], dict) and "value" in at[last]:
        at[last]["source"] = scalar(source)


def _as_variation(problem: Problem, variation: Variation, index: int) -> Problem:
    values = ", ".join(f"{path} = {value}" for path, value in variation.values.items())
    return Problem(
        f"case {index} of the family ({values}): {problem.message}",
        problem.remedy,
        variation.file,
        *variation.place,
        problem.field,
    )
