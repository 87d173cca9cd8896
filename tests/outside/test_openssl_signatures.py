"""Signatures judged by OpenSSL (openssl cms, openssl pkcs7, openssl x509).

Source: the ``openssl`` command on this machine, an implementation of RFC 5652 and RFC 5280
that shares no code with ours; its words and exit status are the expected values.

Obtained: judged by a general-purpose tool.
"""

from __future__ import annotations

import hashlib
import shutil
import subprocess
from pathlib import Path

import pytest

OPENSSL = shutil.which("openssl") or "openssl"
SIGNATURE = "tagmanifest-sha512.txt.p7s"


def openssl(folder: Path, *arguments: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [OPENSSL, *arguments], cwd=folder, capture_output=True, text=True, check=False
    )


def cms_verify(package: Path, role: str, anchor: Path) -> subprocess.CompletedProcess[str]:
    time = str(1772445600 + 3 * 3600)  # 2026-03-02 13:00 UTC
    return openssl(
        package,
        *("cms", "-verify", "-binary", "-inform", "DER"),
        *("-in", f"signatures/{role}/{SIGNATURE}", "-content", "tagmanifest-sha512.txt"),
        *("-CAfile", str(anchor), "-purpose", "any", "-attime", time, "-out", "/dev/null"),
    )


@pytest.fixture
def anchors(workshop, tmp_path):
    files = {}
    for person in ("Ann Ash", "Bo Birch", "Cy Cedar"):
        files[person] = tmp_path / f"{person}.pem"
        files[person].write_bytes(workshop.identity(person).pem())
    return files


@pytest.mark.parametrize(
    ("role", "person"),
    [("prepared", "Ann Ash"), ("checked", "Bo Birch"), ("approved", "Cy Cedar")],
)
def test_openssl_accepts_each_sign_off(approved_once, anchors, role, person):
    done = cms_verify(approved_once, role, anchors[person])
    assert done.returncode == 0, done.stderr
    assert "CMS Verification successful" in done.stderr


def test_openssl_refuses_a_changed_tag_manifest(approved, anchors):
    manifest = approved / "tagmanifest-sha512.txt"
    manifest.write_bytes(manifest.read_bytes().replace(b"a", b"b", 1))
    done = cms_verify(approved, "prepared", anchors["Ann Ash"])
    assert done.returncode != 0
    assert "verification failure" in done.stderr


def test_openssl_refuses_another_anchor(approved_once, anchors):
    done = cms_verify(approved_once, "prepared", anchors["Bo Birch"])
    assert done.returncode != 0
    assert "certificate verify error" in done.stderr


def test_the_statement_digest_can_be_read_with_openssl(approved_once):
    folder = approved_once / "signatures" / "checked"
    done = openssl(folder, "cms", "-cmsout", "-print", "-inform", "DER", "-in", SIGNATURE)
    digest = hashlib.sha512((folder / "statement.json").read_bytes()).hexdigest()
    assert f"UTF8STRING:checked; statement.json SHA-512 {digest}" in done.stdout


def test_openssl_reads_the_fingerprint_that_is_shown(workshop, anchors):
    done = openssl(
        workshop.folder,
        *("x509", "-in", str(anchors["Ann Ash"]), "-noout", "-fingerprint", "-sha256", "-subject"),
    )
    assert workshop.identity("Ann Ash").fingerprint in done.stdout
    assert "self-issued" in done.stdout
    assert "Ann Ash" in done.stdout
