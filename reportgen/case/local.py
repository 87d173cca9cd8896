"""The case of a template of the user's own: the common parts and free inputs."""

from __future__ import annotations

from typing import Annotated, Any

from pydantic import AfterValidator, BeforeValidator, Field
from pydantic_core.core_schema import ValidationInfo

from reportgen.case.base import Line
from reportgen.case.case import Case
from reportgen.case.common import Speeds, problem
from reportgen.case.criteria import OneMassCriterion
from reportgen.case.given import Given, Of, given_schema
from reportgen.case.nodes import MapNode, TextNode
from reportgen.case.reading import Reading, read_number

_GIVEN = Of("")


def _input(value: Any, info: ValidationInfo) -> Any:
    """Return a given, a number or a text."""
    reading = info.context
    if not isinstance(reading, Reading):
        return Given.model_validate(value) if isinstance(value, dict) else value
    if isinstance(value, MapNode):
        return _GIVEN._read(value, info)
    if isinstance(value, TextNode):
        number = read_number(value)
        return " ".join(value.split()) if number is None else number
    raise problem("found neither a given, a text nor a number", "write one of them")


Input = Annotated[
    Given | float | str,
    BeforeValidator(_input),
    Field(json_schema_extra={"anyOf": [given_schema(""), {"type": ["string", "number"]}]}),
]


def _inside(path: str) -> str:
    parts = path.replace("\\", "/").split("/")
    if path.startswith("/") or ":" in path or "\\" in path or ".." in parts:
        raise problem(
            f"{path!r} leads out of the case's folder", "keep the template beside the case"
        )
    return path


class LocalCase(Case):
    """A case for a notebook of the user's own, named by its path from the case's folder."""

    template: Annotated[
        Line, AfterValidator(_inside), Field(json_schema_extra={"pattern": r"\.ipynb$"})
    ]
    inputs: dict[str, Input] = Field(default_factory=dict)
    speeds: Speeds | None = None
    criteria: tuple[OneMassCriterion, ...] = ()
