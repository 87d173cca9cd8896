"""Repeat an archived calculation from its own inputs, in a clean folder."""

from __future__ import annotations

import json
from collections.abc import Callable
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import TYPE_CHECKING, Any

from reportgen import resources
from reportgen.archive.agreement import Agreement, agreement
from reportgen.archive.compare import Side, load_side
from reportgen.archive.verify import Verification, judge_package, read_package
from reportgen.errors import InputError, Problem, VerificationError
from reportgen.package.bag import PAYLOAD, TAG_MANIFEST, sha512
from reportgen.package.disk import write_files
from reportgen.package.names import name_fault
from reportgen.package.write import read_payload
from reportgen.run.job import Options, Say, build

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from cryptography import x509

_CASE = "Case file "


def rerun(
    package: Path,
    trust: Sequence[x509.Certificate] | None,
    allow: Callable[[str], bool],
    say: Say = lambda _: None,
    *,
    output: Path | None = None,
    timeout: float = 600.0,
) -> tuple[Verification, Agreement]:
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
    output
        Folder that the repetition is left in, as an unsigned package; none is left by default.
    timeout
        Longest time for one cell in s.

    Returns
    -------
    tuple
        What the archived package is worth, and what its repetition came to.

    Raises
    ------
    VerificationError
        If the package is not what was packed, or a signature is not good. One without a
        signature is repeated; it speaks for nobody.
    InputError
        If its template may not be run, or its case cannot be read any more.
    RunError, PublishError, PackageError
        As :func:`reportgen.run.job.build`.
    """
    say("verifying the package")
    contents = read_package(package)
    verification = judge_package(contents, trust or None)
    if not verification.ok and verification.kind != "unsigned":
        faults = "; ".join(f"{c.subject}: {c.detail}" for c in verification.faults[:5])
        raise VerificationError(f"{verification.headline}: {faults}")
    then = contents.below(PAYLOAD)
    agreement(then, then)  # what cannot be compared is told before anything is run
    with TemporaryDirectory(prefix="reportgen-") as scratch:
        folder = Path(scratch)
        side = load_side(package, folder / "as packed")
        if side.digest != sha512(contents.files[TAG_MANIFEST]):
            raise VerificationError(f"{package}: changed while it was read")
        case, house = _laid_out(side, then, folder)
        trusted = bool(trust) and bool(verification.signers)
        allowed, archived = _template(then, case, trusted, allow)
        options = Options(
            output or folder / "out", allowed, house, timeout=timeout, archived=archived
        )
        now = read_payload(build(case, options, say).package)
    return verification, agreement(then, now)


def _laid_out(side: Side, then: Mapping[str, bytes], folder: Path) -> tuple[Path, Path | None]:
    """Write the archived case and its side files as they lay when it was run.

    Returns the case file, and the house file where the case does not name it itself.
    """
    files = {name: content for name, content in side.files.items() if name != "results.json"}
    content = files.pop(side.name)
    name = _name_of_case(then)
    work = folder / "case"
    work.mkdir()
    write_files(work, {**files, name: content})
    if side.case.house is not None:
        return work / name, None
    letterhead = {n: c for n, c in then.items() if n.startswith("house/")}
    write_files(folder, letterhead)
    house = next((folder / n for n in letterhead if n.endswith((".yaml", ".yml"))), None)
    return work / name, house


def _name_of_case(then: Mapping[str, bytes]) -> str:
    """Return the name that the case file had, which stands in the report."""
    for key in _inputs(then).get("provenance", {}):
        if key.startswith(_CASE) and key.endswith(", SHA-512"):
            name = str(key).removeprefix(_CASE).removesuffix(", SHA-512")
            if not name_fault(name) and "/" not in name:
                return name
    return "case.yaml"


def _template(
    then: Mapping[str, bytes], case: Path, trusted: bool, allow: Callable[[str], bool]
) -> tuple[frozenset[str], Path | None]:
    """Choose the template: the shipped one where it is the archived one, else as allowed.

    Returns local templates that may run, and the file of one that was shipped once.
    """
    name, archived = _name_of_template(then), then["template.ipynb"]
    ours = resources.templates().get(name)
    if ours is not None and ours.read_bytes() == archived:
        return frozenset(), None
    if ours is None:
        reason = f"{name} is a template of the package's own, and templates are code"
    else:
        digest = sha512(archived)[:16]
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
        return frozenset({Path(name).name}), None
    local = case.parent / f"{name}.ipynb"
    write_files(case.parent, {local.name: archived})
    return frozenset(), local


def _name_of_template(then: Mapping[str, bytes]) -> str:
    record = _inputs(then).get("template_record")
    name = record.get("name") if isinstance(record, dict) else None
    if not isinstance(name, str) or "template.ipynb" not in then:
        raise VerificationError("the package does not hold a template, so that it cannot be run")
    return name


def _inputs(then: Mapping[str, bytes]) -> dict[str, Any]:
    try:
        found = json.loads(then["inputs.json"])
    except (KeyError, ValueError, RecursionError) as error:
        raise VerificationError(f"the package's inputs.json cannot be read: {error}") from error
    return found if isinstance(found, dict) else {}
