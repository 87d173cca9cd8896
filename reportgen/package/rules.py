"""Who may sign what, and when: one place for signing and for verifying."""

from __future__ import annotations

import unicodedata
from collections.abc import Mapping, Sequence
from typing import Any

from reportgen.package.statement import ROLES, Statement, open_holds, second_computations


def refusals(
    statement: Statement, results: Mapping[str, Any], earlier: Sequence[Statement]
) -> list[str]:
    """Say why a sign-off must not be made; empty if it may.

    Parameters
    ----------
    statement
        The sign-off to judge.
    results
        ``results.json`` of the package.
    earlier
        The sign-offs before it, in order.
    """
    document = results["document"]
    return [
        reason
        for reason in (
            _draft(document),
            _order(statement, earlier),
            _named(statement, document),
            _own_identity(statement),
            _time(statement, earlier),
            _other_person(statement, document, earlier),
            *_content(statement, results),
            *_approval(statement, results),
        )
        if reason
    ]


def _draft(document: Mapping[str, Any]) -> str:
    if document.get("status") == "draft":
        return (
            "the document's status is draft, and a draft is not signed; "
            "set the status to for review or for issue and run again"
        )
    return ""


def _order(statement: Statement, earlier: Sequence[Statement]) -> str:
    done = tuple(sign_off.role for sign_off in earlier)
    if statement.role in done:
        return f"the package is signed as {statement.role} already"
    expected = ROLES[: ROLES.index(statement.role)]
    if done != expected:
        missing = next((role for role in expected if role not in done), ROLES[0])
        return (
            f"it cannot be signed as {statement.role} before it is signed as {missing}; "
            f"the order is {', '.join(ROLES)}"
        )
    return ""


def _named(statement: Statement, document: Mapping[str, Any]) -> str:
    if not statement.name.strip():
        return "a sign-off needs the signer's name"
    if not statement.words.strip():
        return "a sign-off needs a statement"
    person = document.get(statement.role)
    named = person.get("name") if isinstance(person, Mapping) else None
    if named and not _same_name(str(named), statement.name):
        return (
            f"the report names {named} under {statement.role}, the signer is {statement.name}; "
            "correct the case and raise the revision, or let the person named sign"
        )
    return ""


def _own_identity(statement: Statement) -> str:
    # An issuer may write a name in its own way; a self-issued one is the signer's own word.
    if statement.self_issued and not _same_name(statement.holder, statement.name):
        return (
            f"the self-issued identity is that of {statement.holder}, the signer is "
            f"{statement.name}; sign with an identity of your own"
        )
    return ""


def _time(statement: Statement, earlier: Sequence[Statement]) -> str:
    if earlier and statement.time < earlier[-1].time:
        last = earlier[-1]
        return (
            f"its time {statement.time:%Y-%m-%d %H:%M:%S} UTC lies before that of the sign-off as "
            f"{last.role} ({last.time:%Y-%m-%d %H:%M:%S} UTC); check the clock"
        )
    return ""


def _other_person(
    statement: Statement, document: Mapping[str, Any], earlier: Sequence[Statement]
) -> str:
    if statement.role != "checked" or document.get("one person") is True:
        return ""
    for sign_off in earlier:
        same = _same_name(sign_off.name, statement.name)
        if sign_off.role == "prepared" and (same or sign_off.certificate == statement.certificate):
            how = "" if same else " (the certificate is the same)"
            return (
                f"{statement.name} prepared it{how} and cannot be its only checker; let another "
                "person check, or state in the case that one person does both (document.one_person)"
            )
    return ""


def _content(statement: Statement, results: Mapping[str, Any]) -> list[str]:
    reasons = []
    document = results["document"]
    if (statement.number, statement.revision) != (document["number"], document["revision"]):
        reasons.append("its statement is about another document")
    holds = open_holds(results)
    for identifier, text in statement.accepted_holds.items():
        if identifier not in holds:
            known = ", ".join(sorted(holds)) or "none"
            reasons.append(f"there is no open hold {identifier!r} to accept; open are: {known}")
        elif text != holds[identifier]:
            reasons.append(f"its statement quotes hold {identifier} otherwise than the results")
    if (statement.second_agreed, statement.second_failed) != second_computations(results):
        reasons.append("its statement about second computations is not what the results say")
    return reasons


def _approval(statement: Statement, results: Mapping[str, Any]) -> list[str]:
    if statement.role != "approved":
        return []
    reasons = []
    if statement.second_failed:
        reasons.append(
            "the second computation does not agree for "
            f"{', '.join(statement.second_failed)}; such a package is not approved"
        )
    if left := [key for key in open_holds(results) if key not in statement.accepted_holds]:
        reasons.append(
            f"open holds are not accepted: {', '.join(left)}; close them in the case, "
            "or accept each by its id"
        )
    return reasons


def _same_name(one: str, other: str) -> bool:
    return _plain(one) == _plain(other)


def _plain(name: str) -> str:
    return " ".join(unicodedata.normalize("NFKC", name).casefold().split())
