"""Signatures over bytes: CMS (RFC 5652), detached, with the statement's digest signed too.

The statement is bound by the signing-description attribute of PKCS #9 (RFC 2985
section 5.4.4), which is made for a short text about what is signed; ``openssl cms
-cmsout -print`` shows it.
"""

from __future__ import annotations

import asyncio
import logging
from collections.abc import Coroutine
from concurrent.futures import ThreadPoolExecutor
from datetime import UTC, datetime
from typing import Any, TypeVar

from asn1crypto import algos, cms, core, tsp, x509  # type: ignore[import-untyped]
from cryptography.hazmat.primitives import hashes
from pyhanko.sign.ades.asn1_util import register_cms_attribute
from pyhanko.sign.general import extract_certificate_info
from pyhanko.sign.signers.pdf_cms import PdfCMSSignedAttributes, Signer
from pyhanko.sign.timestamps import TimeStamper

DIGEST = "sha512"
SIGNING_DESCRIPTION = "signing_description"
_LAST_UTC_TIME = 2049  # RFC 5652 section 11.3: later years as GeneralizedTime

register_cms_attribute("1.2.840.113549.1.9.13", SIGNING_DESCRIPTION, x509.DirectoryString)
# What the libraries log about a bad signature is told by our own checks.
for _name in ("pyhanko", "pyhanko_certvalidator"):
    logging.getLogger(_name).addHandler(logging.NullHandler())

T = TypeVar("T")


def run_async(work: Coroutine[Any, Any, T]) -> T:
    """Run a coroutine to its end, also from inside a running event loop (a notebook)."""
    if not _loop_is_running():
        return asyncio.run(work)
    with ThreadPoolExecutor(1) as pool:
        return pool.submit(asyncio.run, work).result()


def _loop_is_running() -> bool:
    try:
        asyncio.get_running_loop()
    except RuntimeError:
        return False
    return True


def sign_detached(
    content: bytes,
    signer: Signer,
    time: datetime,
    description: str,
    timestamper: TimeStamper | None = None,
) -> bytes:
    """Sign bytes with a detached CMS signature.

    Parameters
    ----------
    content
        What is signed; not included in the result.
    signer
        Holds or reaches the key.
    time
        The signing time that the signer states.
    description
        Text of the signing-description attribute.
    timestamper
        Adds an RFC 3161 time stamp over the signature.

    Returns
    -------
    bytes
        DER of a CMS ``ContentInfo``.
    """
    return run_async(_sign_detached(content, signer, time, description, timestamper))


async def _sign_detached(
    content: bytes,
    signer: Signer,
    time: datetime,
    description: str,
    timestamper: TimeStamper | None,
) -> bytes:
    digest = hashes.Hash(hashes.SHA512())
    digest.update(content)
    standard = await signer.signed_attrs(
        digest.finalize(), DIGEST, attr_settings=PdfCMSSignedAttributes(), is_pdf_sig=False
    )
    utc = time.astimezone(UTC)
    if utc.year <= _LAST_UTC_TIME:
        stated = cms.Time({"utc_time": core.UTCTime(utc)})
    else:
        stated = cms.Time({"generalized_time": core.GeneralizedTime(utc)})
    text = x509.DirectoryString(name="utf8_string", value=core.UTF8String(description))
    attributes = cms.CMSAttributes(
        [
            *standard,
            _attribute("signing_time", stated),
            _attribute(SIGNING_DESCRIPTION, text),
        ]
    )
    signed = await signer.async_sign_prescribed_attributes(
        DIGEST,
        attributes,
        cms_version="v1",
        timestamper=None if timestamper is None else _OneForm(timestamper),
    )
    return bytes(canonical(signed).dump())


def canonical(info: cms.ContentInfo) -> cms.ContentInfo:
    """Write a CMS signature anew around the parts that count.

    These are the content, the certificates, the signed attributes, the signature value and
    a time stamp. All else is not signed and follows from them, so a reader who does the
    same sees any change to it.
    """
    data = info["content"]
    signer = data["signer_infos"][0]
    certificate = extract_certificate_info(data).signer_cert
    issuer_and_serial = cms.IssuerAndSerialNumber(
        {"issuer": certificate.issuer, "serial_number": certificate.serial_number}
    )
    digest = algos.DigestAlgorithm({"algorithm": signer["digest_algorithm"]["algorithm"].native})
    rebuilt = {
        "version": "v1",
        "sid": cms.SignerIdentifier({"issuer_and_serial_number": issuer_and_serial}),
        "digest_algorithm": digest,
        "signature_algorithm": signer["signature_algorithm"],
        "signed_attrs": signer["signed_attrs"],
        "signature": signer["signature"].native,
    }
    inner = data["encap_content_info"]
    plain = inner["content_type"].native == "data"
    if plain and signer["unsigned_attrs"] is not core.VOID:
        rebuilt["unsigned_attrs"] = signer["unsigned_attrs"]
    content = {
        "version": "v1" if plain else "v3",
        "digest_algorithms": cms.DigestAlgorithms([digest]),
        "encap_content_info": {"content_type": "data"} if plain else inner,
        "certificates": data["certificates"],
        "signer_infos": [rebuilt],
    }
    return cms.ContentInfo({"content_type": "signed_data", "content": cms.SignedData(content)})


class _OneForm(TimeStamper):
    """Brings another time stamper's tokens into the one form that is verified."""

    def __init__(self, other: TimeStamper) -> None:
        super().__init__()  # type: ignore[no-untyped-call]
        self._other = other

    async def async_request_tsa_response(self, req: tsp.TimeStampReq) -> tsp.TimeStampResp:
        response = await self._other.async_request_tsa_response(req)
        token = response["time_stamp_token"]
        if token is core.VOID:
            return response  # refused: the caller says why
        return tsp.TimeStampResp(
            {"status": response["status"], "time_stamp_token": canonical(token)}
        )


def _attribute(kind: str, value: object) -> cms.CMSAttribute:
    return cms.CMSAttribute({"type": cms.CMSAttributeType(kind), "values": (value,)})
