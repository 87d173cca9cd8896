"""The command that calculates cases."""

from __future__ import annotations

import argparse
from dataclasses import dataclass
from pathlib import Path
from tempfile import TemporaryDirectory

from reportgen.commands.batch import run_batch
from reportgen.commands.results import first_signature, options_of, print_done
from reportgen.commands.shared import note, print_json, say
from reportgen.errors import InputError, Problem


def run(arguments: argparse.Namespace) -> int:
    """Calculate the cases given, one by one or many at once."""
    with TemporaryDirectory(prefix="reportgen-") as scratch:
        cases = _cases(arguments.cases, Path(scratch))
        if len(cases) > 1 or arguments.scheduler:
            return run_batch(cases, arguments)
        return _run_one(cases[0].path, arguments)


@dataclass(frozen=True)
class Asked:
    """A case to run, and how to name it to the user."""

    path: Path
    name: str


def _cases(given: list[str], scratch: Path) -> list[Asked]:
    """Return the cases meant: patterns looked up, families written out."""
    from reportgen.run.family import expand, is_family

    found: list[Asked] = []
    for number, text in enumerate(given):
        path = Path(text)
        if not path.exists() and any(sign in text for sign in "*?["):
            matched = sorted(Path(path.anchor or ".").glob(str(path.relative_to(path.anchor))))
            if not matched:
                raise InputError(Problem(f"no file matches {text!r}", "check the pattern"))
        else:
            matched = [path]
        for one in matched:
            if is_family(one):
                folder = scratch / f"{number}-{one.stem}"
                members = expand(one, folder)
                found += [Asked(case, f"{one}, {case.stem}") for case in members]
            else:
                found.append(Asked(one, str(one)))
    return found


def _run_one(case: Path, arguments: argparse.Namespace) -> int:
    from reportgen.run.cache import RunStore
    from reportgen.run.remembered import calculate, described, store_folder
    from reportgen.sheet.lines import plain

    sign = None if arguments.no_sign else first_signature(arguments)
    store = None if arguments.fresh else RunStore(store_folder())
    one = calculate(case, options_of(arguments), say, sign, store)
    for words in one.notes:
        note(words)
    if not one.again:
        note(f"nothing has changed since {one.package.name} was made: it was not run again")
        if sign is not None and not (one.package / "signatures" / "prepared").exists():
            sign(one.package, one.results)
    if arguments.json:
        found = described(one)
        print_json({**found, "conclusion": plain(found["conclusion"]),
                    "exit_status": one.exit_status})  # fmt: skip
    else:
        print_done(one)
    return one.exit_status
