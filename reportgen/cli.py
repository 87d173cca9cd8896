"""The command line: parse, call, print. No calculation, no heavy import at start-up."""

from __future__ import annotations

import argparse
import sys
from collections.abc import Sequence
from pathlib import Path
from typing import Any

from reportgen import __version__
from reportgen.errors import ReportgenError

EXIT_STATUS = """\
exit status:
  0  done, every criterion met
  1  the tool or a cell of the template failed
  2  the input or the command is at fault
  3  done, a criterion not met
  4  verification failed
"""


def main(argv: Sequence[str] | None = None) -> int:
    """Run one command and return its exit status."""
    arguments = parser().parse_args(argv)
    from reportgen import commands

    try:
        return commands.run(arguments)
    except ReportgenError as error:
        from reportgen.commands.shared import print_error

        print_error(error, as_json=arguments.json)
        return error.exit_status
    except KeyboardInterrupt:
        print("stopped; finished packages are whole", file=sys.stderr)
        return 130
    except BrokenPipeError:
        return 1


def parser() -> argparse.ArgumentParser:
    """Return the parser of the whole command line."""
    top = argparse.ArgumentParser(
        prog="reportgen",
        description="Lateral-vibration calculation reports for rotating machines: one case file "
        "in, one signed calculation package out.",
        epilog=EXIT_STATUS,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    top.add_argument("--version", action="version", version=f"reportgen {__version__}")
    commands = top.add_subparsers(dest="command", metavar="COMMAND", required=True)

    run = _command(commands, "run", "calculate a case and leave a signed calculation package")
    run.add_argument(
        "cases",
        nargs="+",
        metavar="CASE",
        help="case file or family of cases (YAML), or a pattern such as 'cases/*.yaml'",
    )
    run.add_argument(
        "-j",
        "--jobs",
        type=_at_least_one,
        default=1,
        metavar="N",
        help="run N cases at once on this computer (default 1)",
    )
    run.add_argument(
        "--scheduler", metavar="ADDRESS", help="run on the Dask cluster of this scheduler"
    )
    run.add_argument(
        "--fresh", action="store_true", help="run again what has not changed since its last run"
    )
    _add_run_options(run)

    check = _command(commands, "check", "read and judge a case's inputs; run nothing")
    check.add_argument("cases", nargs="+", type=Path, metavar="CASE", help="case file (YAML)")

    new = _command(commands, "new", "begin a case file for a template")
    new.add_argument("template", metavar="TEMPLATE", help="a template, see reportgen templates")
    new.add_argument(
        "-o", "--output", type=Path, metavar="FILE", help="file to write (default: print it)"
    )
    new.add_argument("--units", choices=("si", "us"), default="si", help="units (default si)")
    new.add_argument(
        "--sections", type=Path, metavar="CSV", help="table of shaft sections to begin from"
    )
    new.add_argument(
        "--of", default="rotor.yaml", metavar="CASE", help="case that a study or comparison is of"
    )

    schema = _command(commands, "schema", "print the JSON Schema of case files")
    schema.add_argument(
        "--family", action="store_true", help="of family files, which vary one case"
    )
    schema.add_argument("--indent", type=int, default=2, help="spaces of indentation (default 2)")

    _command(commands, "templates", "list the shipped templates")

    verify = _command(commands, "verify", "check a package's bytes and signatures")
    verify.add_argument("package", type=Path, metavar="PACKAGE", help="package folder or .zip")
    verify.add_argument(
        "--trust",
        type=Path,
        action="append",
        default=[],
        metavar="FILE",
        help="certificate (PEM) of an authority to trust; may be given more than once",
    )

    rerun = _command(
        commands, "rerun", "repeat an archived calculation and compare it result by result"
    )
    rerun.add_argument("package", type=Path, metavar="PACKAGE", help="package folder or .zip")
    rerun.add_argument(
        "--trust",
        type=Path,
        action="append",
        default=[],
        metavar="FILE",
        help="certificate (PEM) to trust; a package signed under it may run its own template",
    )
    rerun.add_argument(
        "--run-archived-template",
        action="store_true",
        help="run the package's own template although its signature is not trusted",
    )
    rerun.add_argument(
        "-o",
        "--output",
        type=Path,
        metavar="DIR",
        help="also leave the repetition in this folder, as a package that nobody signed",
    )
    rerun.add_argument(
        "--timeout", type=float, default=600.0, metavar="SECONDS", help="longest time for one cell"
    )

    zipped = _command(commands, "zip", "pack a package as one file, always the same bytes")
    zipped.add_argument("package", type=Path, metavar="PACKAGE", help="package folder")
    zipped.add_argument(
        "-o", "--output", type=Path, metavar="FILE", help="file (default: PACKAGE.zip)"
    )

    sign = _command(commands, "sign", "add a sign-off to a finished package")
    sign.add_argument("package", type=Path, metavar="PACKAGE", help="package folder")
    sign.add_argument("--role", required=True, choices=("prepared", "checked", "approved"))
    sign.add_argument("--name", required=True, help="name of who signs")
    sign.add_argument("--statement", default="", help="what is stated by signing")
    sign.add_argument(
        "--accept-hold",
        action="append",
        default=[],
        metavar="ID",
        help="open hold accepted with this sign-off, such as H2; may be given more than once",
    )
    _add_identity_options(sign)

    compare = _command(commands, "compare", "show what changed between two calculations")
    compare.add_argument("old", type=Path, metavar="OLD", help="package or case file")
    compare.add_argument("new", type=Path, metavar="NEW", help="package or case file")
    compare.add_argument(
        "-o",
        "--output",
        type=Path,
        metavar="DIR",
        help="also leave the comparison as a signed package in this folder",
    )
    _add_document_options(compare)
    _add_making_options(compare)

    revise = _command(commands, "revise", "rerun a calculation with changed values as a revision")
    _add_revise_options(revise)
    _add_making_options(revise)

    worst = _command(commands, "worst", "write the worst rotor of a tolerance study as a case")
    worst.add_argument("package", type=Path, metavar="PACKAGE", help="of a tolerance study")
    worst.add_argument(
        "--criterion",
        default="",
        metavar="ID",
        help="worst against this one, such as C2 (default: the least margin of all)",
    )
    worst.add_argument("--case", type=Path, required=True, metavar="FILE", help="case to write")

    register = _command(commands, "register", "write one page and a CSV of an archive's packages")
    register.add_argument("archive", type=Path, metavar="DIR", help="folder of packages")
    register.add_argument(
        "-o",
        "--output",
        type=Path,
        metavar="FILE",
        help="the page; the CSV stands beside it (default: register.html in DIR)",
    )
    register.add_argument(
        "--verify", action="store_true", help="verify every package: slow, reads every byte"
    )

    identity = _command(commands, "identity", "show the signing identity that would be used")
    identity.add_argument("--name", required=True, help="name of the person who signs")
    identity.add_argument(
        "--pem", action="store_true", help="print the certificate, to hand to those who check"
    )
    _add_identity_options(identity)
    return top


def _command(commands: Any, name: str, words: str) -> argparse.ArgumentParser:
    command: argparse.ArgumentParser = commands.add_parser(
        name,
        help=words,
        description=words[0].upper() + words[1:] + ".",
        epilog=EXIT_STATUS,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    command.add_argument(
        "--json", action="store_true", help="print one machine-readable object instead of text"
    )
    return command


def _at_least_one(text: str) -> int:
    number = int(text)
    if number < 1:
        raise argparse.ArgumentTypeError(f"{text}: give 1 or more")
    return number


def _add_run_options(run: argparse.ArgumentParser) -> None:
    run.add_argument(
        "-o",
        "--output",
        type=Path,
        default=Path("reports"),
        metavar="DIR",
        help="folder that packages are left in (default: reports)",
    )
    run.add_argument(
        "--allow-template",
        action="append",
        default=[],
        metavar="NAME",
        help="file name of a local template that may run; templates are code",
    )
    _add_making_options(run)


def _add_making_options(run: argparse.ArgumentParser) -> None:
    """Add what any command that makes a package takes."""
    run.add_argument(
        "--house", type=Path, metavar="FILE", help="house file: letterhead, colours, closing text"
    )
    run.add_argument(
        "--no-sign", action="store_true", help="leave the package without a first signature"
    )
    run.add_argument(
        "--replace-draft",
        action="store_true",
        help="replace a package of the same number and revision whose status is draft",
    )
    run.add_argument(
        "--timeout", type=float, default=600.0, metavar="SECONDS", help="longest time for one cell"
    )
    run.add_argument(
        "--kernel",
        choices=("warm", "plain"),
        default=None,
        help="warm: kernels forked from a prepared parent; plain: a new process each (default: "
        "warm for more than one case, where the system can fork)",
    )
    _add_identity_options(run)


def _add_revise_options(revise: argparse.ArgumentParser) -> None:
    revise.add_argument("source", type=Path, metavar="OLD", help="package or case file")
    revise.add_argument(
        "--set",
        dest="settings",
        action="append",
        default=[],
        metavar="PATH=VALUE",
        help='value to set, such as speeds.rated="1520 rpm" or criteria[1].margin="25 %%"; '
        "items count from 1; may be given more than once",
    )
    revise.add_argument(
        "--remove", action="append", default=[], metavar="PATH", help="key or item to take out"
    )
    revise.add_argument("--revision", required=True, help="letter or number of the new revision")
    revise.add_argument("--reason", required=True, help="why; goes into the document's history")
    revise.add_argument("--date", help="year-month-day of the new revision (default: today)")
    revise.add_argument("--by", default="", metavar="NAME", help="who made the change")
    revise.add_argument("--status", default="", choices=("draft", "for review", "for issue"))
    revise.add_argument(
        "--source",
        dest="origin",
        default="",
        metavar="TEXT",
        help="source of the new values (default: the old source and the reason)",
    )
    revise.add_argument("--case", type=Path, metavar="FILE", help="also keep the new case here")
    revise.add_argument("--no-run", action="store_true", help="write the case only (with --case)")
    revise.add_argument(
        "-o",
        "--output",
        type=Path,
        default=Path("reports"),
        metavar="DIR",
        help="folder that the package is left in (default: reports)",
    )
    revise.add_argument(
        "--allow-template", action="append", default=[], metavar="NAME",
        help="file name of a local template that may run; templates are code",
    )  # fmt: skip


def _add_document_options(command: argparse.ArgumentParser) -> None:
    """Add the document control of a comparison; the rest is taken from the new calculation."""
    control = command.add_argument_group("document control of the package")
    control.add_argument("--number", help="(default: that of NEW with both revisions)")
    control.add_argument("--title")
    control.add_argument("--revision", help="(default: A)")
    control.add_argument("--status", choices=("draft", "for review", "for issue"))
    control.add_argument("--date", help="year-month-day (default: that of NEW)")
    control.add_argument("--prepared", metavar="NAME", help="who prepares it (default: as NEW)")


def _add_identity_options(command: argparse.ArgumentParser) -> None:
    command.add_argument(
        "--identity",
        type=Path,
        metavar="FILE",
        help="PKCS#12 file to sign with (default: your own self-issued identity)",
    )
    command.add_argument(
        "--passphrase-file",
        type=Path,
        metavar="FILE",
        help="file that holds the passphrase or PIN; otherwise REPORTGEN_PASSPHRASE or a prompt",
    )
    command.add_argument(
        "--pkcs11", type=Path, metavar="MODULE", help="PKCS#11 module of a token to sign with"
    )
    command.add_argument("--token", metavar="LABEL", help="label of the token")
    command.add_argument("--key", metavar="LABEL", help="label of its certificate and key")
    command.add_argument(
        "--timestamp", metavar="URL", help="time-stamping authority (RFC 3161) to ask"
    )


if __name__ == "__main__":
    sys.exit(main())
