"""Finished calculations that a case refers to: packages below its folder, checked as read.

What is shown of one is what stands in its ``results.json``. That file is held to the package's
manifest, and the manifest to the tag manifest, which the package's signatures cover: the tag
manifest's digest names the calculation beyond doubt. All three files travel in the package of
the case that refers to it.
"""

from __future__ import annotations

import hashlib
import json
import re
from dataclasses import dataclass
from typing import Any

from pydantic import BaseModel, ConfigDict, GetCoreSchemaHandler, GetJsonSchemaHandler
from pydantic_core import CoreSchema, core_schema

from reportgen.case.beside import file_beside
from reportgen.case.nodes import TextNode
from reportgen.case.reading import Reading, described, fault

_TAGS, _MANIFEST, _RESULTS = "tagmanifest-sha512.txt", "manifest-sha512.txt", "data/results.json"


class SeenResult(BaseModel):
    """One headline result as its report prints it; ``value`` in SI."""

    model_config = ConfigDict(frozen=True, extra="forbid")

    id: str
    title: str
    shown: str
    value: float | None
    agrees: bool | None = None


class SeenCriterion(BaseModel):
    """One judged limit as its report prints it."""

    model_config = ConfigDict(frozen=True, extra="forbid")

    title: str
    shown: str
    limit: str
    verdict: str


class Seen(BaseModel):
    """A finished calculation that a case refers to.

    Attributes
    ----------
    package
        Its folder, from the case's folder.
    number, revision, title, status, date
        Of its document.
    template
        What calculated it.
    digest
        SHA-512 of the package's tag manifest, which its signatures cover.
    holds
        How many holds were open in it.
    results, criteria
        Its headline results and verdicts.
    """

    model_config = ConfigDict(frozen=True, extra="forbid")

    package: str
    number: str
    revision: str
    title: str
    status: str
    date: str
    template: str
    digest: str
    holds: int
    results: tuple[SeenResult, ...]
    criteria: tuple[SeenCriterion, ...]


@dataclass(frozen=True)
class SeenOf:
    """The folder of a package below the case's folder."""

    def __get_pydantic_core_schema__(
        self, source: Any, handler: GetCoreSchemaHandler
    ) -> CoreSchema:
        return core_schema.with_info_before_validator_function(self._read, handler(Seen))

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        return {"type": "string", "description": "the folder of a finished package"}

    def _read(self, data: Any, info: core_schema.ValidationInfo) -> Any:
        reading = info.context
        if not isinstance(reading, Reading):
            return data
        if not isinstance(data, TextNode):
            remedy = "write the folder of a finished package"
            raise fault(reading, data, f"found {described(data)}", remedy)
        files = {name: _file(data, name, reading) for name in (_TAGS, _MANIFEST, _RESULTS)}
        for inner, outer in ((_MANIFEST, _TAGS), (_RESULTS, _MANIFEST)):
            if not _holds(files[outer], inner, files[inner]):
                found = f"{data}/{inner} is not what {outer} of the package says"
                raise fault(reading, data, found, "give the package as it was written, unchanged")
        try:
            seen = _seen(str(data), json.loads(files[_RESULTS]), files[_TAGS])
        except (ValueError, KeyError, TypeError, AttributeError) as error:
            words = f"the results of {data} cannot be read: {error or type(error).__name__}"
            raise fault(reading, data, words, "give a package of this program") from None
        for name, content in files.items():
            reading.sides[f"{data}/{name}"] = content
        return seen


def _file(folder: TextNode, name: str, reading: Reading) -> bytes:
    whole = TextNode.of(f"{str(folder).rstrip('/')}/{name}", folder.path, folder.mark)
    path, _ = file_beside(whole, reading, (".txt", ".json"))
    try:
        return path.read_bytes()
    except OSError as error:
        words = f"{whole} cannot be read: {error.strerror}"
        raise fault(reading, folder, words, "check the file's rights") from None


def _holds(manifest: bytes, name: str, content: bytes) -> bool:
    """Tell whether a manifest lists a file with the digest that its content has."""
    digest = hashlib.sha512(content).hexdigest()
    line = rf"(?m)^([0-9a-fA-F]{{128}})[ \t]+\*?{re.escape(name)}\r?$"
    found = re.findall(line, manifest.decode("utf-8", "replace"))
    return [digest] == [one.lower() for one in found]


def _seen(package: str, results: Any, tags: bytes) -> Seen:
    if results["format"] != 1:
        raise ValueError(f"format {results['format']!r} is not known")
    document = results["document"]
    return Seen(
        package=package,
        number=document["number"],
        revision=document["revision"],
        title=document["title"],
        status=document["status"],
        date=document["date"],
        template=results["template"]["name"],
        digest=hashlib.sha512(tags).hexdigest(),
        holds=len(results["holds"]),
        results=tuple(
            SeenResult(
                id=r["id"],
                title=r["title"],
                shown=r["shown"],
                value=r["value"],
                agrees=r["second"]["agrees"] if "second" in r else None,
            )
            for r in results["results"]
        ),
        criteria=tuple(
            SeenCriterion(
                title=c["title"],
                shown=c["value_shown"],
                limit=f"{c['sense']} {c['limit_shown']}",
                verdict=c["verdict"],
            )
            for c in results["criteria"]
        ),
    )
