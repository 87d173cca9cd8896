"""Commands about revisions: compare, revise, worst."""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import Any

from reportgen.commands.results import made, print_done
from reportgen.commands.shared import note, print_json, print_table, say
from reportgen.errors import InputError, Problem


def compare(arguments: argparse.Namespace) -> int:
    from tempfile import TemporaryDirectory

    from reportgen.archive import compare_print as told
    from reportgen.archive.compare import load_side, write_comparison
    from reportgen.archive.compare_archived import compared

    with TemporaryDirectory(prefix="reportgen-") as scratch:
        folders = [Path(scratch) / name for name in ("a", "b", "made")]
        for folder in folders:
            folder.mkdir()
        sides = (load_side(arguments.old, folders[0]), load_side(arguments.new, folders[1]))
        say("computing both, and each change apart")
        calc, as_archived = compared(*sides)
        package = None
        if arguments.output is not None:
            if as_archived:
                raise InputError(Problem(as_archived, "leave -o out"))
            stated = {
                key: getattr(arguments, key)
                for key in ("number", "title", "revision", "status", "date")
            }
            if arguments.prepared:
                stated["prepared"] = {"name": arguments.prepared}
            case = write_comparison(*sides, folders[2], stated)
            package = made(case, arguments).package
    notes = [as_archived] if as_archived else told.archive_notes(sides, calc)
    for words in notes:
        note(words)
    if arguments.json:
        found = told.as_dict(sides, calc)
        print_json(found if package is None else {**found, "package": str(package)})
    else:
        from reportgen.sheet.comparison_words import conclusion
        from reportgen.sheet.lines import plain

        for caption, titles, rows in told.tables(calc):
            print_table(caption, titles, rows)
        print(plain(conclusion(calc)).strip())
        if package is not None:
            print(f"package: {package}")
    return 3 if any(j.outcome.verdict == "does not meet" for j in calc.judged) else 0


def revise(arguments: argparse.Namespace) -> int:
    import datetime
    from tempfile import TemporaryDirectory

    from reportgen.archive.revise import Revision, Setting, copied, keep_case, revised_text

    if arguments.no_run and arguments.case is None:
        raise InputError(Problem("--no-run leaves nothing", "say where to with --case FILE"))
    revision = Revision(
        arguments.revision,
        arguments.reason,
        arguments.date or datetime.date.today().isoformat(),
        by=arguments.by,
        status=arguments.status,
        source=arguments.origin,
    )
    settings = [Setting.parse(text) for text in arguments.settings]
    with TemporaryDirectory(prefix="reportgen-") as scratch:
        case = copied(arguments.source, Path(scratch))
        text = revised_text(case, settings, arguments.remove, revision)
        case.write_text(text, encoding="utf-8", newline="")
        if arguments.case is not None:
            keep_case(case, text, arguments.case)
        found: dict[str, Any] = {"case": str(arguments.case)} if arguments.case else {}
        if arguments.no_run:
            one = None
        else:
            one = made(case, arguments)
            found |= {
                "package": str(one.package),
                "conclusion": one.results["conclusion"],
                "criteria": one.results["criteria"],
            }
    if arguments.json:
        print_json(found)
    else:
        if one is not None:
            print_done(one)
        if arguments.case is not None:
            print(f"case: {arguments.case}")
    return 0 if one is None else int(one.exit_status)


def worst(arguments: argparse.Namespace) -> int:
    from tempfile import TemporaryDirectory

    from reportgen.archive.revise import keep_case
    from reportgen.archive.worst import worst_case

    with TemporaryDirectory(prefix="reportgen-") as scratch:
        one = worst_case(arguments.package, arguments.criterion, Path(scratch))
        keep_case(one.path, one.text, arguments.case)
    found = {"case": str(arguments.case), "criterion": one.criterion, "margin": one.margin}
    if arguments.json:
        print_json(found)
    else:
        print(f"worst against {one.criterion}: margin {100 * one.margin:.3g} % of the limit")
        print(f"case: {arguments.case}")
    return 0
