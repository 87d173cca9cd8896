"""What a verification finds, and in which words it is told."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import datetime
from typing import Any, Literal

from reportgen.errors import VerificationError
from reportgen.package.contents import Check
from reportgen.package.statement import Role

Kind = Literal["trusted", "self-issued", "not anchored", "unsigned", "untrusted", "damaged"]
"""The kinds of verdict.

``trusted``: intact, every signer under a given trust anchor. ``self-issued``: intact, at
least one signer vouches for their own name. ``not anchored``: intact, signed under an
issuer that no given anchor covers because none was given. ``unsigned``: intact, no
signature. ``untrusted``: intact, but a signer is not under the anchors given.
``damaged``: something is not as it was signed or packed.
"""


@dataclass(frozen=True)
class Signer:
    """One sign-off as it was found.

    Parameters
    ----------
    role, name, words
        Who stated what.
    time
        The time that it is judged at: the time stamp's where one is trusted, else the one
        that the signer states.
    time_stamped
        Whether that time is a trusted time stamp's.
    fingerprint
        SHA-256 of the signer's certificate.
    standing
        How the certificate stands to the anchors.
    accepted_holds
        Open holds that the signer accepted, text by id.
    """

    role: Role
    name: str
    words: str
    time: datetime
    time_stamped: bool
    fingerprint: str
    standing: Literal["trusted", "self-issued", "not anchored", "untrusted"]
    accepted_holds: dict[str, str]


@dataclass(frozen=True)
class Verification:
    """The verdict on a package.

    Parameters
    ----------
    kind
        Which verdict; see :data:`Kind`.
    ok
        Whether the package is what it says.
    headline
        The verdict in one line.
    checks
        Everything that was looked at.
    signers
        The sign-offs, in order.
    """

    kind: Kind
    ok: bool
    headline: str
    checks: tuple[Check, ...]
    signers: tuple[Signer, ...]

    @property
    def exit_status(self) -> int:
        """The status that a command ends with: 0, or 4 where verification failed."""
        return 0 if self.ok else VerificationError.exit_status

    @property
    def faults(self) -> tuple[Check, ...]:
        """What is not as it must be."""
        return tuple(check for check in self.checks if not check.ok)

    def to_json(self) -> dict[str, Any]:
        """Give the verdict as plain JSON values."""
        return {
            "ok": self.ok,
            "kind": self.kind,
            "headline": self.headline,
            "checks": [vars(check) for check in self.checks],
            "signers": [
                {**vars(signer), "time": signer.time.strftime("%Y-%m-%dT%H:%M:%SZ")}
                for signer in self.signers
            ],
        }


def verdict(name: str, checks: Sequence[Check], signers: Sequence[Signer]) -> Verification:
    """Weigh the checks into one verdict, in words that are safe to print.

    Names and statements come from whoever made the package: what could steer a terminal or
    hide text is written as an escape.
    """
    name = printable(name)
    checks = [
        replace(check, subject=printable(check.subject), detail=printable(check.detail))
        for check in checks
    ]
    signers = [
        replace(signer, name=printable(signer.name), words=printable(signer.words))
        for signer in signers
    ]
    faults = [check for check in checks if not check.ok]
    kind = _kind(faults, signers)
    return Verification(
        kind=kind,
        ok=not faults,
        headline=f"{name}: {_headline(kind, faults, signers)}",
        checks=tuple(checks),
        signers=tuple(signers),
    )


def printable(text: str) -> str:
    """Write control, format and undecodable characters as escapes."""
    return "".join(
        char if char.isprintable() else char.encode("unicode_escape").decode() for char in text
    )


def _kind(faults: Sequence[Check], signers: Sequence[Signer]) -> Kind:
    kinds = {fault.kind for fault in faults}
    if kinds - {"trust", "unsigned"}:
        return "damaged"
    if not signers:
        return "unsigned"
    standings = {signer.standing for signer in signers}
    order: tuple[Kind, ...] = ("untrusted", "self-issued", "not anchored", "trusted")
    return next(kind for kind in order if kind in standings)


def _headline(kind: Kind, faults: Sequence[Check], signers: Sequence[Signer]) -> str:
    roles = ", ".join(f"{signer.role} by {signer.name}" for signer in signers)
    if kind == "trusted":
        return f"intact; {roles}; every signer is under a trust anchor given"
    if kind == "self-issued":
        pairs = {s.fingerprint: s.name for s in signers if s.standing == "self-issued"}
        own = "; ".join(f"{name} {fingerprint}" for fingerprint, name in pairs.items())
        return (
            f"intact; {roles}; self-issued: who signed rests on comparing the SHA-256 "
            f"fingerprint with one had from the signer ({own})"
        )
    if kind == "not anchored":
        return f"intact; {roles}; who issued the certificates was not judged: no anchor was given"
    if kind == "untrusted":
        outside = ", ".join(s.name for s in signers if s.standing == "untrusted")
        return f"intact, but not signed under the trust anchors given ({outside})"
    if kind == "unsigned":
        return "intact, unsigned" + (f"; {faults[0].detail}" if faults else "")
    first = next(fault for fault in faults if fault.kind not in ("trust", "unsigned"))
    more = f" (and {len(faults) - 1} more)" if len(faults) > 1 else ""
    return f"damaged: {first.subject}: {first.detail}{more}"
