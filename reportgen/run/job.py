"""One case in, one calculation package out."""

from __future__ import annotations

import hashlib
import json
import platform
from collections.abc import Callable
from dataclasses import dataclass, field
from importlib.metadata import version
from pathlib import Path
from typing import TYPE_CHECKING, Any, Literal

from reportgen import __version__, resources
from reportgen.errors import CellError, InputError, Problem, RunError

if TYPE_CHECKING:
    from reportgen.publish import House

_ORIGINS = {
    "ours": "shipped with reportgen, unmodified",
    "local": "local, not shipped with reportgen",
}
_SHOWN_VERSIONS = ("numpy", "scipy", "matplotlib", "papermill", "nbconvert", "typst")


@dataclass(frozen=True)
class Options:
    """How cases are run.

    Parameters
    ----------
    output
        Folder that packages are left in.
    allow_templates
        File names of local templates that may run.
    house
        House file, if any; it comes before the one that the case names.
    kernel
        ``warm`` or ``plain``.
    timeout
        Longest time for one cell in s.
    replace_draft
        Whether a draft package of the same number and revision may be replaced.
    archived
        A shipped template as a package holds it, to be run in place of today's.
    """

    output: Path
    allow_templates: frozenset[str] = frozenset()
    house: Path | None = None
    kernel: Literal["warm", "plain"] = "plain"
    timeout: float = 600.0
    replace_draft: bool = False
    archived: Path | None = None


@dataclass(frozen=True)
class Done:
    """What a run leaves.

    Parameters
    ----------
    package, results
        The package's folder, and its results as in ``results.json``.
    notes
        What was particular about writing it.
    beside
        Files beside the case that the report depends on: side tables, a template of one's own.
    again
        Whether it was calculated now; False where its package was there, unaltered.
    """

    package: Path
    results: dict[str, Any] = field(repr=False)
    notes: tuple[str, ...] = ()
    beside: tuple[str, ...] = ()
    again: bool = True

    @property
    def exit_status(self) -> int:
        """0 where every criterion is met or none is stated, 3 where one is not met."""
        verdicts = {criterion["verdict"] for criterion in self.results["criteria"]}
        return 3 if "does not meet" in verdicts else 0


Say = Callable[[str], None]


def build(
    case_path: Path,
    options: Options,
    say: Say = lambda _: None,
    finish: Callable[[Path, dict[str, Any]], object] | None = None,
) -> Done:
    """Run one case and leave its package.

    ``finish`` is called with the complete package and its results before the package appears
    under its name, so that a first signature is there from the first moment on.

    Raises
    ------
    InputError
        If the case, a side file or the choice of template is at fault.
    RunError
        If a cell of the template failed; the partial notebook is saved beside the package.
    PublishError, PackageError
        If the report could not be rendered, or the package not be written.
    """
    from reportgen.case import read_case, side_files
    from reportgen.package.names import package_name
    from reportgen.package.write import require_place, write_package

    say(f"reading {case_path.name}")
    case = read_case(case_path)
    template, origin = template_of(case, case_path, options)
    sides = side_files(case)
    house, letterhead = house_of(case, case_path, options)
    sides |= letterhead
    resolved = case.resolved()
    resolved["template_record"] = {
        "name": case.template,
        "origin": origin,
        "digest": "sha512:" + hashlib.sha512(template.read_bytes()).hexdigest(),
    }
    resolved["provenance"] = provenance(case_path, sides, resolved["template_record"])
    document = resolved["document"]
    name = package_name(document["number"], document["revision"])
    require_place(
        options.output, name, {**sides, "case.yaml": case_path.read_bytes(),
                               "inputs.json": _json(resolved),
                               "template.ipynb": template.read_bytes()},
        replace_draft=options.replace_draft,
    )  # fmt: skip
    payload, results = payload_of(case_path, template, resolved, sides, options, say, house)
    say("writing the package")
    kept: list[str] = []
    package = write_package(
        options.output,
        name,
        payload,
        bag_info(document),
        replace_draft=options.replace_draft,
        finish=None if finish is None else lambda folder: finish(folder, results),
        report=kept.append,
    )
    beside = [name for name in sides if name not in letterhead]
    if origin == "local":
        beside.append(case.template)
    return Done(package, results, tuple(kept), tuple(beside))


def house_of(case: Any, case_path: Path, options: Options) -> tuple[House | None, dict[str, bytes]]:
    """Return the letterhead, and what of it the case does not bring into the package itself.

    The one of the options comes before the case's own.
    """
    from reportgen.publish import house_files, read_house

    if options.house is not None:
        files = {f"house/{name}": content for name, content in house_files(options.house).items()}
        return read_house(options.house), files
    if case.house is not None:
        return read_house(case_path.parent / case.house), {}
    return None, {}


