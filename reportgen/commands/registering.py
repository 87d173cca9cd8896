"""The command that lists an archive."""

from __future__ import annotations

import argparse

from reportgen.commands.shared import note, print_json


def register(arguments: argparse.Namespace) -> int:
    from reportgen.archive.register import read_register, to_json
    from reportgen.archive.register_page import write_register

    entries = read_register(arguments.archive, verify=arguments.verify)
    page = arguments.output or arguments.archive / "register.html"
    table = page.with_suffix(".csv")
    write_register(arguments.archive, entries, page, table, verified=arguments.verify)
    found = to_json(entries)
    damaged = [entry for entry in entries if entry.fault]
    if arguments.json:
        print_json({**found, "page": str(page), "table": str(table)})
    else:
        words = f"{found['packages']} packages, {found['latest']} latest of their number"
        print(f"{words}, {found['do not meet']} of these do not meet a criterion")
        for entry in damaged:
            note(f"{entry.place}: {entry.fault}")
        print(f"register: {page}")
        print(f"table: {table}")
    return 4 if arguments.verify and damaged else 0
