"""Cases inside a case: another case file beside this one, read whole and resolved with it."""

from __future__ import annotations

import json
from dataclasses import dataclass
from pathlib import PurePosixPath
from typing import Any

from pydantic import BaseModel, ConfigDict, GetCoreSchemaHandler, GetJsonSchemaHandler
from pydantic import SerializeAsAny as AsItIs
from pydantic_core import CoreSchema, core_schema

from reportgen.case.beside import file_beside
from reportgen.case.case import Case
from reportgen.case.nodes import read_text
from reportgen.case.reading import Reading, already, fault
from reportgen.errors import InputError

_CALCULATES = ("one-mass-whirl", "lateral-review", "transient-passage")


class CaseFile(BaseModel):
    """Another case, by its file.

    Attributes
    ----------
    file
        Its name from the folder of the case that names it.
    case
        The case as read.
    """

    model_config = ConfigDict(frozen=True, extra="forbid")

    file: str
    case: AsItIs[Case]


@dataclass(frozen=True)
class CaseOf:
    """What a file of another case must be: one whose template calculates a rotor."""

    def __get_pydantic_core_schema__(
        self, source: Any, handler: GetCoreSchemaHandler
    ) -> CoreSchema:
        return core_schema.with_info_plain_validator_function(
            self._read, serialization=handler(CaseFile).get("serialization")
        )

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        return {"type": "string", "pattern": r"\.ya?ml$", "description": "a case file"}

    def _read(self, data: Any, info: core_schema.ValidationInfo) -> CaseFile:
        from reportgen.case.read import from_resolved, read_case, side_files

        reading = info.context
        if isinstance(data, CaseFile):
            return data
        if not isinstance(reading, Reading):
            return CaseFile(file=data["file"], case=from_resolved(data["case"]))
        path, name = file_beside(data, reading, (".yaml", ".yml"))
        try:
            content, _ = read_text(path)
            case = read_case(path)
        except InputError as error:
            reading.problems += error.problems
            raise already() from None
        if case.template not in _CALCULATES:
            remedy = f"name a case of {', '.join(_CALCULATES)}"
            raise fault(reading, data, f"{name} is a case of {case.template}", remedy)
        folder = PurePosixPath(name).parent
        reading.sides[name] = content
        for side, bytes_ in side_files(case).items():
            reading.sides[(folder / side).as_posix()] = bytes_
        return CaseFile(file=name, case=case)


class Archived(BaseModel):
    """Results and criteria of a finished calculation, from its ``results.json``."""

    model_config = ConfigDict(frozen=True, extra="forbid")

    file: str
    results: dict[str, float | None]
    verdicts: dict[str, str]


@dataclass(frozen=True)
class ArchivedOf:
    """The ``results.json`` of a package, by its name from the case's folder."""

    def __get_pydantic_core_schema__(
        self, source: Any, handler: GetCoreSchemaHandler
    ) -> CoreSchema:
        return core_schema.with_info_before_validator_function(self._read, handler(Archived))

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        return {"type": "string", "pattern": r"\.json$", "description": "results of a package"}

    def _read(self, data: Any, info: core_schema.ValidationInfo) -> Any:
        reading = info.context
        if not isinstance(reading, Reading):
            return data
        path, name = file_beside(data, reading, (".json",))
        try:
            content = path.read_bytes()
            found = archived(name, json.loads(content))
        except (OSError, ValueError, KeyError, TypeError, AttributeError) as error:
            remedy = "give the results.json of a package, as it is"
            words = f"{name} cannot be read as results: {error or type(error).__name__}"
            raise fault(reading, data, words, remedy) from None
        reading.sides[name] = content
        return found


def archived(name: str, results: Any) -> Archived:
    """Return what is compared of a ``results.json``.

    Raises
    ------
    KeyError, TypeError, ValueError
        If it is not one.
    """
    if results["format"] != 1:
        raise ValueError(f"format {results['format']!r} is not known")
    return Archived(
        file=name,
        results={str(r["id"]): r["value"] for r in results["results"]},
        verdicts={str(c["title"]): str(c["verdict"]) for c in results["criteria"]},
    )
