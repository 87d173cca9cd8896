"""Commands about signatures: sign, verify, identity."""

from __future__ import annotations

import argparse

from reportgen.commands.shared import identity_of, print_json, timestamper_of


def sign(arguments: argparse.Namespace) -> int:
    from reportgen.archive.verify import require_sound
    from reportgen.package.sign import sign_package
    from reportgen.package.statement import DEFAULT_WORDS

    require_sound(arguments.package)
    words = arguments.statement or DEFAULT_WORDS[arguments.role]
    path = sign_package(
        arguments.package,
        arguments.role,
        identity_of(arguments, arguments.name),
        words,
        arguments.name,
        accepted_holds=arguments.accept_hold,
        timestamper=timestamper_of(arguments),
    )
    if arguments.json:
        print_json({"role": arguments.role, "sign_off": str(path)})
    else:
        print(f"signed as {arguments.role}: {path}")
    return 0


def verify(arguments: argparse.Namespace) -> int:
    from reportgen.archive.verify import load_anchors, verify_package

    anchors = [anchor for path in arguments.trust for anchor in load_anchors(path)]
    verification = verify_package(arguments.package, anchors or None)
    if arguments.json:
        print_json(verification.to_json())
        return verification.exit_status
    print(verification.headline)
    width = max((len(check.kind) for check in verification.checks), default=0)
    for check in verification.checks:
        print(
            f"  {'ok ' if check.ok else 'BAD'}  {check.kind:<{width}}  "
            f"{check.subject}{': ' if check.detail else ''}{check.detail}"
        )
    return verification.exit_status


def identity(arguments: argparse.Namespace) -> int:
    one = identity_of(arguments, arguments.name)
    if arguments.pem:
        print(one.pem().decode(), end="")
        return 0
    facts = {
        "name": one.name,
        "kind": "self-issued" if one.self_issued else "issued by an authority",
        "SHA-256 fingerprint": one.fingerprint,
        "kept in": one.origin,
    }
    if arguments.json:
        print_json(facts)
    else:
        for name, value in facts.items():
            print(f"{name}: {value}")
    return 0
