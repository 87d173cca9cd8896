"""Commands about case files and templates; nothing is calculated."""

from __future__ import annotations

import argparse
import json
from pathlib import Path
from tempfile import TemporaryDirectory

from reportgen.commands.shared import print_json
from reportgen.errors import InputError, Problem


def check(arguments: argparse.Namespace) -> int:
    """Read cases and families, and list what is open in each."""
    from reportgen.case import read_case
    from reportgen.run.family import expand, is_family

    problems: list[Problem] = []
    found = []
    with TemporaryDirectory(prefix="reportgen-") as scratch:
        for number, path in enumerate(arguments.cases):
            try:
                family = is_family(path)
                members = expand(path, Path(scratch) / str(number)) if family else [path]
                cases = [read_case(member) for member in members]
            except InputError as error:
                problems += error.problems
                continue
            for member, case in zip(members, cases, strict=True):
                holds = case.holds()
                name = f"{path}, {member.stem}" if family else str(path)
                found.append({"case": name, "template": case.template, "holds": holds})
                if not arguments.json:
                    print(f"{name}: reads well as {case.template}; open holds: {len(holds)}")
                    for hold in holds:
                        print(f"  {hold['id']}  {hold['text']}")
    if problems:
        raise InputError(problems)
    if arguments.json:
        print_json(found)
    return 0


def new(arguments: argparse.Namespace) -> int:
    """Begin a case file; one that is there is never overwritten."""
    import datetime

    from reportgen.case.starter import Beginning, count_rows, starter
    from reportgen.package.disk import write_file

    target: Path | None = arguments.output
    sections = None
    if arguments.sections is not None:
        rows = count_rows(arguments.sections)
        folder = target.parent if target is not None else Path()
        sections = (_beside(arguments.sections, folder), rows)
    today = datetime.date.today().isoformat()
    text = starter(Beginning(arguments.template, arguments.units, today, sections, arguments.of))
    if target is None:
        if arguments.json:
            print_json({"case": None, "text": text})
        else:
            print(text, end="")
        return 0
    if target.exists():
        raise InputError(Problem("this file is there already", "choose another name", str(target)))
    target.parent.mkdir(parents=True, exist_ok=True)
    write_file(target, text.encode())
    if arguments.json:
        print_json({"case": str(target), "text": text})
    else:
        print(f"case: {target}")
    return 0


def _beside(table: Path, folder: Path) -> str:
    """Return a table's name from the case's folder, which it must lie in or below."""
    try:
        return table.resolve().relative_to(folder.resolve()).as_posix()
    except ValueError:
        remedy = "put it beside the case: side tables travel with the case"
        found = "the table of sections lies outside the case's folder"
        raise InputError(Problem(found, remedy, str(table))) from None


def schema(arguments: argparse.Namespace) -> int:
    """Print the JSON Schema of case files, or of families."""
    from reportgen.case import schema as of_cases
    from reportgen.run.family import schema as of_families

    published = of_families() if arguments.family else of_cases()
    print(json.dumps(published, indent=arguments.indent, ensure_ascii=False))
    return 0


def templates(arguments: argparse.Namespace) -> int:
    import nbformat

    from reportgen.resources import templates

    rows = []
    for name, path in templates().items():
        notebook = nbformat.reads(path.read_text(encoding="utf-8"), as_version=4)  # type: ignore[no-untyped-call]
        rows.append({"name": name, "purpose": notebook.metadata.get("purpose", "")})
    if arguments.json:
        print_json(rows)
    else:
        for row in rows:
            print(f"{row['name']:<22} {row['purpose']}")
    return 0
