"""Verifying a package: whether it is what was packed, and who signed it.

Reads, and does nothing else: nothing is written, fetched or executed from the package.
"""

from __future__ import annotations

from collections.abc import Sequence
from datetime import UTC, datetime
from pathlib import Path

from cryptography import x509

from reportgen.archive.verify_result import Signer, Verification, verdict
from reportgen.archive.verify_signatures import verify_sign_offs
from reportgen.archive.verify_zip import read_zip
from reportgen.errors import PackageError, SignatureError, VerificationError
from reportgen.package.bag import TAG_MANIFEST
from reportgen.package.contents import Check, Contents, read_folder
from reportgen.package.intact import bag_checks, read_results

__all__ = [
    "Check",
    "Contents",
    "Signer",
    "Verification",
    "judge_package",
    "load_anchors",
    "read_package",
    "require_sound",
    "verify_package",
]


def verify_package(
    path: Path,
    trust: Sequence[x509.Certificate] | None = None,
    *,
    now: datetime | None = None,
) -> Verification:
    """Verify a package.

    Parameters
    ----------
    path
        The package's folder, or the zip of it.
    trust
        Certificates that are trusted as they are: roots, or signers' own. If given, every
        signer must stand under one of them. See :func:`load_anchors`.
    now
        The reader's time; now by default.

    Raises
    ------
    PackageError
        There is nothing to verify: no such folder or file, or it cannot be read.
    """
    return judge_package(read_package(path), trust, now=now)


def judge_package(
    contents: Contents,
    trust: Sequence[x509.Certificate] | None = None,
    *,
    now: datetime | None = None,
) -> Verification:
    """Judge a package that was read already; see :func:`verify_package`."""
    if any(fault.kind == "container" for fault in contents.faults) and not contents.files:
        return verdict(contents.name, contents.faults, [])
    checks = bag_checks(contents)
    try:
        results = read_results(contents.files)
    except PackageError:
        return verdict(contents.name, checks, [])  # told by the bag's checks
    if TAG_MANIFEST not in contents.files:
        return verdict(contents.name, checks, [])
    found = verify_sign_offs(contents, results, trust, now or datetime.now(UTC))
    return verdict(contents.name, [*checks, *found.checks], found.signers)


def require_sound(path: Path) -> Verification:
    """Verify a package that is to be signed; nobody should sign on top of a forged sign-off.

    Raises
    ------
    VerificationError
        Something in the package or in an earlier sign-off is not as it must be. That a
        package has no signature yet is no fault here.
    """
    found = verify_package(path)
    if faults := [fault for fault in found.faults if fault.kind != "unsigned"]:
        lines = "\n  ".join(f"{fault.subject}: {fault.detail}" for fault in faults)
        raise VerificationError(f"{path.name} must not be signed as it is:\n  {lines}")
    return found


def read_package(path: Path) -> Contents:
    """Read a package's folder or zip strictly, whatever it holds.

    Raises
    ------
    PackageError
        There is no such folder or file, it cannot be read, or is larger than any package.
    """
    return read_zip(path) if path.is_file() else read_folder(path)


def load_anchors(path: Path) -> tuple[x509.Certificate, ...]:
    """Read trust anchors from a file: PEM, one certificate or several, or one in DER.

    Raises
    ------
    SignatureError
        The file cannot be read or holds no certificate.
    """
    try:
        content = path.read_bytes()
        if b"-----BEGIN" in content:
            return tuple(x509.load_pem_x509_certificates(content))
        return (x509.load_der_x509_certificate(content),)
    except OSError as error:
        raise SignatureError(
            f"{path}: the trust anchors cannot be read: {error.strerror}"
        ) from error
    except ValueError as error:
        raise SignatureError(f"{path}: holds no X.509 certificate in PEM or DER") from error
