"""Drives that fill, that cannot lock, link or exchange names: the old package or the new one."""

from __future__ import annotations

import errno
import fcntl
import json
import os
import shutil
import stat
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest

from reportgen.archive.verify import verify_package
from reportgen.package import disk
from reportgen.package.identity import self_issued_identity
from reportgen.package.write import read_payload, write_package
from reportgen.package.zipped import zip_package

SMALL = """
import json, resource, sys
from pathlib import Path
from reportgen.archive.verify import verify_package
from reportgen.errors import DiskError
from reportgen.package.write import read_payload, write_package
from reportgen.package.zipped import zip_package

place, limit = Path(sys.argv[1]), int(sys.argv[2])
document = {"number": "CAL-0417", "revision": "B", "status": "draft"}
results = {"format": 1, "document": document, "results": [], "holds": []}

def write(status, filler, replace=False):
    document["status"] = status
    payload = {"results.json": json.dumps(results).encode(), "report.html": filler * 150_000}
    return write_package(place, "CAL-0417_B", payload, {}, replace_draft=replace)

package = write("draft", b"1")
first = read_payload(package)
if limit:  # the system stops larger files, where no small disk can be had
    resource.setrlimit(resource.RLIMIT_FSIZE, (limit, limit))
told = {}
for name, work in {
    "replace": lambda: write("for review", b"2", True), "zip": lambda: zip_package(package)
}.items():
    try:
        work()
        told[name] = "done"
    except DiskError as error:
        told[name] = str(error)
told["whole"] = verify_package(package).ok and read_payload(package) == first
told["there"] = sorted(path.name for path in place.iterdir())
print(json.dumps(told))
"""


def test_a_small_disk_that_fills_keeps_the_old_package(tmp_path: Path) -> None:
    """Holds one package and not two: on a disk of 256 KiB in memory where one can be mounted.

    An ordinary user can where the system lets users have name spaces of their own; elsewhere the
    system's limit on the size of files stands in for the disk.
    """
    place = tmp_path / "disk"
    place.mkdir()
    words = [sys.executable, "-c", SMALL, str(place)]
    mounted = ["unshare", "--user", "--map-root-user", "--mount", "sh", "-c",
               'mount -t tmpfs -o size=256k none "$1" || exit 77; shift; exec "$@"', "sh",
               str(place), *words, "0"]  # fmt: skip
    refused = 77
    done = None
    if shutil.which("unshare"):
        done = subprocess.run(mounted, capture_output=True, text=True, check=False)
    if done is None or done.returncode == refused or "unshare" in done.stderr:
        limited = [*words, "100000"]
        done = subprocess.run(limited, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    told = json.loads(done.stdout)
    assert "the disk is full" in told["replace"]
    assert "the disk is full" in told["zip"]
    assert told["whole"]
    assert told["there"] == ["CAL-0417_B"]


@pytest.fixture
def _plain_drive(monkeypatch: pytest.MonkeyPatch) -> None:
    """Refuse what some network drives refuse: locks, links, exchanged names, flushed folders."""

    def refused(*_: Any, **__: Any) -> None:
        raise OSError(errno.ENOTSUP, os.strerror(errno.ENOTSUP))

    flush = os.fsync

    def files_only(descriptor: int) -> None:
        if stat.S_ISDIR(os.fstat(descriptor).st_mode):
            raise OSError(errno.EINVAL, os.strerror(errno.EINVAL))
        flush(descriptor)

    for module, name in ((fcntl, "flock"), (fcntl, "lockf"), (os, "lockf"), (os, "link")):
        monkeypatch.setattr(module, name, refused)
    monkeypatch.setattr(os, "fsync", files_only)
    monkeypatch.setattr(disk, "_exchange", lambda *_: False)


@pytest.mark.usefixtures("_plain_drive")
def test_a_drive_without_locks_and_links_holds_whole_packages(
    workshop: Any, tmp_path: Path
) -> None:
    ann = self_issued_identity("Ann Ash", folder=tmp_path / "keys", now=workshop.signed_time)
    package = workshop.package(tmp_path / "out", status="draft")
    payload = workshop.payload()
    write_package(package.parent, package.name, payload, {}, replace_draft=True)
    assert read_payload(package) == payload
    workshop.sign(package, "prepared", "Ann Ash", identity=ann)
    zipped = zip_package(package)
    assert verify_package(package).ok
    assert verify_package(zipped).ok
    assert sorted(path.name for path in package.parent.iterdir()) == [package.name, zipped.name]
