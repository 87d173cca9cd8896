"""Side tables: CSV files beside the case, read to SI with file, row and column of each fault."""

from __future__ import annotations

import csv
import re
import unicodedata
from dataclasses import dataclass
from itertools import pairwise
from pathlib import Path, PurePosixPath
from typing import Any

from pydantic import BaseModel, ConfigDict, GetCoreSchemaHandler, GetJsonSchemaHandler
from pydantic_core import CoreSchema, core_schema

from reportgen.case.given import STATUSES, Status
from reportgen.case.nodes import MapNode, ShortNode, TextNode, read_text
from reportgen.case.reading import Reading, already, described, fault, nearest, read_number
from reportgen.errors import InputError, Problem
from reportgen.units import QUANTITIES, UnitError, parse_quantity, show

_MOST_ROWS = 5000
_UNREAD = "?"  # of a column whose unit is reported already
_HEADER = re.compile(r"(?P<name>[^\[(]*?)\s*(?:[\[(](?P<unit>.*)[\])])?\s*")


class Table(BaseModel):
    """A side table as read; columns in SI, all of one length.

    Attributes
    ----------
    file
        Its name from the case's folder.
    columns
        Numbers in SI by column name; None where a cell is empty.
    texts
        Columns of text.
    source, status
        As of a given.
    """

    model_config = ConfigDict(frozen=True, extra="forbid", allow_inf_nan=False)

    file: str
    columns: dict[str, tuple[float | None, ...]]
    texts: dict[str, tuple[str, ...]] = {}
    source: str = ""
    status: Status = "confirmed"

    def __len__(self) -> int:
        return len(next(iter(self.columns.values())))

    def column(self, name: str) -> tuple[float, ...]:
        """Return a column that is full, in SI."""
        return tuple(value for value in self.columns[name] if value is not None)


@dataclass(frozen=True)
class Column:
    """What a column of a side table must be; see :class:`reportgen.case.given.Of` for limits."""

    name: str
    quantity: str  # empty for text; "count" for a whole number
    required: bool = True
    above: float | None = None
    at_least: float | None = None


@dataclass(frozen=True)
class TableOf:
    """The columns of one kind of side table.

    Parameters
    ----------
    columns
        All columns it may have.
    rising
        Name of the column whose values must increase from row to row, if any.
    least_rows
        Fewest rows.
    """

    columns: tuple[Column, ...]
    rising: str = ""
    least_rows: int = 1

    def __get_pydantic_core_schema__(
        self, source: Any, handler: GetCoreSchemaHandler
    ) -> CoreSchema:
        return core_schema.with_info_before_validator_function(self._read, handler(Table))

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        words = ", ".join(column.name for column in self.columns)
        name = {"type": "string", "pattern": r"\.csv$", "description": f"columns: {words}"}
        whole = {
            "type": "object",
            "properties": {
                "file": name,
                "source": {"type": "string"},
                "status": {"enum": list(STATUSES)},
            },
            "required": ["file"],
            "additionalProperties": False,
        }
        return {"anyOf": [name, whole]}

    def _read(self, data: Any, info: core_schema.ValidationInfo) -> Any:
        reading = info.context
        if not isinstance(reading, Reading):
            return data
        if isinstance(data, TextNode):
            data = ShortNode.of(data)
        if not isinstance(data, MapNode):
            raise fault(reading, data, f"found {described(data)}", "write the name of a CSV file")
        key = "value" if isinstance(data, ShortNode) else "file"
        for other in data:
            if other not in (key, "source", "status"):
                remedy = "give file, source and status"
                raise fault(reading, data, f"the key {other!r} is not known here", remedy, other)
        name = data.get(key)
        if not isinstance(name, TextNode):
            remedy = "write file: and the name of a CSV file"
            raise fault(reading, data, f"found {described(name)}", remedy)
        status = data.get("status")
        if status is not None and status not in STATUSES:
            remedy = f"give one of {', '.join(STATUSES)}"
            raise fault(reading, data, f"found {described(status)}", remedy, "status")
        return Table(
            **self._table(str(name), reading, data, key),
            source=str(data.get("source") or ""),
            status="preliminary" if status == "preliminary" else "confirmed",
        )

    def _table(self, name: str, reading: Reading, node: MapNode, key: str) -> dict[str, Any]:
        path = _beside(name, reading, node, key)
        try:
            content, text = read_text(path, "side table")
        except InputError as error:
            if not path.exists():
                remedy = "name it from the case's folder"
                raise fault(reading, node, f"there is no file {name!r}", remedy, key) from None
            reading.problems += error.problems
            raise already() from None
        before = len(reading.problems)
        table = _Rows(self, text, str(path), reading).read()
        if len(reading.problems) > before:
            raise already()
        reading.sides[name] = content
        return {"file": name, **table}


