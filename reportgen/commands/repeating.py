"""Commands about finished packages: repeat the calculation, pack it as one file."""

from __future__ import annotations

import argparse
import sys

from reportgen.commands.shared import print_json, print_table, say

DIFFERS = 4


def rerun(arguments: argparse.Namespace) -> int:
    """Repeat an archived calculation and compare it result by result."""
    from reportgen.archive.verify import load_anchors
    from reportgen.run.rerun import rerun as repeat

    def allow(reason: str) -> bool:
        if arguments.run_archived_template:
            return True
        if not sys.stdin.isatty():
            return False
        print(f"{reason}.", file=sys.stderr)
        return input("run it all the same? [y/N] ").strip().lower() in ("y", "yes")

    anchors = [anchor for path in arguments.trust for anchor in load_anchors(path)]
    archived, found = repeat(
        arguments.package,
        anchors,
        allow,
        say,
        output=arguments.output,
        timeout=arguments.timeout,
    )
    if arguments.json:
        worth = {"kind": archived.kind, "headline": archived.headline}
        print_json({"package": worth, **found.to_json()})
        return DIFFERS if found.kind == "differs" else 0
    rows = [
        (one.title, _shown(one.then), _shown(one.now), _shown(one.difference), one.kind)
        for one in found.results
    ]
    print_table("Results, verdicts and curves", ("of", "then", "now", "difference", ""), rows)
    changed = [(name,) for name, same in found.files if not same]
    if changed:
        print_table("Files whose bytes are not the same", ("file",), changed)
    if found.reasons:
        print("What is not the same about the two:")
    for reason in found.reasons:
        print(f"  {reason}")
    print(archived.headline)
    print(found.headline)
    return DIFFERS if found.kind == "differs" else 0


def _shown(value: float | str | None) -> str:
    if value is None:
        return "–"
    return value if isinstance(value, str) else f"{value:.8g}"


def zip(arguments: argparse.Namespace) -> int:
    """Pack a package as one file; the same package gives the same bytes."""
    from reportgen.package.zipped import zip_package

    path = zip_package(arguments.package, arguments.output)
    if arguments.json:
        print_json({"zip": str(path)})
    else:
        print(f"zip: {path}")
    return 0
