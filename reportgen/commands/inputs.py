"""Commands about case files and templates; nothing is calculated."""

from __future__ import annotations

import argparse
import json

from reportgen.commands.shared import print_json
from reportgen.errors import InputError, Problem


def check(arguments: argparse.Namespace) -> int:
    from reportgen.case import read_case

    problems: list[Problem] = []
    found = []
    for path in arguments.cases:
        try:
            case = read_case(path)
        except InputError as error:
            problems += error.problems
            continue
        holds = case.holds()
        found.append({"case": str(path), "template": case.template, "holds": holds})
        if not arguments.json:
            print(f"{path}: reads well as {case.template}; open holds: {len(holds)}")
            for hold in holds:
                print(f"  {hold['id']}  {hold['text']}")
    if problems:
        raise InputError(problems)
    if arguments.json:
        print_json(found)
    return 0


def schema(arguments: argparse.Namespace) -> int:
    from reportgen.case import schema

    print(json.dumps(schema(), indent=arguments.indent, ensure_ascii=False))
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
