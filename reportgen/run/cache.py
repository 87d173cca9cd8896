"""Which runs need not be done again: a key over all that can change a report, and a store."""

from __future__ import annotations

import contextlib
import functools
import hashlib
import json
import os
import tempfile
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from reportgen.run.environment import environment
from reportgen.run.fingerprint import code_digest

_FORMAT = 1


def run_key(
    inputs: Mapping[str, str],
    template: str,
    code: str | None = None,
    versions: Mapping[str, Any] | None = None,
) -> str:
    """Give the key of a run: equal only if nothing that can change the report differs.

    Parameters
    ----------
    inputs
        Digest of each file or setting that goes in, by name: the case file, side files, the
        house file, options.
    template
        Digest of the template.
    code
        Digest of the package's code; of this one unless given.
    versions
        What it runs on, as :func:`~reportgen.run.environment.environment` gives it; of this
        process unless given.

    Returns
    -------
    str
        SHA-256 in hex.
    """
    whole = {
        "format": _FORMAT,
        "inputs": dict(inputs),
        "template": template,
        "code": _own_code() if code is None else code,
        "versions": _own_versions() if versions is None else versions,
    }
    text = json.dumps(whole, sort_keys=True, ensure_ascii=True, allow_nan=False)
    return hashlib.sha256(text.encode("ascii")).hexdigest()


@functools.cache
def _own_code() -> str:
    return code_digest()


@functools.cache
def _own_versions() -> dict[str, Any]:
    return environment()


class RunStore:
    """Remembers what runs have left, by key, in a folder that many runs may use at once.

    An entry is a small file that appears whole or not at all; the last of two writers wins,
    which is no matter, since equal keys stand for equal reports.

    Parameters
    ----------
    root
        Folder of the store; made when first written to.
    """

    def __init__(self, root: Path) -> None:
        self.root = root

    def look_up(self, key: str) -> dict[str, Any] | None:
        """Give what was recorded for a key.

        Parameters
        ----------
        key
            From :func:`run_key`.

        Returns
        -------
        dict[str, Any] | None
            The entry; None if there is none or its file is damaged. That the package it
            speaks of is still there and unaltered is for the caller to check.
        """
        try:
            found = json.loads(self._path(key).read_bytes())
        except (OSError, ValueError):
            return None
        if not isinstance(found, dict) or found.get("key") != key:
            return None
        entry = found.get("entry")
        return entry if isinstance(entry, dict) else None

    def record(self, key: str, entry: Mapping[str, Any]) -> None:
        """Remember what a run has left.

        Parameters
        ----------
        key
            From :func:`run_key`.
        entry
            Plain JSON, such as the package's place and the digest of its tag manifest.
        """
        path = self._path(key)
        path.parent.mkdir(parents=True, exist_ok=True)
        content = json.dumps({"key": key, "entry": dict(entry)}, sort_keys=True, allow_nan=False)
        handle, name = tempfile.mkstemp(dir=path.parent, prefix=".", suffix=".tmp")
        try:
            with os.fdopen(handle, "w", encoding="utf-8") as file:
                file.write(content)
            Path(name).replace(path)
        except BaseException:
            with contextlib.suppress(OSError):
                Path(name).unlink()
            raise

    def forget(self, key: str) -> None:
        """Forget a key; one that is not there is no matter."""
        self._path(key).unlink(missing_ok=True)

    def _path(self, key: str) -> Path:
        if len(key) != 64 or not set(key) <= set("0123456789abcdef"):
            raise ValueError(f"not a key: {key!r}")
        return self.root / key[:2] / f"{key}.json"
