"""The beginning of a case file for each template: commented, whole, and open in every value."""

from __future__ import annotations

import re
from dataclasses import dataclass
from importlib.resources import files
from pathlib import Path
from typing import Literal

from reportgen.case.models import MODELS
from reportgen.case.nodes import read_text
from reportgen.case.reading import nearest
from reportgen.errors import InputError, Problem

_PLACE = re.compile("«([^»]*)»")
_SECTIONS = """\
sections:                 # or table: sections.csv
      - {length: «150 mm|6 in», outer diameter: «60 mm|2.4 in», material: steel}
      - {length: «400 mm|16 in», outer diameter: «80 mm|3.2 in», material: steel}
      - {length: «400 mm|16 in», outer diameter: «80 mm|3.2 in», material: steel}
      - {length: «150 mm|6 in», outer diameter: «60 mm|2.4 in», material: steel}"""


@dataclass(frozen=True)
class Beginning:
    """What a new case begins with.

    Parameters
    ----------
    template
        Name of a shipped template.
    units
        Of the report, and of the placeholders.
    date
        Year-month-day.
    sections
        Name of a CSV of shaft sections, from the case's folder, and its number of rows.
    of
        Name of the case that a study or a comparison is of.
    """

    template: str
    units: Literal["si", "us"]
    date: str
    sections: tuple[str, int] | None = None
    of: str = "rotor.yaml"


def starter(beginning: Beginning) -> str:
    """Return the text of a case file that reads well as it stands.

    Raises
    ------
    InputError
        If there is no such template, or it takes no sections.
    """
    template = beginning.template
    if template not in MODELS:
        near = nearest(template, MODELS)
        remedy = f"did you mean {near!r}?" if near else f"give one of {', '.join(MODELS)}"
        raise InputError(Problem(f"there is no template {template!r}", remedy, field="TEMPLATE"))
    text = _text(template)
    if beginning.sections is not None and "«stations»" not in text:
        found = f"{template} takes no shaft sections"
        raise InputError(Problem(found, "leave --sections out", field="--sections"))
    count = 4
    shaft = _SECTIONS
    if beginning.sections is not None:
        name, count = beginning.sections
        shaft = f"table: {name}"
    words = {
        "template": template,
        "title": template.replace("-", " ").capitalize(),
        "date": beginning.date,
        "units": beginning.units,
        "of": beginning.of,
        "de": "1" if count < 4 else "2",
        "nde": str(count + 1 if count < 4 else count),
        "mid": str(count // 2 + 1),
    }
    whole = _text("head") + text
    whole = whole.replace("«stations»\n", _text("stations")).replace("«sections»", shaft)
    which = 0 if beginning.units == "si" else 1

    def filled(match: re.Match[str]) -> str:
        inside = match[1]
        return inside.split("|")[which] if "|" in inside else words[inside]

    return _PLACE.sub(filled, whole)


def count_rows(path: Path) -> int:
    """Return the number of shaft sections in a CSV, its head and comments left out.

    Raises
    ------
    InputError
        If the file cannot be read or holds no section.
    """
    _, text = read_text(path, "table of sections")
    lines = [line for line in text.splitlines() if line.strip() and not line.startswith("#")]
    if len(lines) < 2:
        raise InputError(Problem("there is no section", "a head, then a row each", str(path)))
    return len(lines) - 1


def _text(name: str) -> str:
    return (files("reportgen.case") / "starters" / f"{name}.txt").read_text(encoding="utf-8")
