"""Many cases at once: run, sign as they end, and print what became of each."""

from __future__ import annotations

import argparse
import functools
import sys
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

from reportgen.commands.progress import batch_progress
from reportgen.commands.results import first_signature, options_of
from reportgen.commands.shared import note, print_json
from reportgen.errors import ReportgenError

if TYPE_CHECKING:
    from reportgen.commands.running import Asked
    from reportgen.run.batch import State
    from reportgen.run.job import Options
    from reportgen.run.outcome import Outcome, Summary

INTERRUPTED = 130


def run_batch(cases: Sequence[Asked], arguments: argparse.Namespace) -> int:
    """Run many cases; one that fails does not stop the rest."""
    from reportgen.run.outcome import Summary
    from reportgen.run.remembered import batch_job, store_folder

    options = options_of(arguments, many=True)
    place = None if arguments.fresh else store_folder()
    signing = _Signing(arguments)
    before = _before(cases, options, place)
    for outcome in before.values():
        signing(outcome.result or {})
    rest = [case.path for case in cases if case.path not in before]
    job = functools.partial(batch_job, options=options, store=place)
    summary = Summary([])
    if rest:
        with batch_progress(len(rest)) as tell:

            def on_progress(state: State) -> None:
                tell(state)
                if state.ended is not None and state.ended.result is not None:
                    signing(state.ended.result)

            summary = _run(job, rest, arguments, options, on_progress)
    ended = {Path(outcome.case): outcome for outcome in summary.outcomes} | before
    summary = Summary([ended[case.path] for case in cases], summary.interrupted)
    found = _told(summary, cases, signing.failed, arguments.json)
    if arguments.json:
        print_json(found)
    else:
        _print(found)
    return INTERRUPTED if summary.interrupted else int(found["exit_status"])


def _before(cases: Sequence[Asked], options: Options, place: Path | None) -> dict[Path, Outcome]:
    """Return what need not be run again, without so much as starting a pool."""
    from reportgen.run.cache import RunStore
    from reportgen.run.outcome import Outcome
    from reportgen.run.remembered import described, remembered

    if place is None:
        return {}
    found = {case.path: remembered(case.path, options, RunStore(place)) for case in cases}
    return {
        path: Outcome(str(path), "done", result={"exit_status": one.exit_status, **described(one)})
        for path, one in found.items()
        if one is not None
    }


def _run(
    job: Any,
    cases: list[Path],
    arguments: argparse.Namespace,
    options: Options,
    on_progress: Callable[[State], None],
) -> Summary:
    from reportgen.run.batch import run_many

    return run_many(
        job,
        cases,
        arguments.jobs,
        on_progress=on_progress,
        scheduler=arguments.scheduler or "",
        warm=options.kernel == "warm",
    )


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


def _told(
    summary: Summary, cases: Sequence[Asked], unsigned: dict[str, str], as_json: bool
) -> dict[str, Any]:
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
        if as_json:  # a heavy import, for words that are printed nowhere else
            from reportgen.sheet.lines import plain

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
