"""Many cases at once: run, sign as they end, and print what became of each."""

from __future__ import annotations

import argparse
import functools
import sys
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

from reportgen.commands.progress import batch_progress
from reportgen.commands.results import first_signature, options_of
from reportgen.commands.shared import note, print_json
from reportgen.errors import ReportgenError
from reportgen.sheet.lines import plain

if TYPE_CHECKING:
    from reportgen.commands.running import Asked
    from reportgen.run.batch import State, Summary

INTERRUPTED = 130


def run_batch(cases: Sequence[Asked], arguments: argparse.Namespace) -> int:
    """Run many cases; one that fails does not stop the rest."""
    from reportgen.run.batch import run_many
    from reportgen.run.remembered import batch_job, store_folder

    options = options_of(arguments, many=True)
    store = None if arguments.fresh else store_folder()
    job = functools.partial(batch_job, options=options, store=store)
    signing = _Signing(arguments)
    with batch_progress(len(cases)) as tell:

        def on_progress(state: State) -> None:
            tell(state)
            if state.ended is not None and state.ended.result is not None:
                signing(state.ended.result)

        summary = run_many(
            job,
            [case.path for case in cases],
            arguments.jobs,
            on_progress=on_progress,
            scheduler=arguments.scheduler or "",
            warm=options.kernel == "warm",
        )
    found = _told(summary, cases, signing.failed)
    if arguments.json:
        print_json(found)
    else:
        _print(found)
    return INTERRUPTED if summary.interrupted else int(found["exit_status"])


class _Signing:
    """Signs packages here as they are finished: no key goes to another process or computer."""

    def __init__(self, arguments: argparse.Namespace) -> None:
        self.sign = None if arguments.no_sign else first_signature(arguments)
        self.failed: dict[str, str] = {}

    def __call__(self, result: dict[str, Any]) -> None:
        """Sign a package as prepared, unless it is a draft or has been signed."""
        package = Path(result["package"])
        if self.sign is None or (package / "signatures" / "prepared").exists():
            return
        try:
            document = {**result["document"], "prepared": {"name": result["prepared"]}}
            self.sign(package, {"document": document})
        except ReportgenError as error:
            self.failed[result["package"]] = str(error)


def _told(summary: Summary, cases: Sequence[Asked], unsigned: dict[str, str]) -> dict[str, Any]:
    """Return the summary with the names that the user gave, and what came to light after."""
    found = summary.as_dict()
    first: dict[str, str] = {}
    for case, outcome in zip(cases, found["cases"], strict=True):
        scratch = str(case.path.parent)
        outcome["case"] = case.name
        if outcome["error"] is not None and scratch not in case.name:
            message = outcome["error"]["message"]
            outcome["error"]["message"] = message.replace(str(case.path), case.name)
        if outcome["result"] is None:
            continue
        package = outcome["result"]["package"]
        outcome["result"]["conclusion"] = plain(outcome["result"]["conclusion"])
        fault = unsigned.get(package, "")
        if package in first:
            fault = f"{first[package]} has the same number and revision; give each its own"
        first.setdefault(package, case.name)
        if fault:
            outcome["error"] = {"kind": "InputError", "message": fault, "exit_status": 2}
            outcome["status"] = "failed"
            found["failed"] += 1
            found["done"] -= 1
            found["exit_status"] = found["exit_status"] if found["exit_status"] == 1 else 2
    return found


def _print(found: dict[str, Any]) -> None:
    from rich.console import Console
    from rich.table import Table
    from rich.text import Text

    table = Table(box=None, pad_edge=False, header_style="bold")
    for title in ("number", "meets", "does not", "not assessed", "holds", "", "package"):
        table.add_column(title, justify="left" if title in ("number", "", "package") else "right",
                         no_wrap=title in ("number", "package"))  # fmt: skip
    for outcome in found["cases"]:
        result = outcome["result"]
        if result is None or outcome["error"] is not None:
            continue
        verdicts = [criterion["verdict"] for criterion in result["criteria"]]
        counts = [str(verdicts.count(v)) for v in ("meets", "does not meet", "not assessed")]
        document = result["document"]
        table.add_row(
            Text(f"{document['number']} {document['revision']}"),
            *counts,
            str(len(result["holds"])),
            "" if result["again"] else "unchanged, not run again",
            Text(result["package"]),
        )
        for words in result["notes"]:
            note(words)
    Console(highlight=False, width=None if sys.stdout.isatty() else 200).print(table)
    for outcome in found["cases"]:
        if outcome["error"] is not None:
            print(f"reportgen: {outcome['case']}: {outcome['error']['message']}", file=sys.stderr)
        elif outcome["status"] == "stopped":
            print(f"reportgen: {outcome['case']}: not run, stopped before", file=sys.stderr)
    ended = f"{found['done']} done, {found['failed']} failed"
    print(f"{ended}, {found['stopped']} stopped" if found["stopped"] else ended)
