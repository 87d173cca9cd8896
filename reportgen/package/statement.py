"""What a signer states: role, name, time, words, and what these stand on.

A statement is a small JSON file beside its signature. The signature covers it by digest;
it in turn holds the digests of the tag manifest, of the signed PDF and of the sign-offs
before it, so that none of them can be exchanged later.
"""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import dataclass
from datetime import UTC, datetime
from typing import Any, Literal

from reportgen.package.bag import sha512

Role = Literal["prepared", "checked", "approved"]
ROLES: tuple[Role, ...] = ("prepared", "checked", "approved")
"""In the order of signing."""

STATEMENT_FILE = "statement.json"
SIGNATURE_FILE = "tagmanifest-sha512.txt.p7s"
PDF_FILE = "report.pdf"

DEFAULT_WORDS: dict[Role, str] = {
    "prepared": "I prepared this calculation and stand behind its inputs, method and results.",
    "checked": "I checked the inputs, method and results of this calculation independently.",
    "approved": "I approve this calculation for the use that it states.",
}
"""What is stated where the signer chooses no words of their own."""

_FORMAT = 1


@dataclass(frozen=True)
class SignedPdf:
    """Length and digest of the PDF once this sign-off is in it."""

    size: int
    sha512: str


@dataclass(frozen=True)
class Statement:
    """One sign-off.

    Parameters
    ----------
    role
        What the signer answers for.
    number, revision
        The document.
    name, words
        Who signs, and what is stated.
    time
        When, by the signer's clock; whole seconds, UTC.
    certificates
        SHA-256 fingerprints of the certificates in the signature, the signer's first.
    holder, self_issued
        Whom that certificate names, and whether it vouches for itself.
    accepted_holds
        Open holds that the signer accepts: text by id.
    second_agreed, second_failed
        Ids of the results whose second computation agreed, and of those where it did not.
    tag_manifest
        SHA-512 of ``tagmanifest-sha512.txt``.
    pdf
        The PDF with this signature in it; none for a package without a PDF.
    earlier
        SHA-512 of the signature file of each sign-off before this one, by role.
    """

    role: Role
    number: str
    revision: str
    name: str
    words: str
    time: datetime
    certificates: tuple[str, ...]
    holder: str
    self_issued: bool
    accepted_holds: Mapping[str, str]
    second_agreed: tuple[str, ...]
    second_failed: tuple[str, ...]
    tag_manifest: str
    pdf: SignedPdf | None
    earlier: Mapping[str, str]

    def to_bytes(self) -> bytes:
        """Give the statement's file: JSON, sorted, one form only."""
        content = {
            "format": _FORMAT,
            "role": self.role,
            "document": {"number": self.number, "revision": self.revision},
            "name": self.name,
            "statement": self.words,
            "time": self.time.strftime("%Y-%m-%dT%H:%M:%SZ"),
            "certificates sha256": list(self.certificates),
            "certificate holder": self.holder,
            "certificate is self-issued": self.self_issued,
            "accepted holds": dict(self.accepted_holds),
            "second computations": {
                "agreed": list(self.second_agreed),
                "not agreed": list(self.second_failed),
            },
            "tagmanifest-sha512.txt sha512": self.tag_manifest,
            "report.pdf": self.pdf and {"bytes": self.pdf.size, "sha512": self.pdf.sha512},
            "earlier signatures sha512": dict(self.earlier),
        }
        text = json.dumps(content, ensure_ascii=False, indent=1, sort_keys=True)
        return text.encode() + b"\n"

    @classmethod
    def from_bytes(cls, content: bytes) -> Statement:
        """Read a statement's file.

        Raises
        ------
        ValueError
            It is not a statement, or not written in the one form there is.
        """
        try:
            given = json.loads(content)
            if given["format"] != _FORMAT:
                raise ValueError(f"format {given['format']!r} is not known to this version")
            statement = cls._from_json(given)
            same = statement.to_bytes() == content
        except (KeyError, TypeError, AttributeError, RecursionError, UnicodeError) as error:
            raise ValueError(f"is not a statement ({type(error).__name__})") from error
        if not same:
            raise ValueError("is not written as a statement is")
        return statement

    @classmethod
    def _from_json(cls, given: dict[str, Any]) -> Statement:
        pdf = given["report.pdf"]
        second = given["second computations"]
        return cls(
            role=ROLES[ROLES.index(given["role"])],
            number=str(given["document"]["number"]),
            revision=str(given["document"]["revision"]),
            name=str(given["name"]),
            words=str(given["statement"]),
            time=datetime.strptime(given["time"], "%Y-%m-%dT%H:%M:%SZ").replace(tzinfo=UTC),
            certificates=tuple(map(str, given["certificates sha256"])),
            holder=str(given["certificate holder"]),
            self_issued=given["certificate is self-issued"] is True,
            accepted_holds={str(k): str(v) for k, v in given["accepted holds"].items()},
            second_agreed=tuple(map(str, second["agreed"])),
            second_failed=tuple(map(str, second["not agreed"])),
            tag_manifest=str(given["tagmanifest-sha512.txt sha512"]),
            pdf=None if pdf is None else SignedPdf(int(pdf["bytes"]), str(pdf["sha512"])),
            earlier={str(k): str(v) for k, v in given["earlier signatures sha512"].items()},
        )

    @property
    def certificate(self) -> str:
        """SHA-256 fingerprint of the signer's certificate."""
        return self.certificates[0] if self.certificates else ""

    @property
    def description(self) -> str:
        """The text that the signature carries: it binds role and statement."""
        return f"{self.role}; {STATEMENT_FILE} SHA-512 {sha512(self.to_bytes())}"

    @property
    def reason(self) -> str:
        """The text that the PDF's signature carries."""
        return f"{self.role.capitalize()}: {self.words}"

    @property
    def field(self) -> str:
        """Name of the PDF's signature field."""
        return self.role.capitalize()


def pdf_title(role: Role) -> str:
    """Give the name that a PDF reader shows for the signature field."""
    return f"Sign-off: {role}"


def second_computations(results: Mapping[str, Any]) -> tuple[tuple[str, ...], tuple[str, ...]]:
    """Give the ids of results whose second computation agreed, and of those where not."""
    judged = [
        (str(result["id"]), result["second"].get("agrees") is True)
        for result in results.get("results", [])
        if result.get("second") is not None
    ]
    agreed = tuple(identifier for identifier, agrees in judged if agrees)
    return agreed, tuple(identifier for identifier, agrees in judged if not agrees)


def open_holds(results: Mapping[str, Any]) -> dict[str, str]:
    """Give the open holds of a calculation, text by id."""
    return {str(hold["id"]): str(hold.get("text", "")) for hold in results.get("holds", [])}
