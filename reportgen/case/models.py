"""The models of cases by template, and their published schema."""

from __future__ import annotations

from typing import Any

from pydantic.json_schema import models_json_schema

from reportgen.case.case import Case
from reportgen.case.comparison import ComparisonCase
from reportgen.case.lateral import LateralCase
from reportgen.case.local import LocalCase
from reportgen.case.onemass import OneMassCase
from reportgen.case.passage import PassageCase
from reportgen.case.tolerances import StudyCase

MODELS: dict[str, type[Case]] = {
    "one-mass-whirl": OneMassCase,
    "lateral-review": LateralCase,
    "transient-passage": PassageCase,
    "revision-comparison": ComparisonCase,
    "tolerance-study": StudyCase,
}
"""The model of each shipped template."""


def model_of(template: str) -> type[Case] | None:
    """Return the model of a template's cases; a notebook of the user's own has a general one."""
    return LocalCase if template.endswith(".ipynb") else MODELS.get(template)


def schema() -> dict[str, Any]:
    """Return the JSON Schema (draft 2020-12) of case files.

    It describes what an editor can check; units, limits and what hangs together are checked
    on reading.
    """
    models: list[type[Case]] = [*MODELS.values(), LocalCase]
    _, whole = models_json_schema(
        [(model, "validation") for model in models], by_alias=True, ref_template="#/$defs/{model}"
    )
    choices = [{"$ref": f"#/$defs/{model.__name__}"} for model in models]
    return {
        "$schema": "https://json-schema.org/draft/2020-12/schema",
        "title": "reportgen case file, format 1",
        "oneOf": choices,
        "$defs": _without_nulls(whole["$defs"]),
    }


def _without_nulls(part: Any) -> Any:
    """Return a schema that asks for a key to be left out, not to be empty."""
    if isinstance(part, list):
        return [_without_nulls(item) for item in part]
    if not isinstance(part, dict):
        return part
    kept = {key: _without_nulls(value) for key, value in part.items()}
    if kept.get("default", 0) is None:
        del kept["default"]
    choices = kept.get("anyOf")
    if isinstance(choices, list) and {"type": "null"} in choices:
        rest = [choice for choice in choices if choice != {"type": "null"}]
        del kept["anyOf"]
        kept = {**rest[0], **kept} if len(rest) == 1 else {**kept, "anyOf": rest}
    return kept