def template_of(case: Any, case_path: Path, options: Options) -> tuple[Path, str]:
    """Return the template's file and whether it is ours, unmodified, or local.

    A local one must be allowed by name.
    """
    ours = resources.templates()
    if options.archived is not None:
        return options.archived, "ours"
    if case.template in ours:
        if not resources.as_shipped(ours[case.template]):
            raise InputError(
                Problem(
                    f"the installed template {case.template!r} is not as it was shipped",
                    "install reportgen again, or put the changed notebook beside the case under "
                    "a name of its own and allow it by that name",
                    file=str(case_path),
                    field="template",
                )
            )
        return ours[case.template], "ours"
    local = case_path.parent / case.template
    if local.name not in options.allow_templates:
        raise InputError(
            Problem(
                f"the template {case.template!r} is not one of ours",
                f"templates are code: allow it with --allow-template {local.name}, "
                f"or use one of {', '.join(ours)}",
                file=str(case_path),
                field="template",
            )
        )
    if not local.is_file():
        raise InputError(
            Problem(
                f"there is no file {case.template!r} beside the case",
                "name a notebook by its path from the case's folder",
                file=str(case_path),
                field="template",
            )
        )
    return local, "local"


def provenance(
    case_path: Path, sides: dict[str, bytes], template: dict[str, str]
) -> dict[str, str]:
    """Return what made the report, as printed in it: names, versions and digests only."""
    record = {
        "Template": f"{template['name']} ({_ORIGINS[template['origin']]})",
        "Template, SHA-512": _short(template["digest"].removeprefix("sha512:")),
        f"Case file {case_path.name}, SHA-512": _short(
            hashlib.sha512(case_path.read_bytes()).hexdigest()
        ),
    }
    for name, content in sides.items():
        record[f"Side file {name}, SHA-512"] = _short(hashlib.sha512(content).hexdigest())
    record["reportgen"] = __version__
    record["Python"] = platform.python_version()
    record |= {name: version(name) for name in _SHOWN_VERSIONS}
    return record


def _short(digest: str) -> str:
    """Return enough of a digest to tell files apart by eye; the manifest holds it whole."""
    return f"{digest[:32]}…"


def payload_of(
    case_path: Path,
    template: Path,
    resolved: dict[str, Any],
    sides: dict[str, bytes],
    options: Options,
    say: Say,
    house: House | None = None,
) -> tuple[dict[str, bytes], dict[str, Any]]:
    """Execute, publish, and return every file of the payload by name, and the results."""
    from reportgen.package.howto import how_to_check
    from reportgen.publish import publish
    from reportgen.run.environment import environment
    from reportgen.run.execute import execute
    from reportgen.run.heartbeat import heartbeat
    from reportgen.run.normalise import notebook_bytes

    say(f"calculating with {template.stem}")
    try:
        with heartbeat(say) as progress:
            executed = execute(
                template,
                resolved,
                kernel=options.kernel,
                timeout=options.timeout,
                progress=progress,
            )
    except CellError as error:
        if error.name == "ModelError":  # the case's values, not the tool, are at fault
            raise InputError(
                Problem(error.message, f"found while running {error.template}", str(case_path))
            ) from error
        raise _with_partial(error, resolved["document"], options.output) from error
    results = executed.results
    document = resolved["document"]
    payload = {
        "calculation.ipynb": notebook_bytes(executed.notebook),
        "results.json": _json(results),
        "case.yaml": case_path.read_bytes(),
        **sides,
        "inputs.json": _json(resolved),
        "environment.json": _json(environment()),
        "template.ipynb": template.read_bytes(),
        "HOW-TO-CHECK.txt": how_to_check(document["number"], document["revision"]).encode(),
    }
    say("rendering the report")
    attached = ("case.yaml", *sides, "results.json", "calculation.ipynb")
    report = publish(
        executed.notebook, house=house, attachments={name: payload[name] for name in attached}
    )
    payload |= {"report.html": report.html, "report.pdf": report.pdf}
    return payload, results


def _with_partial(error: CellError, document: dict[str, Any], output: Path) -> RunError:
    """Save the notebook as far as it came, and say in the error where it lies."""
    from reportgen.package.names import package_name

    if not error.partial:
        return error
    output.mkdir(parents=True, exist_ok=True)
    name = package_name(document["number"], document["revision"])
    place = output / f"{name}.failed.ipynb"
    place.write_bytes(error.partial)
    return RunError(f"{error}\nthe notebook as far as it ran: {place}")


def bag_info(document: dict[str, Any]) -> dict[str, str]:
    """Return the bag's own words on what it holds."""
    return {
        "External-Identifier": f"{document['number']} revision {document['revision']}",
        "External-Description": document["title"],
        "Bagging-Date": document["date"],
        "Bag-Software-Agent": f"reportgen {__version__}",
    }


def _json(value: Any) -> bytes:
    return (json.dumps(value, indent=1, ensure_ascii=False, allow_nan=False) + "\n").encode()
