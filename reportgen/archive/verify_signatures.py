"""The sign-offs of a package: each on its own, and all in their order."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from datetime import datetime, timedelta
from typing import Any

from cryptography import x509

from reportgen.archive.verify_cms import DetachedSignature, read_detached
from reportgen.archive.verify_pdf import SignedCopy, pdf_checks
from reportgen.archive.verify_result import Signer
from reportgen.package.bag import PAYLOAD, SIGNATURES, TAG_MANIFEST, sha512
from reportgen.package.contents import Check, Contents
from reportgen.package.identity import holder, is_self_issued
from reportgen.package.rules import refusals
from reportgen.package.statement import (
    PDF_FILE,
    ROLES,
    SIGNATURE_FILE,
    STATEMENT_FILE,
    Role,
    Statement,
)

_CLOCK_TOLERANCE = timedelta(days=1)
"""How far ahead of the reader's clock a signer's may be."""


@dataclass
class SignOffs:
    """What was found about the sign-offs of a package."""

    checks: list[Check] = field(default_factory=list)
    signers: list[Signer] = field(default_factory=list)


def verify_sign_offs(
    contents: Contents,
    results: Mapping[str, Any],
    anchors: Sequence[x509.Certificate] | None,
    now: datetime,
) -> SignOffs:
    """Judge every sign-off of a package.

    Parameters
    ----------
    contents
        The package as read, already judged as a bag.
    results
        Its ``results.json``.
    anchors
        Trust anchors; None if none were given.
    now
        The reader's time.
    """
    found = SignOffs(checks=list(_layout(contents)))
    earlier: list[Statement] = []
    copies: list[SignedCopy] = []
    for role in ROLES:
        files = contents.below(f"{SIGNATURES}{role}/")
        if not files:
            continue
        one = _SignOff(contents, role, files, results, earlier, anchors, now)
        found.checks += one.checks()
        if one.statement is not None:
            earlier.append(one.statement)
        if one.signer is not None:
            found.signers.append(one.signer)
        if one.copy is not None:
            copies.append(one.copy)
    published = contents.files.get(PAYLOAD + PDF_FILE)
    if published is not None:
        found.checks += pdf_checks(published, copies, anchors or ())
    status = results["document"]["status"]
    if not any(path.startswith(SIGNATURES) for path in contents.files):
        if status != "draft":
            detail = f"no signature, though the document's status is {status}"
            found.checks.append(Check("unsigned", "signatures", False, detail))
        elif anchors is not None:
            detail = "no signature, so no signer under the trust anchors given"
            found.checks.append(Check("unsigned", "signatures", False, detail))
    return found


def _layout(contents: Contents) -> Iterator[Check]:
    wanted = {STATEMENT_FILE, SIGNATURE_FILE}
    if PAYLOAD + PDF_FILE in contents.files:
        wanted.add(PDF_FILE)
    for path in sorted(contents.below(SIGNATURES)):
        role, _, file = path.partition("/")
        if role not in ROLES or file not in wanted:
            yield Check("layout", SIGNATURES + path, False, "does not belong to a sign-off")
    for role in ROLES:
        files = contents.below(f"{SIGNATURES}{role}/")
        for file in sorted(wanted - files.keys() if files else ()):
            yield Check("layout", f"{SIGNATURES}{role}/{file}", False, "missing")


@dataclass
class _SignOff:
    contents: Contents
    role: Role
    files: Mapping[str, bytes]
    results: Mapping[str, Any]
    earlier: Sequence[Statement]
    anchors: Sequence[x509.Certificate] | None
    now: datetime
    statement: Statement | None = None
    signer: Signer | None = None
    copy: SignedCopy | None = None

    def checks(self) -> Iterator[Check]:
        place = f"{SIGNATURES}{self.role}/"
        if STATEMENT_FILE not in self.files or SIGNATURE_FILE not in self.files:
            return  # told as missing already
        try:
            self.statement = statement = Statement.from_bytes(self.files[STATEMENT_FILE])
        except ValueError as error:
            yield Check("statement", place + STATEMENT_FILE, False, str(error))
            return
        # What others wrote may break a reader of ASN.1 in ways of its own.
        try:
            signature = read_detached(
                self.contents.files[TAG_MANIFEST], self.files[SIGNATURE_FILE], self.anchors or ()
            )
        except Exception as error:
            detail = str(error) if isinstance(error, ValueError) else type(error).__name__
            yield Check("signature", place + SIGNATURE_FILE, False, detail or "cannot be read")
            return
        yield Check("signature", place + SIGNATURE_FILE, True, "holds over the tag manifest")
        yield from self._statement_checks(place + STATEMENT_FILE, statement, signature)
        yield from self._rule_checks(statement)
        yield from self._certificate_checks(statement, signature)
        if PDF_FILE in self.files:
            self.copy = SignedCopy(
                place + PDF_FILE, self.files[PDF_FILE], statement, signature.certificate
            )

    def _statement_checks(
        self, path: str, statement: Statement, signature: DetachedSignature
    ) -> Iterator[Check]:
        faults = []
        if statement.role != self.role:
            faults.append(f"is a sign-off as {statement.role}")
        if signature.description != statement.description:
            faults.append("is not the statement that was signed")
        if signature.time != statement.time:
            faults.append("gives another time than the signature")
        if statement.tag_manifest != sha512(self.contents.files[TAG_MANIFEST]):
            faults.append("was made over another tag manifest")
        if statement.certificates != signature.fingerprints:
            faults.append("names other certificates than the signature holds")
        if statement.holder != holder(signature.certificate):
            faults.append("names another holder than the certificate")
        if statement.self_issued != is_self_issued(signature.certificate):
            faults.append("says otherwise than the certificate who issued it")
        signatures = {
            before.role: sha512(self.contents.files[f"{SIGNATURES}{before.role}/{SIGNATURE_FILE}"])
            for before in self.earlier
        }
        if dict(statement.earlier) != signatures:
            faults.append("stands on other earlier sign-offs than are here")
        if statement.time > self.now + _CLOCK_TOLERANCE:
            faults.append(f"is dated in the future ({statement.time:%Y-%m-%d})")
        if (statement.pdf is None) == (PAYLOAD + PDF_FILE in self.contents.files):
            faults.append("does not say of a PDF what is here")
        detail = "; ".join(faults) or (
            f"{statement.name}, {statement.time:%Y-%m-%d %H:%M:%S} UTC: {statement.words}"
        )
        yield Check("statement", path, not faults, detail)

    def _rule_checks(self, statement: Statement) -> Iterator[Check]:
        reasons = refusals(statement, self.results, self.earlier)
        accepted = ", ".join(statement.accepted_holds) or "none"
        detail = "; ".join(reasons) or (
            f"in order; {len(statement.second_agreed)} second computations agreed, "
            f"{len(statement.second_failed)} did not; holds accepted: {accepted}"
        )
        yield Check("rule", self.role, not reasons, detail)

    def _certificate_checks(
        self, statement: Statement, signature: DetachedSignature
    ) -> Iterator[Check]:
        certificate = signature.certificate
        stamped = signature.time_stamp is not None and signature.time_stamp_anchored
        time = signature.time_stamp if stamped and signature.time_stamp else statement.time
        first, last = certificate.not_valid_before_utc, certificate.not_valid_after_utc
        if not first <= time <= last:
            detail = (
                f"was valid from {first:%Y-%m-%d} to {last:%Y-%m-%d}, "
                f"not when it was used ({time:%Y-%m-%d})"
            )
            yield Check("certificate", self.role, False, detail)
        own = is_self_issued(certificate)
        nature = "self-issued" if own else f"issued by {certificate.issuer.rfc4514_string()}"
        detail = f"{holder(certificate)}, {nature}, SHA-256 {statement.certificate}"
        yield Check("certificate", self.role, True, detail)
        if signature.time_stamp is not None:
            judged = "its authority is anchored" if stamped else "its authority was not judged"
            detail = f"{signature.time_stamp:%Y-%m-%d %H:%M:%S} UTC; {judged}"
            yield Check("time stamp", self.role, True, detail)
        if self.anchors is None:
            standing = "self-issued" if own else "not anchored"
            words = (
                "authorship rests on comparing the fingerprint"
                if own
                else "no trust anchor was given"
            )
        elif signature.anchored:
            standing, words = "trusted", "under a trust anchor given; revocation is not looked up"
        else:
            standing = "untrusted"
            words = f"not under the trust anchors given ({signature.trust_problem or 'no anchor'})"
        yield Check("trust", self.role, standing != "untrusted", words)
        self.signer = Signer(
            role=self.role,
            name=statement.name,
            words=statement.words,
            time=time,
            time_stamped=stamped,
            fingerprint=statement.certificate,
            standing=standing,  # type: ignore[arg-type]
            accepted_holds=dict(statement.accepted_holds),
        )
