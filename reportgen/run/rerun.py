"""Repeat an archived calculation from its own inputs, in a clean folder."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Callable
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import TYPE_CHECKING, Any

from reportgen import resources
from reportgen.archive.agreement import Agreement, agreement
from reportgen.archive.compare import load_side
from reportgen.archive.formats import current
from reportgen.archive.verify import judge_package, read_package
from reportgen.errors import InputError, Problem, VerificationError
from reportgen.package.disk import write_files
from reportgen.run.job import Options, Say, build

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from cryptography import x509

PAYLOAD = "data/"
_CASE = "Case file "


def rerun(
    package: Path,
    trust: Sequence[x509.Certificate] | None,
    allow: Callable[[str], bool],
    say: Say = lambda _: None,
) -> Agreement:
    """Repeat a package's calculation and hold it against what is archived.

    Parameters
    ----------
    package
        Folder or zip; nothing is written into it.
    trust
        Certificates that are trusted.
    allow
        Asked, with the reason, before code that comes with the package is run: where the
        archived template is not the shipped one of that name. It is not asked where the
        package's signatures stand under ``trust``.

    Raises
    ------
    VerificationError
        If the package is not what was packed, or a signature is not good. One without a
        signature is repeated; it speaks for nobody.
    InputError
        If its template may not be run, or its case cannot be read any more.
    RunError, PublishError
        As :func:`reportgen.run.job.build`.
    """
    say("verifying the package")
    contents = read_package(package)
    verification = judge_package(contents, trust or None)
    if not verification.ok and verification.kind != "unsigned":
        faults = "; ".join(f"{c.subject}: {c.detail}" for c in verification.faults[:5])
        raise VerificationError(f"{verification.headline}: {faults}")
    then = {
        name.removeprefix(PAYLOAD): content
        for name, content in contents.files.items()
        if name.startswith(PAYLOAD)
    }
    current("results.json", json.loads(then["results.json"]))
    with TemporaryDirectory(prefix="reportgen-") as scratch:
        folder = Path(scratch)
        case, options = _laid_out(package, then, folder)
        trusted = bool(trust) and bool(verification.signers)
        options = _with_template(then, case, options, trusted, allow)
        one = build(case, options, say)
        now = {
            path.relative_to(one.package / "data").as_posix(): path.read_bytes()
            for path in (one.package / "data").rglob("*")
            if path.is_file()
        }
    return agreement(then, now)


def _laid_out(package: Path, then: Mapping[str, bytes], folder: Path) -> tuple[Path, Options]:
    """Write the archived case and its side files as they lay when it was run."""
    side = load_side(package, folder / "as packed")
    files = {name: content for name, content in side.files.items() if name != "results.json"}
    content = files.pop(side.name)
    name = _name_of_case(then)
    work = folder / "case"
    work.mkdir()
    write_files(work, {**files, name: content})
    house = None
    if side.case.house is None:
        letterhead = {n: c for n, c in then.items() if n.startswith("house/")}
        if letterhead:
            write_files(folder, letterhead)
            house = next((folder / n for n in letterhead if n.endswith((".yaml", ".yml"))), None)
    return work / name, Options(output=folder / "out", house=house)


def _name_of_case(then: Mapping[str, bytes]) -> str:
    """Return the name that the case file had, which stands in the report."""
    provenance = json.loads(then["inputs.json"]).get("provenance", {})
    for key in provenance:
        if key.startswith(_CASE) and key.endswith(", SHA-512"):
            name = str(key).removeprefix(_CASE).removesuffix(", SHA-512")
            if name and Path(name).name == name and name not in (".", ".."):
                return name
    return "case.yaml"


def _with_template(
    then: Mapping[str, bytes],
    case: Path,
    options: Options,
    trusted: bool,
    allow: Callable[[str], bool],
) -> Options:
    """Choose the template: the shipped one where it is the archived one, else as allowed."""
    record: dict[str, Any] = json.loads(then["inputs.json"])["template_record"]
    name, archived = str(record["name"]), then["template.ipynb"]
    ours = resources.templates().get(name)
    if ours is not None and ours.read_bytes() == archived:
        return options
    if ours is None:
        reason = f"{name} is a template of the package's own, and templates are code"
    else:
        digest = hashlib.sha512(archived).hexdigest()[:16]
        reason = (
            f"the archived {name} (SHA-512 {digest}…) is not the one shipped now, and it is code"
        )
    if not trusted and not allow(reason):
        raise InputError(
            Problem(
                f"not run: {reason}",
                "give --trust FILE with a certificate that its signatures stand under, or allow "
                "it with --run-archived-template",
                file="template.ipynb",
            )
        )
    if ours is None:
        return Options(options.output, frozenset({Path(name).name}), options.house)
    local = case.parent / f"{name}.ipynb"
    local.write_bytes(archived)
    return Options(options.output, options.allow_templates, options.house, archived=local)
