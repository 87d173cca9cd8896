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

from asn1crypto import cms, core, x509  # type: ignore[import-untyped]
from cryptography.hazmat.primitives import hashes
from pyhanko.sign.ades.asn1_util import register_cms_attribute
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
    try:
        asyncio.get_running_loop()
    except RuntimeError:
        return asyncio.run(work)
    with ThreadPoolExecutor(1) as pool:
        return pool.submit(asyncio.run, work).result()


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
        DIGEST, attributes, cms_version="v1", timestamper=timestamper
    )
    return bytes(signed.dump())


def _attribute(kind: str, value: object) -> cms.CMSAttribute:
    return cms.CMSAttribute({"type": cms.CMSAttributeType(kind), "values": (value,)})
