"""The worst rotor of a tolerance study as a case file of its own."""

from __future__ import annotations

import json
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from reportgen.archive.compare import load_side
from reportgen.archive.yaml_edit import dumped, flow, loaded, parent, scalar, set_value
from reportgen.case import read_case
from reportgen.case.reading import nearest
from reportgen.case.tolerances import StudyCase
from reportgen.errors import InputError, Problem


@dataclass(frozen=True)
class WorstCase:
    """A case file ready to be kept: its text, and where it stands with its side tables.

    Parameters
    ----------
    path
        In the scratch folder, side tables beside it.
    text
        Of the file.
    criterion
        Id and title of the criterion that the rotor is worst against.
    margin
        Its margin there, a share of the limit.
    """

    path: Path
    text: str
    criterion: str
    margin: float


def worst_case(package: Path, criterion: str, scratch: Path) -> WorstCase:
    """Return the case of the worst rotor of a study, its values exact.

    Parameters
    ----------
    package
        Package of a tolerance study, a folder or a zip.
    criterion
        Id of a criterion of the study's margins, such as ``C2``; empty for the least margin.
    scratch
        An empty folder.

    Raises
    ------
    InputError
        If it is no study, or there is no such criterion.
    VerificationError
        If the package is not what was packed.
    """
    side = load_side(package, scratch)
    study = side.case
    if not isinstance(study, StudyCase) or "results.json" not in side.files:
        found = f"it is of {study.template}, not of tolerance-study"
        raise InputError(Problem(found, "name the package of a tolerance study", str(package)))
    rotors: dict[str, Any] = json.loads(side.files["results.json"])["series"]["worst"]
    name = criterion or min(rotors, key=lambda one: float(rotors[one]["margin"]), default="")
    if name not in rotors:
        near = nearest(name, rotors)
        remedy = f"did you mean {near}?" if near else f"there are {', '.join(rotors) or 'none'}"
        raise InputError(Problem(f"the study has no worst rotor against {name!r}", remedy))
    one = rotors[name]
    path = scratch / study.of.file
    text, data, yaml = loaded(path)
    document, about = study.of.case.document, study.document
    source = (
        f"sampled rotor {one['sample']} of {about.number} revision {about.revision}, the worst "
        f"against {name}"
    )
    for place, value in one["values"].items():
        set_value(data, place, value)
        at, last = parent(data, place)
        if not isinstance(at[last], dict):
            at[last] = flow({"value": at[last]})
        at[last]["source"] = scalar(source)
        for key in ("tolerance", "distribution"):
            at[last].pop(key, None)
    control = data["document"]
    control["number"] = f"{document.number}-WORST-{name}"
    control["title"] = scalar(f"Worst sampled rotor against {name}: {document.title}"[:300])
    control["revision"], control["status"] = "A", "draft"
    control["date"] = about.date
    control.pop("history", None)
    plain = dumped(data, yaml, text)
    path.write_text(plain, encoding="utf-8", newline="")
    read_case(path)
    return WorstCase(path, plain, f"{name}, {one['title']}", float(one["margin"]))
