"""Comparing packages or case files: each side as a case, the comparison as one of its own."""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path, PurePosixPath
from typing import Any

from reportgen.archive.verify import read_package
from reportgen.case import Case, read_case, side_files
from reportgen.case.inner import Archived, archived
from reportgen.errors import InputError, Problem, VerificationError
from reportgen.package.bag import PAYLOAD, TAG_MANIFEST, sha512
from reportgen.package.disk import write_files
from reportgen.package.intact import bag_checks

CASE = PAYLOAD + "case.yaml"
_RESULTS = "results.json"


@dataclass(frozen=True)
class Side:
    """One side of a comparison.

    Parameters
    ----------
    case
        As read.
    name
        Of the case file.
    files
        The case file and its side files by their names, and ``results.json`` of a package.
    package
        Name of the package, empty for a case file.
    digest
        SHA-512 of its tag manifest.
    results
        What the package holds as results; None for a case file.
    """

    case: Case
    name: str
    files: Mapping[str, bytes] = field(repr=False)
    package: str = ""
    digest: str = ""
    results: Archived | None = None


def load_side(path: Path, scratch: Path) -> Side:
    """Read a case file, or the case in a package (a folder or a zip).

    Parameters
    ----------
    path
        The case file or package.
    scratch
        A folder that is empty or not there; a package's case is put there to be read.

    Raises
    ------
    InputError
        If there is nothing of that name, or the case is at fault.
    VerificationError
        If the package is not what was packed.
    """
    if not path.exists():
        raise InputError(Problem("there is no such file or folder", "name a package or a case file",
                                 str(path)))  # fmt: skip
    if path.is_file() and path.suffix.lower() != ".zip":
        case = read_case(path)
        return Side(case, path.name, {path.name: path.read_bytes(), **side_files(case)})
    files = intact_files(path)
    if CASE not in files:
        raise InputError(Problem("the package holds no case.yaml", "name its case", str(path)))
    for name, content in case_files(files).items():
        write_files(scratch, {name: content})
    case = read_case(scratch / "case.yaml")
    kept = {"case.yaml": files[CASE], **side_files(case)}
    if case.template.endswith(".ipynb"):  # of the user's own: it stands beside the case
        kept[case.template] = files[PAYLOAD + "template.ipynb"]
    results = files[PAYLOAD + _RESULTS]
    return Side(
        case,
        "case.yaml",
        {**kept, _RESULTS: results},
        package=_document_name(results),
        digest=sha512(files[TAG_MANIFEST]),
        results=archived(_RESULTS, json.loads(results)),
    )


def intact_files(path: Path) -> Mapping[str, bytes]:
    """Return the files of a package that is what was packed.

    Raises
    ------
    VerificationError
        If it is not.
    """
    contents = read_package(path)
    faults = [check for check in bag_checks(contents) if not check.ok]
    if faults:
        lines = "\n  ".join(f"{fault.subject}: {fault.detail}" for fault in faults[:20])
        raise VerificationError(f"{path.name} is damaged, so that nothing rests on it:\n  {lines}")
    return contents.files


def case_files(files: Mapping[str, bytes]) -> dict[str, bytes]:
    """Return the payload files that a case may name: all but those that a run makes."""
    made = {
        "report.html", "report.pdf", "calculation.ipynb", _RESULTS, "inputs.json",
        "environment.json", "template.ipynb", "HOW-TO-CHECK.txt",
    }  # fmt: skip
    payload = {n.removeprefix(PAYLOAD): c for n, c in files.items() if n.startswith(PAYLOAD)}
    return {name: content for name, content in payload.items() if name not in made}


def _document_name(results: bytes) -> str:
    document = json.loads(results)["document"]
    return f"{document['number']} revision {document['revision']}"


def document_of(old: Side, new: Side, stated: Mapping[str, Any]) -> dict[str, Any]:
    """Return the document control of a comparison: what is stated, the rest from both sides."""
    one, other = old.case.document, new.case.document
    revisions = f"{one.revision}-{other.revision}"
    document: dict[str, Any] = {
        "number": f"{other.number}-{revisions}",
        "title": f"Comparison of revisions {one.revision} and {other.revision}: {other.title}",
        "revision": "A",
        "status": other.status,
        "date": other.date,
    }
    if one.number != other.number:
        document["title"] = f"Comparison of {one.number} and {other.number}: {other.title}"
    for key in ("project", "client_reference"):
        if getattr(other, key):
            document[key.replace("_", " ")] = getattr(other, key)
    for key in ("prepared", "checked", "approved"):
        person = getattr(other, key)
        if person is not None:
            document[key] = {k: v for k, v in person.model_dump().items() if v}
    if len(document["title"]) > 300:
        document["title"] = document["title"][:299] + "…"
    return document | {key: value for key, value in stated.items() if value}


def write_comparison(
    old: Side, new: Side, folder: Path, stated: Mapping[str, Any] | None = None
) -> Path:
    """Write the case of a comparison with all that it names; return the case file.

    Parameters
    ----------
    old, new
        The two sides; their files go into ``old/`` and ``new/``.
    folder
        An empty folder.
    stated
        Entries of the document control that are not to be taken from the new side.

    Raises
    ------
    InputError
        If the two are of different templates.
    """
    if old.case.template != new.case.template:
        found = f"the old case is of {old.case.template}, the new of {new.case.template}"
        raise InputError(Problem(found, "compare two cases of one template"))
    machine = {k: v for k, v in new.case.machine.model_dump().items() if v}
    case = {
        "reportgen": 1,
        "template": "revision-comparison",
        "document": document_of(old, new, stated or {}),
        "machine": machine,
        "units": new.case.units,
        "old": _side(old, "old", folder),
        "new": _side(new, "new", folder),
    }
    # JSON is YAML, and needs no care for what a text may look like
    text = "# Made by a comparison of two calculations.\n" + json.dumps(
        case, indent=2, ensure_ascii=False
    )
    path = folder / "case.yaml"
    path.write_text(text + "\n", encoding="utf-8")
    read_case(path)
    return path


def _side(side: Side, name: str, folder: Path) -> dict[str, str]:
    write_files(folder, {f"{name}/{file}": content for file, content in side.files.items()})
    stated = {"case": (PurePosixPath(name) / side.name).as_posix()}
    if side.results is not None:
        stated["results"] = f"{name}/{_RESULTS}"
        stated |= {"package": side.package, "digest": side.digest}
    return stated
