"""The calculation register: what an archive of packages holds, read without unpacking.

Of each package only ``results.json``, the manifests and the statements of its sign-offs are
read. That shows a package that is broken, but it is no verification: a register lists.
"""

from __future__ import annotations

import re
import zipfile
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, replace
from itertools import pairwise
from pathlib import Path
from typing import Any

from reportgen.archive.register_files import FolderFiles, PackageFiles, ZipFiles, packages_below
from reportgen.errors import InputError, PackageError, Problem
from reportgen.package.bag import MANIFEST, PAYLOAD, SIGNATURES, TAG_MANIFEST, sha512
from reportgen.package.intact import read_results
from reportgen.package.statement import ROLES, STATEMENT_FILE, Statement
from reportgen.publish.characters import plain

RESULTS = PAYLOAD + "results.json"


@dataclass(frozen=True)
class SignOff:
    """A sign-off as its statement has it: role, name, time (ISO 8601, UTC), as listed."""

    role: str
    name: str
    time: str


@dataclass(frozen=True)
class Entry:
    """One package of an archive.

    Parameters
    ----------
    place
        Path of the folder or zip from the archive, parts separated by ``/``.
    number, title, revision, status, date, machine, template
        As in the package; empty where it cannot be read.
    verdict
        ``meets``, ``does not meet``, ``not assessed`` or ``no criterion``.
    not_met
        Titles of the criteria that are not met.
    holds
        Number of open holds.
    sign_offs
        In the order of the roles.
    superseded_by
        Revision of the same number that follows, empty for the latest.
    fault
        What is wrong with the package, empty where nothing was seen.
    verified
        What a verification said, empty where none was asked for.
    """

    place: str
    number: str = ""
    title: str = ""
    revision: str = ""
    status: str = ""
    date: str = ""
    machine: str = ""
    template: str = ""
    verdict: str = ""
    not_met: tuple[str, ...] = ()
    holds: int = 0
    sign_offs: tuple[SignOff, ...] = ()
    superseded_by: str = ""
    fault: str = ""
    verified: str = ""

    @property
    def is_zip(self) -> bool:
        """Whether it is a zip."""
        return self.place.endswith(".zip")

    def as_dict(self) -> dict[str, Any]:
        """Give the machine-readable form."""
        shown = {name: getattr(self, name) for name in self.__dataclass_fields__}
        shown["place"] = plain(self.place)
        shown["not_met"] = list(self.not_met)
        shown["sign_offs"] = [vars(sign_off) for sign_off in self.sign_offs]
        return shown


def read_register(archive: Path, *, verify: bool = False) -> list[Entry]:
    """Return what an archive holds, in the order of numbers, latest revision first.

    Parameters
    ----------
    archive
        Folder; packages are looked for at any depth, links are not followed.
    verify
        Whether to verify each package whole: slow, since every byte is read.

    Raises
    ------
    InputError
        If there is no such folder.
    """
    if not archive.is_dir():
        raise InputError(Problem("there is no folder here", "name an archive", str(archive)))
    entries = [_entry(archive, path) for path in packages_below(archive)]
    if verify:
        entries = [_verified(archive, entry) for entry in entries]
    return _in_order(_superseded(entries))


def _entry(archive: Path, path: Path) -> Entry:
    place = path.relative_to(archive).as_posix()
    try:
        with _opened(path) as files:
            return _read(place, files)
    except (PackageError, OSError, zipfile.BadZipFile, ValueError, KeyError) as error:
        detail = error.strerror if isinstance(error, OSError) else str(error)
        return Entry(place, fault=f"cannot be read: {detail or type(error).__name__}")


def _opened(path: Path) -> PackageFiles:
    return ZipFiles(path) if path.suffix.lower() == ".zip" else FolderFiles(path)


def _read(place: str, files: PackageFiles) -> Entry:
    content = files.read(RESULTS)
    if content is None:
        return Entry(place, fault="holds no results.json")
    results = read_results({RESULTS: without_series(content)})
    document = results["document"]
    verdict, not_met = _verdict(results.get("criteria", []))
    sign_offs, unread = _sign_offs(files)
    template = results.get("template")
    faults = [*_damage(files, content), *unread]
    if not faults and not sign_offs and document["status"] != "draft":
        faults = ["unsigned, though it is no draft"]
    return Entry(
        place=place,
        number=_text(document["number"]),
        title=_text(document.get("title")),
        revision=_text(document["revision"]),
        status=_text(document["status"]),
        date=_text(document.get("date")),
        machine=_text(results.get("machine")),
        template=_text(template.get("name")) if isinstance(template, dict) else "",
        verdict=verdict,
        not_met=not_met,
        holds=len(results.get("holds", [])),
        sign_offs=sign_offs,
        fault="; ".join(faults),
    )


def without_series(content: bytes) -> bytes:
    """Return ``results.json`` without the arrays behind its figures, nine tenths of it.

    Only the form that a run writes is cut (``series`` last, one key a line); anything else
    is returned as it is.
    """
    start = content.find(b'\n "series": {\n')
    end = b"\n }\n}\n"
    if start < 0 or not content.endswith(end):
        return content
    inside = content[start + 13 : -len(end)]
    # another key of the top floor would stand on a line of its own, one space in
    if inside.count(b"\n") != inside.count(b"\n  "):
        return content
    return content[:start] + b'\n "series": {}\n}\n'


