"""Packages judged by the ``bagit`` library and by GNU ``sha512sum``.

Sources: bagit (Library of Congress), which implements RFC 8493; sha512sum of GNU coreutils.
Neither shares code with ours; both judge the bytes on the disk.

Obtained: judged by a general-purpose library and tool.
"""

from __future__ import annotations

import shutil
import subprocess

import bagit
import pytest

SHA512SUM = shutil.which("sha512sum") or "sha512sum"


def test_bagit_accepts_an_unsigned_package(workshop, tmp_path):
    bag = bagit.Bag(str(workshop.package(tmp_path)))
    assert bag.validate() is True
    assert bag.version_info == (1, 0)
    assert bag.algorithms == ["sha512"]


def test_bagit_accepts_a_signed_package(approved_once):
    assert bagit.Bag(str(approved_once)).validate() is True


def test_bagit_counts_the_payload_as_stated(workshop, tmp_path):
    path = workshop.package(tmp_path)
    bag = bagit.Bag(str(path))
    files = [p for p in (path / "data").rglob("*") if p.is_file()]
    assert bag.info["Payload-Oxum"] == f"{sum(p.stat().st_size for p in files)}.{len(files)}"
    assert set(bag.payload_entries()) == {p.relative_to(path).as_posix() for p in files}


def test_bagit_refuses_what_we_refuse(workshop, tmp_path):
    path = workshop.package(tmp_path)
    (path / "data" / "inputs.json").write_bytes(b"{}")
    with pytest.raises(bagit.BagValidationError):
        bagit.Bag(str(path)).validate()


@pytest.mark.parametrize("manifest", ["tagmanifest-sha512.txt", "manifest-sha512.txt"])
def test_sha512sum_accepts_each_manifest(approved_once, manifest):
    done = subprocess.run(
        [SHA512SUM, "--strict", "-c", manifest],
        cwd=approved_once,
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stderr
    lines = done.stdout.splitlines()
    assert lines
    assert all(line.endswith(": OK") for line in lines)


def test_our_digests_are_those_of_sha512sum(approved_once):
    files = sorted(p for p in (approved_once / "data").rglob("*") if p.is_file())
    names = [p.relative_to(approved_once).as_posix() for p in files]
    done = subprocess.run(
        [SHA512SUM, *names], cwd=approved_once, capture_output=True, text=True, check=True
    )
    expected = "".join(sorted(done.stdout.splitlines(keepends=True), key=lambda s: s.split()[1]))
    assert (approved_once / "manifest-sha512.txt").read_text() == expected
