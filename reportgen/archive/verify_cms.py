"""One detached CMS signature, judged strictly.

pyHanko judges the cryptography and the certificate's path. A CMS object also has parts
that no signature covers; each of these must be exactly what signing writes.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from asn1crypto import cms, core  # type: ignore[import-untyped]
from asn1crypto import x509 as asn1_x509
from cryptography import x509
from cryptography.hazmat.primitives.serialization import Encoding
from pyhanko.sign.general import extract_certificate_info, find_unique_cms_attribute
from pyhanko.sign.validation import async_validate_detached_cms
from pyhanko.sign.validation.settings import KeyUsageConstraints
from pyhanko.sign.validation.status import TimestampSignatureStatus
from pyhanko_certvalidator import ValidationContext

from reportgen.package.cms import DIGEST, SIGNING_DESCRIPTION, canonical, run_async
from reportgen.package.identity import colons

KEY_USAGE = KeyUsageConstraints(
    key_usage={"digital_signature", "non_repudiation"}, match_all_key_usages=False
)
_TIME_STAMP = "signature_time_stamp_token"


@dataclass(frozen=True)
class DetachedSignature:
    """What a signature that holds says.

    Parameters
    ----------
    certificate
        The signer's.
    fingerprints
        Of every certificate in the signature, the signer's first.
    time
        Signing time that the signer states.
    description
        Text of the signing-description attribute.
    anchored
        Whether the signer's certificate is, or stands under, one of the anchors.
    trust_problem
        Why not, in pyHanko's terms; empty if it does.
    time_stamp
        Time of the RFC 3161 time stamp, if there is one.
    time_stamp_anchored
        Whether the time-stamping authority stands under one of the anchors.
    """

    certificate: x509.Certificate
    fingerprints: tuple[str, ...]
    time: datetime
    description: str
    anchored: bool
    trust_problem: str
    time_stamp: datetime | None
    time_stamp_anchored: bool


def read_detached(
    content: bytes, signature: bytes, anchors: Sequence[x509.Certificate]
) -> DetachedSignature:
    """Judge a detached signature over ``content``.

    Parameters
    ----------
    content
        The bytes that were signed.
    signature
        DER of the CMS object.
    anchors
        Certificates that are trusted as they are.

    Raises
    ------
    ValueError
        The signature does not hold, or is not written as signing writes it; says why.
    """
    signed_data = _strict(signature)
    signer = signed_data["signer_infos"][0]
    attributes = signer["signed_attrs"]
    time = _attribute(attributes, "signing_time")
    roots = [asn1_x509.Certificate.load(anchor.public_bytes(Encoding.DER)) for anchor in anchors]
    # Without anchors the signer's path is not judged: the certificate stands for itself.
    signers = roots or [extract_certificate_info(signed_data).signer_cert]
    status = run_async(_status(content, signed_data, signers, roots, time))
    if not status.intact:
        raise ValueError("the signature is not over these bytes: the tag manifest was changed")
    if not status.valid:
        raise ValueError("the signature was not made with the certificate's key, or was changed")
    stamp = status.timestamp_validity
    if stamp is not None and not (stamp.intact and stamp.valid):
        raise ValueError("the time stamp does not belong to this signature, or was changed")
    stamp_anchored = stamp is not None and bool(stamp.trusted)
    if stamp is not None and stamp_anchored:
        # A certificate may have ended since; what counts is that it held when stamped.
        status = run_async(_status(content, signed_data, signers, roots, stamp.timestamp))
    certificate = status.signing_cert
    others = [choice.chosen.sha256 for choice in signed_data["certificates"]]
    chain = sorted({colons(digest) for digest in others} - {colons(certificate.sha256)})
    _require(len(others) == len(chain) + 1, "holds a certificate twice")
    return DetachedSignature(
        certificate=x509.load_der_x509_certificate(certificate.dump()),
        fingerprints=(colons(certificate.sha256), *chain),
        time=time,
        description=_attribute(attributes, SIGNING_DESCRIPTION),
        anchored=bool(status.trusted) and bool(roots),
        trust_problem="" if status.trusted else _problem(status.trust_problem_indic),
        time_stamp=stamp.timestamp if isinstance(stamp, TimestampSignatureStatus) else None,
        time_stamp_anchored=stamp_anchored,
    )


async def _status(
    content: bytes, signed_data: Any, signers: list[Any], stampers: list[Any], moment: datetime
) -> Any:
    def context(roots: list[Any]) -> ValidationContext:
        return ValidationContext(trust_roots=roots, moment=moment, allow_fetching=False)

    return await async_validate_detached_cms(
        content,
        signed_data,
        signer_validation_context=context(signers),
        ts_validation_context=context(stampers),
        key_usage_settings=KEY_USAGE,
    )


def _strict(signature: bytes) -> Any:
    """Load a CMS object and hold every part that the signature does not cover."""
    info = cms.ContentInfo.load(signature, strict=True)
    if info["content_type"].native != "signed_data":
        raise ValueError("is no CMS signature")
    data = info["content"]
    _require(len(data["signer_infos"]) == 1, "must hold exactly one signer")
    signer = data["signer_infos"][0]
    algorithm = signer["digest_algorithm"]["algorithm"].native
    _require(algorithm == DIGEST, f"uses the digest {algorithm}, not {DIGEST}")
    inner = data["encap_content_info"]
    _require(
        inner["content_type"].native == "data" and inner["content"].native is None,
        "must not hold content of its own",
    )
    unsigned = signer["unsigned_attrs"]
    kinds = [] if unsigned is core.VOID else [attribute["type"].native for attribute in unsigned]
    _require(kinds in ([], [_TIME_STAMP]), "holds attributes that nobody signed")
    _require(canonical(info).dump() == signature, "is not written as signing writes it")
    if kinds:
        tokens = unsigned[0]["values"]
        _require(len(tokens) == 1, "holds more than one time stamp")
        same = canonical(tokens[0]).dump() == tokens[0].dump()
        _require(same, "holds a time stamp that is not written as signing writes it")
    return data


def _require(condition: bool, otherwise: str) -> None:
    if not condition:
        raise ValueError(f"the signature {otherwise}")


def _attribute(attributes: Any, name: str) -> Any:
    try:
        return find_unique_cms_attribute(attributes, name).native
    except (KeyError, ValueError) as error:
        raise ValueError(f"the signature states no {name.replace('_', ' ')}") from error


def _problem(indication: Any) -> str:
    return str(getattr(indication, "name", indication)).replace("_", " ").lower()
