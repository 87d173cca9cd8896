"""No passphrase and no key goes into what a run leaves or says, whatever the template does."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import nbformat
import pytest
from cryptography.hazmat.primitives.serialization import (
    BestAvailableEncryption,
    Encoding,
    NoEncryption,
    PrivateFormat,
    load_der_private_key,
    pkcs12,
)

SECRET = "whirl-forward-0417"


@pytest.fixture
def identity(workshop, tmp_path: Path) -> tuple[Path, tuple[bytes, ...]]:
    """Give a locked identity file, and what must be seen nowhere: its passphrase and its key."""
    made = workshop.identity("N. Body")
    key = load_der_private_key(made.signer.signing_key.dump(), None)
    lock = BestAvailableEncryption(SECRET.encode())
    path = tmp_path / "body.p12"
    path.write_bytes(
        pkcs12.serialize_key_and_certificates(b"body", key, made.certificate, None, lock)
    )
    number = key.private_numbers().private_value.to_bytes(32, "big")
    pem = key.private_bytes(Encoding.PEM, PrivateFormat.PKCS8, NoEncryption())
    return path, (SECRET.encode(), number, number.hex().encode(), pem.splitlines()[1])


def run(folder: Path, *words: object, secret: str = SECRET) -> subprocess.CompletedProcess[bytes]:
    return subprocess.run(
        [sys.executable, "-m", "reportgen.cli", "run", str(folder / "case.yaml"),
         "-o", str(folder / "out"), "--allow-template", "sag.ipynb", *map(str, words)],
        stdin=subprocess.DEVNULL,
        capture_output=True,
        env={
            **os.environ,
            "REPORTGEN_HOME": str(folder / "home"),
            "REPORTGEN_PASSPHRASE": secret,
            "KEPT_FOR_THE_TEST": "seen",
        },
        check=False,
    )  # fmt: skip


def everything(folder: Path, done: subprocess.CompletedProcess[bytes]) -> bytes:
    files = [p for top in ("out", "home") for p in (folder / top).rglob("*") if p.is_file()]
    return b"".join([done.stdout, done.stderr, *(path.read_bytes() for path in files)])


def change(folder: Path, cell: str) -> None:
    notebook = nbformat.read(folder / "sag.ipynb", as_version=4)
    notebook.cells.insert(2, nbformat.v4.new_code_cell(cell))
    nbformat.write(notebook, folder / "sag.ipynb")


def test_a_template_that_prints_all_it_can_reach_prints_no_secret(
    sag_folder: Path, identity: tuple[Path, tuple[bytes, ...]]
) -> None:
    path, secrets = identity
    change(sag_folder, "import os; print(dict(os.environ))")
    done = run(sag_folder, "--identity", path)
    assert done.returncode == 3, done.stderr
    package = sag_folder / "out" / "CAL-0003_A"
    assert (package / "signatures" / "prepared").is_dir()
    notebook = (package / "data" / "calculation.ipynb").read_bytes()
    assert b"KEPT_FOR_THE_TEST" in notebook
    found = everything(sag_folder, done)
    assert not [secret for secret in secrets if secret in found]


def test_a_cell_that_fails_tells_no_secret(
    sag_folder: Path, identity: tuple[Path, tuple[bytes, ...]]
) -> None:
    path, secrets = identity
    found = "[v for k, v in os.environ.items() if 'TEST' in k or 'PASS' in k]"
    change(sag_folder, f"import os; raise RuntimeError({found})")
    done = run(sag_folder, "--identity", path, "--json")
    assert done.returncode == 1
    assert b"seen" in done.stderr
    assert (sag_folder / "out" / "CAL-0003_A.failed.ipynb").exists()
    found = everything(sag_folder, done)
    assert not [secret for secret in secrets if secret in found]


def test_a_wrong_passphrase_is_told_before_anything_is_calculated(
    sag_folder: Path, identity: tuple[Path, tuple[bytes, ...]]
) -> None:
    change(sag_folder, "raise RuntimeError('calculated')")
    done = run(sag_folder, "--identity", identity[0], "--json", secret="not-" + SECRET)
    assert done.returncode == 2
    assert b"the passphrase is wrong" in done.stderr
    assert SECRET.encode() not in done.stdout + done.stderr
    assert not (sag_folder / "out").exists()
