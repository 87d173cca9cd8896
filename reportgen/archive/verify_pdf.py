"""The PDF with the signatures in it, judged against the report as it was published."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from io import BytesIO
from typing import Any

from asn1crypto import x509 as asn1_x509  # type: ignore[import-untyped]
from cryptography import x509
from cryptography.hazmat.primitives.serialization import Encoding
from pyhanko.pdf_utils.reader import PdfFileReader
from pyhanko.sign.validation import async_validate_pdf_signature
from pyhanko.sign.validation.status import SignatureCoverageLevel
from pyhanko_certvalidator import ValidationContext

from reportgen.archive.verify_cms import KEY_USAGE
from reportgen.package.bag import sha512
from reportgen.package.cms import run_async
from reportgen.package.contents import Check
from reportgen.package.pdf import first_revision
from reportgen.package.statement import Statement


@dataclass(frozen=True)
class SignedCopy:
    """One sign-off's copy of the PDF.

    Parameters
    ----------
    path
        Where it lies in the package.
    content
        Its bytes.
    statement
        The sign-off's statement.
    certificate
        The certificate that signed the statement.
    """

    path: str
    content: bytes
    statement: Statement
    certificate: x509.Certificate


def pdf_checks(
    published: bytes, copies: Sequence[SignedCopy], anchors: Sequence[x509.Certificate]
) -> list[Check]:
    """Judge the signed copies of a PDF.

    Parameters
    ----------
    published
        ``data/report.pdf``.
    copies
        The sign-offs' copies, in order.
    anchors
        Trust anchors, for time stamps.
    """
    checks = list(_growth(published, copies))
    if all(check.ok for check in checks) and copies:
        # Any PDF that others wrote may break a reader in ways of its own.
        try:
            checks += _signatures(copies, anchors)
        except Exception as error:
            detail = f"its signatures cannot be read: {type(error).__name__}: {error}"
            checks.append(Check("pdf", copies[-1].path, False, detail))
    return checks


def _growth(published: bytes, copies: Sequence[SignedCopy]) -> Iterator[Check]:
    """Each copy must be the one before it with something appended, as its statement says."""
    before, origin = first_revision(published), "data/report.pdf"
    for copy in copies:
        stated = copy.statement.pdf
        if stated is None:
            yield Check("pdf", copy.path, False, "its statement says nothing of a PDF")
        elif len(copy.content) < stated.size:
            missing = stated.size - len(copy.content)
            yield Check("pdf", copy.path, False, f"cut off: {missing} bytes are missing")
        elif len(copy.content) > stated.size:
            more = len(copy.content) - stated.size
            yield Check("pdf", copy.path, False, f"{more} bytes were appended after signing")
        elif sha512(copy.content) != stated.sha512:
            yield Check("pdf", copy.path, False, "changed since it was signed")
        elif not copy.content.startswith(before):
            yield Check("pdf", copy.path, False, f"does not begin with {origin}")
        else:
            yield Check("pdf", copy.path, True, f"{origin} with one signature appended")
        before, origin = copy.content, copy.path


def _signatures(
    copies: Sequence[SignedCopy], anchors: Sequence[x509.Certificate]
) -> Iterator[Check]:
    last = copies[-1]
    reader = PdfFileReader(BytesIO(last.content), strict=True)
    found = list(reader.embedded_signatures)
    names = [signature.field_name for signature in found]
    expected = [copy.statement.field for copy in copies]
    if names != expected:
        detail = f"holds the signatures {names}, expected {expected}"
        yield Check("pdf", last.path, False, detail)
        return
    if reader.xrefs.total_revisions != len(copies) + 1:
        yield Check("pdf", last.path, False, "was changed between its signatures")
        return
    for signature, copy in zip(found, copies, strict=True):
        faults = list(_signature_faults(signature, copy, anchors, whole=copy is last))
        detail = "; ".join(faults) or f"signed by {copy.statement.name}, holds"
        yield Check("pdf", f"{last.path}, {copy.statement.field}", not faults, detail)


def _signature_faults(
    signature: Any, copy: SignedCopy, anchors: Sequence[x509.Certificate], *, whole: bool
) -> Iterator[str]:
    statement = copy.statement
    own = _asn1(copy.certificate)
    context = ValidationContext(trust_roots=[own], moment=statement.time, allow_fetching=False)
    stamping = ValidationContext(
        trust_roots=[_asn1(anchor) for anchor in anchors],
        moment=statement.time,
        allow_fetching=False,
    )
    status = run_async(
        async_validate_pdf_signature(
            signature,
            signer_validation_context=context,
            ts_validation_context=stamping,
            key_usage_settings=KEY_USAGE,
        )
    )
    stamp = status.timestamp_validity
    if stamp is not None and not stamp.trusted and stamp.intact and stamp.valid:
        # A time stamp of an authority that is not anchored adds nothing, and spoils nothing.
        holds = status.intact and status.trusted and status.docmdp_ok and status.seed_value_ok
    else:
        holds = status.bottom_line
    if not holds:
        yield "the signature does not hold"
    if signature.signer_cert.dump() != own.dump():
        yield "signed by another key than the statement"
    _, first, second, length = signature.byte_range
    if (second + length) != len(copy.content) or first >= second:
        yield "does not cover the file up to its own end"
    least = SignatureCoverageLevel.ENTIRE_FILE if whole else SignatureCoverageLevel.ENTIRE_REVISION
    if status.coverage is None or status.coverage < least:
        yield "does not cover the whole file" if whole else "does not cover its whole revision"
    if signature.self_reported_timestamp != statement.time:
        yield "gives another time than the statement"
    if signature.sig_object.get("/Name") != statement.name:
        yield "gives another name than the statement"
    if signature.sig_object.get("/Reason") != statement.reason:
        yield "gives other words than the statement"


def _asn1(certificate: x509.Certificate) -> Any:
    return asn1_x509.Certificate.load(certificate.public_bytes(Encoding.DER))
