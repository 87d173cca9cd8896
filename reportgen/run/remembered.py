"""Run a case only if something that its report depends on has changed since it was last run."""

from __future__ import annotations

import functools
import hashlib
import json
import os
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

from reportgen import resources
from reportgen.errors import ReportgenError
from reportgen.run.cache import RunStore, run_key
from reportgen.run.job import Done, Options, Say, build

HOME = "REPORTGEN_HOME"


def store_folder() -> Path:
    """Return where runs are remembered: below ``REPORTGEN_HOME``, or the user's cache folder."""
    home = os.environ.get(HOME)
    if home:
        return Path(home) / "runs"
    base = os.environ.get("XDG_CACHE_HOME") or os.environ.get("LOCALAPPDATA")
    return (Path(base) if base else Path.home() / ".cache") / "reportgen" / "runs"


def calculate(
    case_path: Path,
    options: Options,
    say: Say = lambda _: None,
    finish: Callable[[Path, dict[str, Any]], object] | None = None,
    store: RunStore | None = None,
) -> Done:
    """Run a case, or give back its package where nothing that it depends on has changed.

    Parameters
    ----------
    case_path, options, say, finish
        As for :func:`reportgen.run.job.build`.
    store
        What was run before; None runs the case whatever was.

    Returns
    -------
    Done
        ``again`` is False where the package was there already, whole and unaltered.
    """
    found = None if store is None else remembered(case_path, options, store)
    if found is not None:
        return found
    one = build(case_path, options, say, finish)
    if store is not None:
        _remember(one, case_path, options, store)
    return one


def remembered(case_path: Path, options: Options, store: RunStore) -> Done | None:
    """Return what a case has left, if all that it depends on and its package are as they were."""
    try:
        key = _key(case_path, options)
    except (OSError, ReportgenError):  # what is wrong with the case, the run itself says best
        return None
    return _found(store, key, case_path)


def _remember(one: Done, case_path: Path, options: Options, store: RunStore) -> None:
    store.record(
        _key(case_path, options),
        {
            "package": str(one.package.resolve()),
            "tag_manifest": _digest(one.package / "tagmanifest-sha512.txt"),
            "beside": {name: _digest(case_path.parent / name) for name in one.beside},
        },
    )


def _key(case_path: Path, options: Options) -> str:
    """Digest all that can be told without reading the case as a case."""
    inputs = {
        "case": _digest(case_path),
        "name": case_path.name,
        "output": str(options.output.resolve()),
        "allowed": json.dumps(sorted(options.allow_templates)),
    }
    if options.house is not None:
        from reportgen.publish.house import house_files

        for name, content in house_files(options.house).items():
            inputs[f"house {name}"] = hashlib.sha512(content).hexdigest()
    return run_key(inputs, _our_templates())


@functools.cache
def _our_templates() -> str:
    digest = hashlib.sha512()
    for path in resources.templates().values():
        digest.update(path.read_bytes())
    return digest.hexdigest()


def _found(store: RunStore, key: str, case_path: Path) -> Done | None:
    """Return what is remembered, if the package and all beside the case are as they were."""
    entry = store.look_up(key)
    if entry is None:
        return None
    try:
        beside = {name: _digest(case_path.parent / name) for name in entry["beside"]}
        package = Path(entry["package"])
        if beside != entry["beside"] or not _unaltered(package, entry["tag_manifest"]):
            return None
        results = json.loads((package / "data" / "results.json").read_bytes())
    except (OSError, KeyError, TypeError, ValueError):
        return None
    return replace(Done(package, results), again=False)


def _unaltered(package: Path, tag_manifest: str) -> bool:
    """Tell whether a package's bytes are those of the run; who signed it is not looked at."""
    from reportgen.package.contents import read_folder
    from reportgen.package.intact import bag_checks

    if _digest(package / "tagmanifest-sha512.txt") != tag_manifest:
        return False
    return all(check.ok for check in bag_checks(read_folder(package)))


def _digest(path: Path) -> str:
    return hashlib.sha512(path.read_bytes()).hexdigest()


def batch_job(case: Path, options: Options, store: Path | None) -> dict[str, Any]:
    """Do one case of a batch and return what came of it as plain JSON; nothing is signed here."""
    one = calculate(case, options, store=None if store is None else RunStore(store))
    return {"exit_status": one.exit_status, **described(one)}


def described(one: Done) -> dict[str, Any]:
    """Return what a run left, as plain JSON."""
    keys = ("number", "title", "revision", "status")
    return {
        "package": str(one.package),
        "document": {key: one.results["document"][key] for key in keys},
        "prepared": one.results["document"]["prepared"]["name"],
        "again": one.again,
        "notes": list(one.notes),
        "conclusion": one.results["conclusion"],
        "criteria": one.results["criteria"],
        "holds": one.results["holds"],
    }
