"""Signing a package: one more sign-off beside its payload, whole or not at all.

A sign-off is a folder of its own, ``signatures/<role>/``, that appears by one rename and
is never touched again::

    signatures/checked/
      statement.json               who, when, in which words, on what it stands
      tagmanifest-sha512.txt.p7s   CMS signature over the tag manifest, binding the statement
      report.pdf                   the PDF with this and all earlier signatures in it
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import replace
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING, Any

from pyhanko.sign.general import SigningError
from pyhanko.sign.timestamps import TimestampRequestError

from reportgen.errors import PackageError, SignatureError, SignatureNotMadeError
from reportgen.package.bag import PAYLOAD, SIGNATURES, TAG_MANIFEST, sha512
from reportgen.package.cms import sign_detached
from reportgen.package.contents import Contents, read_folder
from reportgen.package.disk import flush_folder, move_into_place, staging, write_files
from reportgen.package.identity import Identity
from reportgen.package.intact import bag_checks, read_results
from reportgen.package.pdf import sign_pdf
from reportgen.package.rules import refusals
from reportgen.package.statement import (
    PDF_FILE,
    ROLES,
    SIGNATURE_FILE,
    STATEMENT_FILE,
    Role,
    SignedPdf,
    Statement,
    open_holds,
    pdf_title,
    second_computations,
)

if TYPE_CHECKING:
    from pyhanko.sign.timestamps import TimeStamper


def sign_package(
    path: Path,
    role: Role,
    identity: Identity,
    words: str,
    name: str,
    *,
    accepted_holds: Iterable[str] = (),
    time: datetime | None = None,
    timestamper: TimeStamper | None = None,
) -> Path:
    """Sign a package in a role.

    Parameters
    ----------
    path
        The package's folder.
    role
        ``prepared``, ``checked`` or ``approved``; in this order.
    identity
        Who signs.
    words, name
        What is stated, and by whom; the name must be the one the report prints for the role,
        where it prints one.
    accepted_holds
        Ids of open holds that the signer accepts.
    time
        Time of signing, aware; now by default.
    timestamper
        Adds RFC 3161 time stamps to the signatures.

    Returns
    -------
    pathlib.Path
        The sign-off's folder.

    Raises
    ------
    SignatureError
        The rules of signing do not allow it (all reasons are given), the identity is not
        valid at this time, or the signature or time stamp could not be made.
    PackageError
        The package is damaged or cannot be written to. It is unchanged.
    """
    contents = read_folder(path)
    if faults := [check for check in bag_checks(contents) if not check.ok]:
        lines = "\n  ".join(f"{check.subject}: {check.detail}" for check in faults)
        raise PackageError(f"{path}: a damaged package is not signed:\n  {lines}")
    results = read_results(contents.files)
    moment = (time or datetime.now(UTC)).astimezone(UTC).replace(microsecond=0)
    identity.require_valid(moment)
    earlier = earlier_sign_offs(contents)
    statement = _statement(contents, results, role, identity, words, name, accepted_holds, moment)
    if reasons := refusals(statement, results, list(earlier.values())):
        raise SignatureError(f"{path.name} is not signed as {role}:\n  " + "\n  ".join(reasons))
    files = _sign(contents, statement, identity, timestamper)
    return _place(path, role, files)


def earlier_sign_offs(contents: Contents) -> dict[Role, Statement]:
    """Give the sign-offs that a package carries, in order.

    Raises
    ------
    PackageError
        One of them cannot be read.
    """
    found: dict[Role, Statement] = {}
    for role in ROLES:
        content = contents.files.get(f"{SIGNATURES}{role}/{STATEMENT_FILE}")
        if content is None:
            continue
        try:
            found[role] = Statement.from_bytes(content)
        except ValueError as error:
            raise PackageError(f"{SIGNATURES}{role}/{STATEMENT_FILE}: {error}") from error
    return found


def latest_pdf(contents: Contents) -> bytes | None:
    """Give the PDF with the most signatures in it: the last sign-off's, else the payload's."""
    for role in reversed(ROLES):
        content = contents.files.get(f"{SIGNATURES}{role}/{PDF_FILE}")
        if content is not None:
            return content
    return contents.files.get(PAYLOAD + PDF_FILE)


def _statement(
    contents: Contents,
    results: Mapping[str, Any],
    role: Role,
    identity: Identity,
    words: str,
    name: str,
    accepted_holds: Iterable[str],
    time: datetime,
) -> Statement:
    holds = open_holds(results)
    agreed, failed = second_computations(results)
    signatures: dict[str, str] = {
        earlier: sha512(contents.files[file])
        for earlier in ROLES
        if (file := f"{SIGNATURES}{earlier}/{SIGNATURE_FILE}") in contents.files
    }
    return Statement(
        role=role,
        number=results["document"]["number"],
        revision=results["document"]["revision"],
        name=" ".join(name.split()),
        words=" ".join(words.split()),
        time=time,
        certificates=identity.fingerprints,
        holder=identity.name,
        self_issued=identity.self_issued,
        accepted_holds={key: holds.get(key, "") for key in accepted_holds},
        second_agreed=agreed,
        second_failed=failed,
        tag_manifest=sha512(contents.files[TAG_MANIFEST]),
        pdf=None,
        earlier=signatures,
    )


def _sign(
    contents: Contents,
    statement: Statement,
    identity: Identity,
    timestamper: TimeStamper | None,
) -> dict[str, bytes]:
    files = {}
    try:
        if (pdf := latest_pdf(contents)) is not None:
            signed = sign_pdf(
                pdf,
                identity.signer,
                statement.time,
                field=statement.field,
                title=pdf_title(statement.role),
                name=statement.name,
                reason=statement.reason,
                timestamper=timestamper,
            )
            statement = replace(statement, pdf=SignedPdf(len(signed), sha512(signed)))
            files[PDF_FILE] = signed
        files[STATEMENT_FILE] = statement.to_bytes()
        files[SIGNATURE_FILE] = sign_detached(
            contents.files[TAG_MANIFEST],
            identity.signer,
            statement.time,
            statement.description,
            timestamper,
        )
    except TimestampRequestError as error:
        raise SignatureNotMadeError(f"no time stamp was given: {error}") from error
    except SigningError as error:
        raise SignatureNotMadeError(f"the signature could not be made: {error}") from error
    except Exception as error:
        # The package for tokens is optional, so its errors have no name here.
        if type(error).__module__.startswith("pkcs11"):
            reason = f"the token refused to sign ({type(error).__name__}); is it still there?"
            raise SignatureNotMadeError(reason) from error
        raise
    return files


def _place(path: Path, role: Role, files: Mapping[str, bytes]) -> Path:
    """Put a sign-off's folder in place by one rename."""
    target = path / SIGNATURES / role
    with staging(path.parent, path.name) as folder:
        new = folder / SIGNATURES / role
        new.mkdir(parents=True)
        write_files(new, files)
        flush_folder(new.parent)
        if (path / SIGNATURES).exists():
            placed = move_into_place(new, target)
        else:
            placed = move_into_place(new.parent, path / SIGNATURES)
        if not placed:
            raise SignatureError(f"{path.name} was signed as {role} by another run meanwhile")
    return target
