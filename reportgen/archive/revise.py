"""A new revision of a case with changed values, its comments and order kept.

The new case is read again and compared with the old one: what differs must be what was asked
for and the document control, and nothing else.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from reportgen.archive.compare import load_side
from reportgen.archive.register import natural
from reportgen.archive.yaml_edit import (
    dumped,
    flow,
    loaded,
    parent,
    remove,
    scalar,
    set_value,
    steps,
    value_of,
)
from reportgen.case import Case, read_case, side_files
from reportgen.case.changes import changes
from reportgen.errors import InputError, PackageError, Problem
from reportgen.package.disk import write_file, write_files

_LONGEST_SOURCE = 500


@dataclass(frozen=True)
class Setting:
    """One value to set, as given: ``speeds.rated`` and ``1520 rpm``."""

    path: str
    value: str

    @classmethod
    def parse(cls, text: str) -> Setting:
        """Read ``path=value``.

        Raises
        ------
        InputError
            If it is not of that form.
        """
        path, equals, value = text.partition("=")
        if not equals or not path.strip():
            remedy = 'write path=value, such as --set speeds.rated="1520 rpm"'
            raise InputError(Problem(f"{text!r} sets nothing", remedy))
        if not value.strip():
            remedy = "give a value; to take a key out name it with --remove"
            raise InputError(Problem(f"{path.strip()} is set to nothing", remedy))
        return cls(path.strip(), value.strip())


@dataclass(frozen=True)
class Revision:
    """What a new revision is called and why it is made.

    Parameters
    ----------
    revision, reason
        The new letter or number; the reason goes into the history.
    date
        Of the new revision, year-month-day.
    by
        Who made the change; who prepared the old revision where empty.
    status
        As the old one where empty, but for review where that was for issue.
    source
        Where the changed values are from. Where empty, each keeps its source, with the
        reason appended, so that no value stands with a source that does not hold it.
    """

    revision: str
    reason: str
    date: str
    by: str = ""
    status: str = ""
    source: str = ""


def revised_text(
    path: Path, settings: Sequence[Setting], removed: Sequence[str], revision: Revision
) -> str:
    """Return the text of a case file with changed values and the next revision.

    Parameters
    ----------
    path
        The old case file, its side tables beside it; its folder is written to, so that it
        should be a copy, as :func:`copied` makes one.
    settings, removed
        Values to set, and keys or items to take out, by their paths; items of lists count
        from 1, as in every message.
    revision
        Document control of the new revision.

    Raises
    ------
    InputError
        If a path leads nowhere, a value does not fit, or the new case is no good.
    """
    old = read_case(path)
    _require_next(old, revision)
    text, data, yaml = loaded(path)
    for setting in settings:
        set_value(data, setting.path, value_of(setting.value))
    for name in removed:
        remove(data, name)
    _advance(data, old, revision)
    plain = dumped(data, yaml, text)
    new = _read_again(path, plain)
    if _state_sources(data, old, new, settings, revision):
        plain = dumped(data, yaml, text)
        new = _read_again(path, plain)
    _require_only(old, new, [*(s.path for s in settings), *removed])
    return plain


def copied(source: Path, scratch: Path) -> Path:
    """Copy a case file, or the case in a package, with its side tables into an empty folder.

    Raises
    ------
    InputError, VerificationError
        As :func:`reportgen.archive.compare.load_side`.
    """
    side = load_side(source, scratch / "as packed")
    files = {name: content for name, content in side.files.items() if name != "results.json"}
    folder = scratch / "case"
    write_files(folder, files)
    return folder / side.name


def keep_case(case: Path, text: str, target: Path) -> None:
    """Write a new case where it is to stay, its side tables beside it.

    Raises
    ------
    PackageError
        If a file of that name is there already with other content; then nothing is written.
    """
    sides = side_files(read_case(case))
    wanted = {target: text.encode(), **{target.parent / n: c for n, c in sides.items()}}
    for path, content in wanted.items():
        if path.exists() and (not path.is_file() or path.read_bytes() != content):
            raise PackageError(f"{path}: is there already with other content; choose another name")
    for path, content in wanted.items():
        if not path.exists():
            path.parent.mkdir(parents=True, exist_ok=True)
            write_file(path, content)


def next_status(status: str) -> str:
    """Return the status of a new revision: never issued by itself."""
    return "for review" if status == "for issue" else status


def _require_next(old: Case, revision: Revision) -> None:
    used = [old.document.revision, *(entry.revision for entry in old.document.history)]
    if revision.revision in used:
        latest = max(used, key=natural)
        remedy = f"the latest is {latest}; give the one that follows it"
        raise InputError(Problem(f"revision {revision.revision} is there already", remedy))
    if revision.date < old.document.date:
        found = f"the date {revision.date} lies before that of revision {old.document.revision}"
        raise InputError(Problem(found, f"{old.document.date} or later"))
    if not revision.reason.strip():
        raise InputError(Problem("no reason is given", "say why with --reason"))


def _advance(data: Any, old: Case, revision: Revision) -> None:
    """Give the document its next revision and carry the history forward."""
    document, was = data["document"], old.document
    by = revision.by or was.prepared.name
    entries = document.get("history")
    if entries is None:
        document["history"] = entries = []
    if was.revision not in [entry.revision for entry in was.history]:
        first = "First issue" if not was.history else "Issued"
        entries.append(flow({"revision": was.revision, "date": was.date, "text": first,
                              "by": scalar(was.prepared.name)}))  # fmt: skip
    entries.append(flow({"revision": revision.revision, "date": revision.date,
                          "text": scalar(" ".join(revision.reason.split())),
                          "by": scalar(by)}))  # fmt: skip
    document["revision"], document["date"] = revision.revision, revision.date
    document["status"] = revision.status or next_status(was.status)
    if revision.by and revision.by != was.prepared.name:
        document["prepared"] = flow({"name": scalar(revision.by)})


def _state_sources(
    data: Any, old: Case, new: Case, settings: Sequence[Setting], revision: Revision
) -> bool:
    """Say in the source of each changed given where its new value is from."""
    stated = {s.path for s in settings}
    before = {path: given for path, _, given in _all_givens(old)}
    changed = False
    for path, _, given in _all_givens(new):
        if path not in stated and f"{path}.value" not in stated:
            continue
        if f"{path}.source" in stated or given == before.get(path):
            continue
        words = revision.source or _appended(given.source, revision)
        at, last = parent(data, path)
        if isinstance(at[last], dict):
            at[last]["source"] = scalar(words)
        else:
            at[last] = flow({"value": at[last], "source": scalar(words)})
        changed = True
    return changed


def _appended(source: str, revision: Revision) -> str:
    added = f"revision {revision.revision}: {' '.join(revision.reason.split())}"
    words = f"{source}; {added}" if source else added
    return words if len(words) <= _LONGEST_SOURCE else added[:_LONGEST_SOURCE]


def _all_givens(case: Case) -> list[tuple[str, str, Any]]:
    from reportgen.case.base import walk
    from reportgen.case.given import Given

    return [(path, title, g) for path, title, g in walk(case) if isinstance(g, Given)]


def _read_again(path: Path, text: str) -> Case:
    """Read a new text in place of the old one, side tables as they are; messages name it new."""
    place = path.with_name(f".{path.stem}.revised{path.suffix}")
    try:
        place.write_text(text, encoding="utf-8", newline="")
        return read_case(place)
    except InputError as error:
        raise InputError([_as_new(p, str(place), path.name) for p in error.problems]) from None
    finally:
        place.unlink(missing_ok=True)


def _as_new(problem: Problem, place: str, name: str) -> Problem:
    if problem.file != place:
        return problem
    return Problem(problem.message, problem.remedy, f"{name} as revised", 0, 0, problem.field)


def _require_only(old: Case, new: Case, asked: Sequence[str]) -> None:
    """Refuse a text that differs from the old one anywhere that was not asked for."""
    places = [tuple(steps(path)) for path in asked]
    for change in changes(_in_words(old.resolved()), _in_words(new.resolved())):
        place = change.place
        if place[0] == "document":
            continue
        if not any(_within(place, one) for one in places):
            found = f"{change.path} would change too, though it was not asked for"
            raise InputError(Problem(found, "make the change in the case file by hand"))


def _within(place: tuple[str | int, ...], asked: tuple[str | int, ...]) -> bool:
    shorter = min(len(place), len(asked))
    return place[:shorter] == asked[:shorter]


def _in_words(part: Any) -> Any:
    from reportgen.case.base import words_of

    if isinstance(part, Mapping):
        return {words_of(str(key)): _in_words(value) for key, value in part.items()}
    if isinstance(part, (list, tuple)):
        return [_in_words(item) for item in part]
    return part
