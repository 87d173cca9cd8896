"""What each command does: call the floors below and print what came of it."""

from __future__ import annotations

import argparse
from importlib import import_module

_WHERE = {
    "run": "running",
    "check": "inputs",
    "schema": "inputs",
    "new": "inputs",
    "templates": "inputs",
    "rerun": "repeating",
    "zip": "repeating",
    "sign": "signing",
    "verify": "signing",
    "identity": "signing",
    "compare": "revisions",
    "revise": "revisions",
    "worst": "revisions",
    "register": "registering",
}


def run(arguments: argparse.Namespace) -> int:
    """Carry out a parsed command and return its exit status."""
    module = import_module(f"{__name__}.{_WHERE[arguments.command]}")
    status: int = getattr(module, arguments.command)(arguments)
    return status