def _text(value: Any) -> str:
    """Return a text of a package with what acts instead of showing told as code points."""
    return plain(value) if isinstance(value, str) else ""


def _verdict(criteria: Any) -> tuple[str, tuple[str, ...]]:
    if not isinstance(criteria, list) or not criteria:
        return "no criterion", ()
    stated = [one for one in criteria if isinstance(one, dict)]
    verdicts = {one.get("verdict") for one in stated}
    not_met = tuple(_text(o.get("title")) for o in stated if o.get("verdict") == "does not meet")
    if not_met:
        return "does not meet", not_met
    return ("meets" if verdicts == {"meets"} else "not assessed"), ()


def _sign_offs(files: PackageFiles) -> tuple[tuple[SignOff, ...], list[str]]:
    found, faults = [], []
    tag_manifest = files.read(TAG_MANIFEST) or b""
    for role in ROLES:
        content = files.read(f"{SIGNATURES}{role}/{STATEMENT_FILE}")
        if content is None:
            continue
        try:
            statement = Statement.from_bytes(content)
        except ValueError as error:
            faults.append(f"the statement of {role} {error}")
            continue
        if statement.role != role or statement.tag_manifest != sha512(tag_manifest):
            faults.append(f"the sign-off {role} is for another package or role")
        found.append(SignOff(role, _text(statement.name), f"{statement.time:%Y-%m-%dT%H:%M:%SZ}"))
    return tuple(found), faults


def _damage(files: PackageFiles, results: bytes) -> Iterator[str]:
    """Yield what is seen to be wrong without reading every byte."""
    manifest, tags = files.read(MANIFEST), files.read(TAG_MANIFEST)
    if manifest is None or tags is None:
        yield f"{MANIFEST if manifest is None else TAG_MANIFEST} is missing"
        return
    if f"{sha512(manifest)}  {MANIFEST}\n".encode() not in tags:
        yield f"{MANIFEST} is not the one of {TAG_MANIFEST}"
    if f"{sha512(results)}  {RESULTS}\n".encode() not in manifest:
        yield f"{RESULTS} is not the one of {MANIFEST}"
    listed = {line[130:] for line in manifest.decode(errors="replace").split("\n")[:-1]}
    present = {name for name in files.names() if name.startswith(PAYLOAD)}
    if missing := sorted(listed - present):
        yield f"missing: {_some(missing)}"
    if added := sorted(present - listed):
        yield f"not in the manifest: {_some(added)}"


def _some(names: list[str]) -> str:
    return ", ".join(names[:3]) + (f" and {len(names) - 3} more" if len(names) > 3 else "")


def _verified(archive: Path, entry: Entry) -> Entry:
    from reportgen.archive.verify import verify_package

    try:
        found = verify_package(archive / entry.place)
    except PackageError as error:
        # an error names the place on this machine; a register names none
        return replace(entry, verified=str(error).replace(str(archive), "").lstrip("/\\"))
    fault = entry.fault
    if found.kind == "damaged" and not fault:
        fault = found.headline.partition(": ")[2]
    return replace(entry, verified=found.headline, fault=fault)


def _superseded(entries: Iterable[Entry]) -> list[Entry]:
    by_number: dict[str, list[Entry]] = {}
    for entry in entries:
        by_number.setdefault(entry.number, []).append(entry)
    out: list[Entry] = []
    for number, group in by_number.items():
        if not number:
            out += group
            continue
        revisions = sorted({(e.date, natural(e.revision), e.revision) for e in group})
        names = [revision for *_, revision in revisions]
        following = {one: other for one, other in pairwise(names) if one != other}
        out += [replace(e, superseded_by=following.get(e.revision, "")) for e in group]
    return out


def _in_order(entries: list[Entry]) -> list[Entry]:
    entries.sort(key=lambda e: (e.date, natural(e.revision)), reverse=True)
    entries.sort(key=lambda e: (not e.number, natural(e.number), bool(e.superseded_by)))
    return entries


def natural(text: str) -> tuple[tuple[int, int | str], ...]:
    """Return a key under which 2 comes before 10, B before AA, and A before B."""
    parts = re.findall(r"\d+|[^\d]+", text)
    return tuple(
        (len(part), int(part)) if part.isdecimal() else (100 + len(part), part.casefold())
        for part in parts
    )


def counts(entries: Iterable[Entry]) -> Mapping[str, int]:
    """Return how many packages there are of each sort that a reader asks for first."""
    found = dict.fromkeys(("packages", "latest", "do not meet", "with holds", "damaged"), 0)
    for entry in entries:
        found["packages"] += 1
        latest = not entry.superseded_by and bool(entry.number)
        found["latest"] += latest
        found["do not meet"] += latest and entry.verdict == "does not meet"
        found["with holds"] += latest and entry.holds > 0
        found["damaged"] += bool(entry.fault)
    return found


def to_json(entries: Iterable[Entry]) -> dict[str, Any]:
    """Give the machine-readable register."""
    listed = list(entries)
    return {"format": 1, **counts(listed), "entries": [entry.as_dict() for entry in listed]}
