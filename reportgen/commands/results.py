"""What commands that run cases share: options, the first signature, the table of verdicts."""

from __future__ import annotations

import argparse
import sys
from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING, Any, Literal

from reportgen.commands.shared import identity_of, note, say, timestamper_of

if TYPE_CHECKING:
    from reportgen.package.identity import Identity


def options_of(arguments: argparse.Namespace, many: bool = False) -> Any:
    """Return how cases are to be run; one alone gains nothing from a warm kernel."""
    from reportgen.run.job import Options
    from reportgen.run.warm import can_fork

    kernel: Literal["warm", "plain"] = arguments.kernel or (
        "warm" if many and can_fork() else "plain"
    )
    return Options(
        output=arguments.output,
        allow_templates=frozenset(getattr(arguments, "allow_template", ())),
        house=arguments.house,
        kernel=kernel,
        timeout=arguments.timeout,
        replace_draft=arguments.replace_draft,
    )


def made(case: Path, arguments: argparse.Namespace) -> Any:
    """Run a case that a command wrote and return what is done."""
    from reportgen.run.job import build

    sign = None if arguments.no_sign else first_signature(arguments)
    one = build(case, options_of(arguments), say, sign)
    for words in one.notes:
        note(words)
    return one


def first_signature(
    arguments: argparse.Namespace,
) -> Callable[[Path, dict[str, Any]], None]:
    """Return what signs a fresh package as prepared; a draft stays unsigned, and that is said.

    An identity that is named is opened here, before anything is calculated: a wrong passphrase
    is told at once.
    """
    known: dict[str, Identity] = {}
    named = arguments.identity is not None or arguments.pkcs11 is not None
    stated = identity_of(arguments, "") if named else None
    timestamper = timestamper_of(arguments)

    def sign(package: Path, results: dict[str, Any]) -> None:
        from reportgen.package.sign import sign_package
        from reportgen.package.statement import DEFAULT_WORDS

        document = results["document"]
        if document["status"] == "draft":
            note("the case is a draft: its package is not signed")
            return
        signer = document["prepared"]["name"]
        if signer not in known:
            known[signer] = stated or identity_of(arguments, signer)
        sign_package(
            package,
            "prepared",
            known[signer],
            DEFAULT_WORDS["prepared"],
            signer,
            timestamper=timestamper,
        )

    return sign


def print_done(one: Any) -> None:
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
