"""What commands share: words to the user, tables, the identity that signs."""

from __future__ import annotations

import argparse
import json
import os
import sys
from collections.abc import Sequence
from getpass import getpass
from typing import TYPE_CHECKING, Any

from reportgen.errors import InputError, Problem, ReportgenError, SignatureError

if TYPE_CHECKING:
    from pyhanko.sign.timestamps import TimeStamper

    from reportgen.package.identity import Identity, Passphrase

PASSPHRASE = "REPORTGEN_PASSPHRASE"


def print_error(error: ReportgenError, *, as_json: bool) -> None:
    """Print an error: plain on standard error, and as an object where that was asked for."""
    print(f"reportgen: {error}", file=sys.stderr)
    if as_json:
        problems = error.problems if isinstance(error, InputError) else [Problem(str(error))]
        print_json(
            {
                "error": type(error).__name__,
                "exit_status": error.exit_status,
                "problems": [vars(problem) for problem in problems],
            }
        )


def say(words: str) -> None:
    if sys.stderr.isatty():
        print(f"  {words} …", file=sys.stderr)


def note(words: str) -> None:
    print(f"note: {words}", file=sys.stderr)


def print_json(value: Any) -> None:
    print(json.dumps(value, indent=1, ensure_ascii=False))


def identity_of(arguments: argparse.Namespace, name: str) -> Identity:
    """Return the identity that signs: a file, a token, or the person's own self-issued one."""
    from reportgen.package import identity

    passphrase = _passphrase(arguments)
    if arguments.pkcs11 is not None:
        if not arguments.token or not arguments.key:
            remedy = "give --token and --key, the labels of the token and of its certificate"
            raise InputError(
                Problem("a token is named without its labels", remedy, field="--pkcs11")
            )
        return identity.load_pkcs11(
            arguments.pkcs11, arguments.token, certificate=arguments.key, pin=passphrase
        )
    if arguments.identity is not None:
        return identity.load_pkcs12(arguments.identity, passphrase)
    return identity.self_issued_identity(name, announce=note)


def timestamper_of(arguments: argparse.Namespace) -> TimeStamper | None:
    """Return who is asked for the time, where the user names an authority."""
    if arguments.timestamp is None:
        return None
    from reportgen.package.stamps import http_timestamper

    return http_timestamper(arguments.timestamp)


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


def print_table(caption: str, titles: tuple[str, ...], rows: Sequence[tuple[str, ...]]) -> None:
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
