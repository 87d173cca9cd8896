"""What each command does: call the floors below and print what came of it."""

from __future__ import annotations

import argparse
import json
import os
import sys
from collections.abc import Callable
from getpass import getpass
from pathlib import Path
from typing import TYPE_CHECKING, Any

from reportgen.errors import InputError, Problem, ReportgenError, SignatureError

if TYPE_CHECKING:
    from reportgen.package.identity import Identity, Passphrase

PASSPHRASE = "REPORTGEN_PASSPHRASE"
_STATEMENTS = {
    "prepared": "Prepared by calculation from the case file in this package.",
    "checked": "Checked: inputs against their sources, method, results and second computations.",
    "approved": "Approved for the use stated in the document.",
}


def run(arguments: argparse.Namespace) -> int:
    """Carry out a parsed command and return its exit status."""
    return _COMMANDS[arguments.command](arguments)


def print_error(error: ReportgenError, *, as_json: bool) -> None:
    """Print an error: plain on standard error, and as an object where that was asked for."""
    print(f"reportgen: {error}", file=sys.stderr)
    if as_json:
        problems = error.problems if isinstance(error, InputError) else [Problem(str(error))]
        _print_json(
            {
                "error": type(error).__name__,
                "exit_status": error.exit_status,
                "problems": [vars(problem) for problem in problems],
            }
        )


def _say(words: str) -> None:
    if sys.stderr.isatty():
        print(f"  {words} …", file=sys.stderr)


def _note(words: str) -> None:
    print(f"note: {words}", file=sys.stderr)


def _print_json(value: Any) -> None:
    print(json.dumps(value, indent=1, ensure_ascii=False))


# --- run ----------------------------------------------------------------------------------


def _run(arguments: argparse.Namespace) -> int:
    from reportgen.run.job import Options, build
    from reportgen.sheet.lines import plain

    options = Options(
        output=arguments.output,
        allow_templates=frozenset(arguments.allow_template),
        house=arguments.house,
        kernel=arguments.kernel,
        timeout=arguments.timeout,
        replace_draft=arguments.replace_draft,
    )
    sign = None if arguments.no_sign else _first_signature(arguments)
    done = []
    for case_path in arguments.cases:
        one = build(case_path, options, _say, sign)
        for note in one.notes:
            _note(note)
        done.append(one)
        if not arguments.json:
            _print_done(one)
    if arguments.json:
        _print_json(
            [
                {
                    "package": str(one.package),
                    "notes": one.notes,
                    "exit_status": one.exit_status,
                    "conclusion": plain(one.results["conclusion"]),
                    "criteria": one.results["criteria"],
                    "holds": one.results["holds"],
                }
                for one in done
            ]
        )
    return max(one.exit_status for one in done)


def _first_signature(
    arguments: argparse.Namespace,
) -> Callable[[Path, dict[str, Any]], None]:
    """Return what signs a fresh package as prepared; a draft stays unsigned, and that is said."""

    def sign(package: Path, results: dict[str, Any]) -> None:
        from reportgen.package.sign import sign_package

        document = results["document"]
        if document["status"] == "draft":
            _note("the case is a draft: its package is not signed")
            return
        signer = document["prepared"]["name"]
        words = "Prepared by calculation from the case file in this package."
        sign_package(package, "prepared", _identity(arguments, signer), words, signer)

    return sign


def _print_done(one: Any) -> None:
    from rich.console import Console
    from rich.table import Table
    from rich.text import Text

    console = Console(highlight=False, width=None if sys.stdout.isatty() else 120)
    results = one.results
    table = Table(box=None, pad_edge=False, header_style="bold")
    for title, justify in (
        ("criterion", "left"),
        ("value", "right"),
        ("limit", "right"),
        ("margin", "right"),
        ("verdict", "left"),
    ):
        table.add_column(title, justify=justify, overflow="fold")  # type: ignore[arg-type]
    for criterion in results["criteria"]:
        limit = criterion["limit_shown"]
        if criterion["limit"] is not None:
            limit = f"{criterion['sense']} {limit}"
        table.add_row(
            Text(criterion["title"]),
            Text(criterion["value_shown"]),
            Text(limit),
            Text(criterion["margin_shown"]),
            Text(criterion["verdict"], style="" if criterion["verdict"] == "meets" else "bold"),
        )
    document = results["document"]
    console.print(
        Text(f"{document['number']} revision {document['revision']}: {document['title']}")
    )
    console.print(table)
    if results["holds"]:
        console.print(Text(f"open holds: {len(results['holds'])} (page one of the report)"))
    # a path must stay in one piece, whatever the width of the window
    print(f"package: {one.package}")


