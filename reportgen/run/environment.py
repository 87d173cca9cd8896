"""What a calculation ran on: versions and digests enough to build it again, and nothing private."""

from __future__ import annotations

import hashlib
import platform
import re
import sys
from importlib.metadata import Distribution, distributions
from typing import Any

import numpy as np

from reportgen.run.fingerprint import code_digest


def environment() -> dict[str, Any]:
    """Record the packages, the interpreter, the system and the linear algebra of this process.

    Returns
    -------
    dict[str, Any]
        ``format`` 1; ``code_sha512``, of reportgen's own code; ``python`` (implementation,
        version, compiler); ``platform`` (system, machine, C library); ``blas`` (name, version,
        build); ``simd`` (instruction sets found, on which last digits can depend);
        ``packages``, by name: each one's ``name``, ``version``, and ``record_sha256``, the
        digest of the list of its files and their digests, which is None where the installer
        left no such list. No paths, no names of computers or users, no times.
    """
    return {
        "format": 1,
        "code_sha512": code_digest(),
        "python": {
            "implementation": platform.python_implementation(),
            "version": platform.python_version(),
            "compiler": platform.python_compiler(),
        },
        "platform": {
            "system": platform.system(),
            "machine": platform.machine(),
            "libc": " ".join(platform.libc_ver()).strip(),
            "byte_order": sys.byteorder,
        },
        **_linear_algebra(),
        "packages": installed_packages(),
    }


def installed_packages() -> list[dict[str, str | None]]:
    """List what is installed for this interpreter; of two of a name, the one that is imported.

    Returns
    -------
    list[dict[str, str | None]]
        Name (as PyPI normalises it), version, and digest of the file list, sorted by name.
    """
    found: dict[str, dict[str, str | None]] = {}
    for distribution in distributions():
        name = _normal(distribution)
        if name and name not in found:
            found[name] = {
                "name": name,
                "version": distribution.version,
                "record_sha256": _record_digest(distribution),
            }
    return [found[name] for name in sorted(found)]


def _normal(distribution: Distribution) -> str:
    name: str | None = distribution.metadata["Name"]
    return re.sub(r"[-_.]+", "-", name).lower() if name else ""


def _record_digest(distribution: Distribution) -> str | None:
    record = distribution.read_text("RECORD")
    return None if record is None else hashlib.sha256(record.encode("utf-8")).hexdigest()


def _linear_algebra() -> dict[str, Any]:
    built: dict[str, Any] = np.show_config(mode="dicts") or {}  # type: ignore[assignment]
    blas = built.get("Build Dependencies", {}).get("blas", {})
    found = built.get("SIMD Extensions", {})
    return {
        "blas": {
            "name": blas.get("name", "unknown"),
            "version": blas.get("version", "unknown"),
            "build": blas.get("openblas configuration", "unknown"),
        },
        "simd": sorted({*found.get("baseline", []), *found.get("found", [])}),
    }