def _beside(name: str, reading: Reading, node: MapNode, key: str) -> Path:
    """Return the path of a side table; refuse a name that leads elsewhere."""
    pure = PurePosixPath(name)
    plain = not pure.is_absolute() and not set(pure.parts) & {"..", "."} and str(pure) == name
    if not plain or re.search(r'[\\:%<>|?*"\r\n]', name) or len(name) > 120:
        remedy = "name a file in the case's folder, with / between folders"
        raise fault(reading, node, f"{name!r} is no plain name of a side table", remedy, key)
    if pure.suffix != ".csv":
        raise fault(reading, node, f"{name!r} does not end in .csv", "give a CSV file", key)
    path = reading.folder / unicodedata.normalize("NFC", name)
    if not path.resolve().is_relative_to(reading.folder.resolve()):
        remedy = "keep the table in the case's folder"
        raise fault(reading, node, f"{name!r} leads out of the case's folder", remedy, key)
    return path


class _Rows:
    """One CSV text on its way to columns."""

    def __init__(self, table: TableOf, text: str, file: str, reading: Reading) -> None:
        self.table, self.file, self.reading = table, file, reading
        head = next((x for x in text.splitlines() if x.strip() and not x.startswith("#")), "")
        self.delimiter = ";" if ";" in head else "\t" if "\t" in head else ","
        self.text = text

    def report(self, message: str, remedy: str, row: int, column: int = 0, name: str = "") -> None:
        """Add a problem at a row and column of the table, counted from 1."""
        problem = Problem(message, remedy, self.file, row, column, name)
        self.reading.problems.append(problem)

    def read(self) -> dict[str, Any]:
        rows: list[tuple[int, list[str]]] = []
        reader = csv.reader(self.text.splitlines(), delimiter=self.delimiter, strict=True)
        try:
            for cells in reader:
                if any(cell.strip() for cell in cells) and not cells[0].lstrip().startswith("#"):
                    rows.append((reader.line_num, [cell.strip() for cell in cells]))
                if len(rows) > _MOST_ROWS + 1:
                    self.report(
                        f"more than {_MOST_ROWS} rows", "thin the table out", reader.line_num
                    )
                    return {}
        except csv.Error as error:
            self.report(f"this is not CSV: {error}", "check the quotes", reader.line_num)
            return {}
        if not rows:
            self.report("the table is empty", f"begin with a header: {self._wanted()}", 1)
            return {}
        (line, header), *body = rows
        columns = self._header(line, header)
        if len(body) < self.table.least_rows:
            least = self.table.least_rows
            found = f"the table has {len(body)} {'row' if len(body) == 1 else 'rows'} of values"
            self.report(found, f"give at least {least}", line)
        if len(columns) < len(header) or not body:
            return {}
        found_columns: dict[str, list[Any]] = {column.name: [] for column, _ in columns}
        for row, cells in body:
            if len(cells) != len(header):
                found = f"{len(cells)} cells, but the header has {len(header)}"
                self.report(found, "give each row as many cells as the header", row)
                continue
            for number, ((column, unit), cell) in enumerate(zip(columns, cells, strict=True), 1):
                found_columns[column.name].append(self._cell(cell, column, unit, row, number))
        self._check_rising(found_columns, [row for row, _ in body], columns)
        texts = {c.name for c, _ in columns if not c.quantity}
        return {
            "columns": {n: tuple(v) for n, v in found_columns.items() if n not in texts},
            "texts": {n: tuple(v) for n, v in found_columns.items() if n in texts},
        }

    def _wanted(self) -> str:
        return ", ".join(
            f"{c.name} [{QUANTITIES[c.quantity].examples[0]}]"
            if c.quantity in QUANTITIES and c.quantity != "ratio"
            else c.name
            for c in self.table.columns
        )

    def _header(self, line: int, header: list[str]) -> list[tuple[Column, str]]:
        known = {column.name: column for column in self.table.columns}
        found: list[tuple[Column, str]] = []
        for number, cell in enumerate(header, 1):
            match = _HEADER.fullmatch(cell)
            name = " ".join((match["name"] if match else cell).lower().split())
            unit = (match["unit"] or "").strip() if match else ""
            if name not in known:
                near = nearest(name, known)
                remedy = f"did you mean {near!r}?" if near else f"columns are {self._wanted()}"
                self.report(f"the column {cell[:40]!r} is not known here", remedy, line, number)
                continue
            column = known[name]
            if any(column is other for other, _ in found):
                self.report(f"the column {name!r} stands twice", "keep one", line, number, name)
                continue
            if unit:
                try:
                    if column.quantity not in QUANTITIES:
                        raise UnitError(f"{name} has no unit", "leave the unit out")
                    parse_quantity(f"1 {unit}", column.quantity)
                except UnitError as error:
                    self.report(error.found, error.remedy, line, number, name)
                    unit = _UNREAD
            found.append((column, unit))
        present = {column.name for column, _ in found}
        for column in self.table.columns:
            if column.required and column.name not in present and len(found) == len(header):
                remedy = f"the columns are {self._wanted()}"
                self.report(f"the column {column.name!r} is missing", remedy, line)
        return found

    def _cell(self, cell: str, column: Column, unit: str, row: int, number: int) -> Any:
        if not column.quantity:
            if not cell and column.required:
                self.report("the cell is empty", "give its text", row, number, column.name)
            if len(cell) > 100:
                self.report("the text is longer than 100", "shorten it", row, number, column.name)
            return cell
        if not cell:
            if column.required:
                self.report("the cell is empty", "give its value", row, number, column.name)
            return None
        if unit == _UNREAD:
            return None
        try:
            value = self._value(cell, column, unit)
        except UnitError as error:
            self.report(error.found, error.remedy, row, number, column.name)
            return None
        for limit, broken, words in (
            (column.above, column.above is not None and value <= column.above, "above"),
            (column.at_least, column.at_least is not None and value < column.at_least, "at least"),
        ):
            if broken:
                shown = "zero" if not limit else show(limit, column.quantity, "si")
                found = f"{cell} is not {words} {shown}"
                self.report(found, f"give a value {words} {shown}", row, number, column.name)
        return value

    @staticmethod
    def _value(cell: str, column: Column, unit: str) -> float:
        if column.quantity == "count":
            if not re.fullmatch(r"\d{1,4}", cell):
                raise UnitError(f"{cell!r} is not a whole number", "give one, such as 2")
            return float(cell)
        if not unit:
            return parse_quantity(cell, column.quantity).si
        if read_number(cell) is None:
            if re.search(r"[A-Za-z%°µ]$", cell) and re.match(r"[+-]?[\d.]", cell):
                found = f"{cell!r} has a unit and so has the header"
                raise UnitError(found, "give the unit in one place")
            return parse_quantity(f"{cell} {unit}", column.quantity).si
        return parse_quantity(f"{cell} {unit}", column.quantity).si

    def _check_rising(
        self, found: dict[str, list[Any]], rows: list[int], columns: list[tuple[Column, str]]
    ) -> None:
        name = self.table.rising
        values = found.get(name, [])
        if len(values) != len(rows) or None in values:
            return
        number = [column.name for column, _ in columns].index(name) + 1
        for (low, high), row in zip(pairwise(values), rows[1:], strict=True):
            if high <= low:
                what = "repeats" if high == low else "is below"
                self.report(
                    f"the {name} {what} that of the row before", f"sort the rows by rising {name}",
                    row, number, name,
                )  # fmt: skip
                return