# --- check, schema, templates ---------------------------------------------------------------


def _check(arguments: argparse.Namespace) -> int:
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
        _print_json(found)
    return 0


def _schema(arguments: argparse.Namespace) -> int:
    from reportgen.case import schema

    print(json.dumps(schema(), indent=arguments.indent, ensure_ascii=False))
    return 0


def _templates(arguments: argparse.Namespace) -> int:
    import nbformat

    from reportgen.resources import templates

    rows = []
    for name, path in templates().items():
        notebook = nbformat.reads(path.read_text(encoding="utf-8"), as_version=4)  # type: ignore[no-untyped-call]
        rows.append({"name": name, "purpose": notebook.metadata.get("purpose", "")})
    if arguments.json:
        _print_json(rows)
    else:
        for row in rows:
            print(f"{row['name']:<22} {row['purpose']}")
    return 0


# --- sign, verify, identity ------------------------------------------------------------------


def _identity(arguments: argparse.Namespace, name: str) -> Identity:
    """Return the identity that signs: a PKCS#12 file, or the person's own self-issued one."""
    from reportgen.package import identity

    passphrase = _passphrase(arguments)
    if arguments.identity is not None:
        return identity.load_pkcs12(arguments.identity, passphrase)
    return identity.self_issued_identity(name, announce=_note)


def _passphrase(arguments: argparse.Namespace) -> Passphrase:
    from reportgen.package import identity

    if arguments.passphrase_file is not None:
        return identity.passphrase_from_file(arguments.passphrase_file)
    if PASSPHRASE in os.environ:
        return identity.passphrase_from_environment(PASSPHRASE)

    def ask() -> bytes:
        if not sys.stdin.isatty():
            raise SignatureError(
                f"the identity needs a passphrase: set {PASSPHRASE} or use --passphrase-file"
            )
        return getpass("passphrase of the identity: ").encode()

    return ask


def _sign(arguments: argparse.Namespace) -> int:
    from reportgen.package.sign import sign_package

    words = arguments.statement or _STATEMENTS[arguments.role]
    path = sign_package(
        arguments.package,
        arguments.role,
        _identity(arguments, arguments.name),
        words,
        arguments.name,
        accepted_holds=arguments.accept_hold,
    )
    if arguments.json:
        _print_json({"role": arguments.role, "sign_off": str(path)})
    else:
        print(f"signed as {arguments.role}: {path}")
    return 0


def _verify(arguments: argparse.Namespace) -> int:
    from reportgen.archive.verify import load_anchors, verify_package

    anchors = [anchor for path in arguments.trust for anchor in load_anchors(path)]
    verification = verify_package(arguments.package, anchors or None)
    if arguments.json:
        _print_json(verification.to_json())
        return verification.exit_status
    print(verification.headline)
    width = max((len(check.kind) for check in verification.checks), default=0)
    for check in verification.checks:
        print(
            f"  {'ok ' if check.ok else 'BAD'}  {check.kind:<{width}}  "
            f"{check.subject}{': ' if check.detail else ''}{check.detail}"
        )
    return verification.exit_status


# --- compare ----------------------------------------------------------------------------------


def _compare(arguments: argparse.Namespace) -> int:
    from tempfile import TemporaryDirectory

    from reportgen.archive import compare_print as told
    from reportgen.archive.compare import load_side, write_comparison
    from reportgen.archive.compare_archived import compared

    with TemporaryDirectory(prefix="reportgen-") as scratch:
        folders = [Path(scratch) / name for name in ("a", "b", "made")]
        for folder in folders:
            folder.mkdir()
        sides = (load_side(arguments.old, folders[0]), load_side(arguments.new, folders[1]))
        _say("computing both, and each change apart")
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
            package = _made(case, arguments).package
    notes = [as_archived] if as_archived else told.archive_notes(sides, calc)
    for note in notes:
        _note(note)
    if arguments.json:
        found = told.as_dict(sides, calc)
        _print_json(found if package is None else {**found, "package": str(package)})
    else:
        from reportgen.sheet.comparison_words import conclusion
        from reportgen.sheet.lines import plain

        for caption, titles, rows in told.tables(calc):
            _print_table(caption, titles, rows)
        print(plain(conclusion(calc)).strip())
        if package is not None:
            print(f"package: {package}")
    return 3 if any(j.outcome.verdict == "does not meet" for j in calc.judged) else 0


