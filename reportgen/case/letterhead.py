"""The house file that a case names: whose face its report has."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import PurePosixPath
from typing import Any

from pydantic import GetCoreSchemaHandler, GetJsonSchemaHandler
from pydantic_core import CoreSchema, core_schema

from reportgen.case.beside import file_beside
from reportgen.case.nodes import MapNode, TextNode, read_nodes, read_text
from reportgen.case.reading import Reading, already, fault
from reportgen.errors import InputError


@dataclass(frozen=True)
class HouseFile:
    """The name of a house file from the case's folder; it and its logo travel with the case.

    What stands in the file is judged by :func:`reportgen.publish.read_house`.
    """

    def __get_pydantic_core_schema__(
        self, source: Any, handler: GetCoreSchemaHandler
    ) -> CoreSchema:
        return core_schema.with_info_before_validator_function(self._read, handler(str))

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        return {"type": "string", "pattern": r"\.ya?ml$", "description": "a house file"}

    def _read(self, data: Any, info: core_schema.ValidationInfo) -> Any:
        reading = info.context
        if not isinstance(reading, Reading):
            return data
        path, name = file_beside(data, reading, (".yaml", ".yml"))
        try:
            content, text = read_text(path, "house file")
            house = read_nodes(text, str(path))
        except InputError as error:
            reading.problems += error.problems
            raise already() from None
        reading.sides[name] = content
        logo = house.get("logo") if isinstance(house, MapNode) else None
        if isinstance(logo, TextNode):
            self._logo(str(logo), PurePosixPath(name).parent, reading, data)
        return name

    @staticmethod
    def _logo(logo: str, folder: PurePosixPath, reading: Reading, node: Any) -> None:
        name = (folder / logo).as_posix()
        place = reading.folder / name
        if not place.resolve().is_relative_to(reading.folder.resolve()):
            remedy = "keep the logo in the case's folder, beside the house file"
            raise fault(reading, node, f"its logo {logo!r} leads out of the case's folder", remedy)
        if place.is_file():  # where it is missing, the house file's reader says so with its line
            reading.sides[name] = place.read_bytes()
