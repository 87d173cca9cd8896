"""Signatures in the report's PDF: PAdES, appended, so that earlier ones stay valid.

Three of pyHanko's defaults would break PDF/A-3: it needs a line end before its update, it
rewrites the XMP metadata, and a visible field would need fonts of its own.
"""

from __future__ import annotations

from datetime import datetime
from io import BytesIO

from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter
from pyhanko.sign.fields import InvisSigSettings, SigFieldSpec, SigSeedSubFilter
from pyhanko.sign.signers import PdfSignatureMetadata, PdfSigner
from pyhanko.sign.signers.pdf_cms import PdfCMSSignedAttributes, Signer
from pyhanko.sign.timestamps import TimeStamper

from reportgen.package.cms import DIGEST, run_async


class _UpdateWithoutMetadata(IncrementalPdfFileWriter):
    """An incremental update that leaves the document's metadata as published."""

    def _update_meta(self) -> None:
        pass


# PDF/UA-1 (7.18.4) wants a widget in the structure tree unless it lies outside the page;
# PDF/A-3 wants it printable and not hidden.
_OFF_THE_PAGE = InvisSigSettings(set_print_flag=True, set_hidden_flag=False, box_out_of_bounds=True)


def first_revision(published: bytes) -> bytes:
    """Give the published PDF as signatures follow it: with a line end after its last mark."""
    return published if published.endswith(b"\n") else published + b"\n"


def sign_pdf(
    pdf: bytes,
    signer: Signer,
    time: datetime,
    *,
    field: str,
    title: str,
    name: str,
    reason: str,
    timestamper: TimeStamper | None = None,
) -> bytes:
    """Append a PAdES signature to a PDF.

    Parameters
    ----------
    pdf
        The PDF so far; the result begins with these bytes.
    signer
        Holds or reaches the key.
    time
        Signing time written into the signature.
    field, title
        Name of the new invisible signature field, and the name a reader shows for it.
    name, reason
        Signer's name and statement, written into the signature.
    timestamper
        Adds an RFC 3161 time stamp over the signature.
    """
    metadata = PdfSignatureMetadata(
        field_name=field,
        md_algorithm=DIGEST,
        name=name,
        reason=reason,
        subfilter=SigSeedSubFilter.PADES,
    )
    pdf_signer = PdfSigner(
        metadata,
        signer,
        timestamper=timestamper,
        new_field_spec=SigFieldSpec(
            field, readable_field_name=title, invis_sig_settings=_OFF_THE_PAGE
        ),
    )
    return run_async(_sign_pdf(first_revision(pdf), pdf_signer, time))


async def _sign_pdf(pdf: bytes, pdf_signer: PdfSigner, time: datetime) -> bytes:
    # The steps of PdfSigner.async_sign_pdf, with the signing time that was asked for.
    session = pdf_signer.init_signing_session(_UpdateWithoutMetadata(BytesIO(pdf)))
    session.system_time = time
    reserved = await session.estimate_signature_container_size(None)
    document = session.prepare_tbs_document(validation_info=None, bytes_reserved=reserved)
    prepared, output = document.digest_tbs_document()
    signed = await document.perform_signature(
        document_digest=prepared.document_digest,
        pdf_cms_signed_attrs=PdfCMSSignedAttributes(signing_time=time),
    )
    await signed.post_signature_processing(output)
    output.seek(0)
    return bytes(output.read())