def _made(case: Path, arguments: argparse.Namespace) -> Any:
    """Run a case that a command wrote and return what is done."""
    from reportgen.run.job import Options, build

    options = Options(
        output=arguments.output,
        allow_templates=frozenset(getattr(arguments, "allow_template", ())),
        house=arguments.house,
        kernel=arguments.kernel,
        timeout=arguments.timeout,
        replace_draft=arguments.replace_draft,
    )
    sign = None if arguments.no_sign else _first_signature(arguments)
    one = build(case, options, _say, sign)
    for note in one.notes:
        _note(note)
    return one


def _revise(arguments: argparse.Namespace) -> int:
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
            one = _made(case, arguments)
            found |= {
                "package": str(one.package),
                "conclusion": one.results["conclusion"],
                "criteria": one.results["criteria"],
            }
    if arguments.json:
        _print_json(found)
    else:
        if one is not None:
            _print_done(one)
        if arguments.case is not None:
            print(f"case: {arguments.case}")
    return 0 if one is None else int(one.exit_status)


def _print_table(caption: str, titles: tuple[str, ...], rows: list[tuple[str, ...]]) -> None:
    from rich.console import Console
    from rich.table import Table
    from rich.text import Text

    console = Console(highlight=False, width=None if sys.stdout.isatty() else 140)
    table = Table(box=None, pad_edge=False, header_style="bold")
    for title in titles:
        table.add_column(title, overflow="fold")
    for row in rows:
        table.add_row(*(Text(cell) for cell in row))
    console.print(Text(caption, style="bold"))
    console.print(table if rows else "none")
    console.print()


def _worst(arguments: argparse.Namespace) -> int:
    from tempfile import TemporaryDirectory

    from reportgen.archive.revise import keep_case
    from reportgen.archive.worst import worst_case

    with TemporaryDirectory(prefix="reportgen-") as scratch:
        one = worst_case(arguments.package, arguments.criterion, Path(scratch))
        keep_case(one.path, one.text, arguments.case)
    found = {"case": str(arguments.case), "criterion": one.criterion, "margin": one.margin}
    if arguments.json:
        _print_json(found)
    else:
        print(f"worst against {one.criterion}: margin {100 * one.margin:.3g} % of the limit")
        print(f"case: {arguments.case}")
    return 0


# --- register ---------------------------------------------------------------------------------


def _register(arguments: argparse.Namespace) -> int:
    from reportgen.archive.register import read_register, to_json
    from reportgen.archive.register_page import write_register

    entries = read_register(arguments.archive, verify=arguments.verify)
    page = arguments.output or arguments.archive / "register.html"
    table = page.with_suffix(".csv")
    write_register(arguments.archive, entries, page, table, verified=arguments.verify)
    found = to_json(entries)
    damaged = [entry for entry in entries if entry.fault]
    if arguments.json:
        _print_json({**found, "page": str(page), "table": str(table)})
    else:
        words = f"{found['packages']} packages, {found['latest']} latest of their number"
        print(f"{words}, {found['do not meet']} of these do not meet a criterion")
        for entry in damaged:
            _note(f"{entry.place}: {entry.fault}")
        print(f"register: {page}")
        print(f"table: {table}")
    return 4 if arguments.verify and damaged else 0


def _show_identity(arguments: argparse.Namespace) -> int:
    identity = _identity(arguments, arguments.name)
    if arguments.pem:
        print(identity.pem().decode(), end="")
        return 0
    facts = {
        "name": identity.name,
        "kind": "self-issued" if identity.self_issued else "issued by an authority",
        "SHA-256 fingerprint": identity.fingerprint,
        "kept in": identity.origin,
    }
    if arguments.json:
        _print_json(facts)
    else:
        for name, value in facts.items():
            print(f"{name}: {value}")
    return 0


_COMMANDS = {
    "run": _run,
    "check": _check,
    "schema": _schema,
    "templates": _templates,
    "sign": _sign,
    "verify": _verify,
    "compare": _compare,
    "revise": _revise,
    "worst": _worst,
    "register": _register,
    "identity": _show_identity,
}
