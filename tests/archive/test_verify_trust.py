"""Whom a verification trusts, and how it tells what it does not know."""

from __future__ import annotations

import json
import os
import subprocess
import sys

import pytest

from reportgen.archive.verify import load_anchors, require_sound
from reportgen.errors import PackageError, SignatureError, VerificationError


def test_self_issued_identities_are_told_with_their_fingerprints(approved_once, judge, workshop):
    found = judge(approved_once)
    assert (found.kind, found.ok, found.exit_status) == ("self-issued", True, 0)
    for person in ("Ann Ash", "Bo Birch", "Cy Cedar"):
        assert f"{person} {workshop.identity(person).fingerprint}" in found.headline
    assert "rests on comparing" in found.headline
    assert [(s.role, s.name) for s in found.signers] == [
        ("prepared", "Ann Ash"),
        ("checked", "Bo Birch"),
        ("approved", "Cy Cedar"),
    ]
    certificates = [check for check in found.checks if check.kind == "certificate"]
    assert len(certificates) == 3
    assert all("self-issued, SHA-256 " in check.detail for check in certificates)


def test_a_draft_is_intact_and_unsigned(workshop, tmp_path, judge):
    found = judge(workshop.package(tmp_path, status="draft"))
    assert (found.kind, found.ok) == ("unsigned", True)
    assert found.headline == "CAL-0417_B: intact, unsigned"


def test_a_signers_own_certificate_can_be_an_anchor(approved_once, judge, workshop):
    people = [workshop.identity(p).certificate for p in ("Ann Ash", "Bo Birch", "Cy Cedar")]
    assert (judge(approved_once, people).kind, judge(approved_once, people).ok) == ("trusted", True)
    found = judge(approved_once, people[:2])
    assert (found.kind, found.ok, found.exit_status) == ("untrusted", False, 4)
    assert "Cy Cedar" in found.headline
    assert "Ann Ash" not in found.headline


def test_no_anchor_at_all_trusts_nobody(approved_once, judge):
    assert (judge(approved_once, []).kind, judge(approved_once, []).ok) == ("untrusted", False)


def test_a_certificate_of_the_same_name_by_another_authority_is_not_trusted(
    workshop, tmp_path, judge, authority
):
    other = type(authority).new("Test root")
    path = workshop.package(tmp_path)
    workshop.sign(path, "prepared", "Ann Ash", identity=other.issue("Ann Ash"))
    assert judge(path, [other.certificate]).kind == "trusted"
    assert judge(path, [authority.certificate]).kind == "untrusted"


def test_a_certificate_not_meant_for_signing_is_not_trusted(workshop, tmp_path, judge, authority):
    path = workshop.package(tmp_path)
    identity = authority.issue("Ann Ash", signing=False)
    workshop.sign(path, "prepared", "Ann Ash", identity=identity)
    assert judge(path, [authority.certificate]).kind != "trusted"
    assert not judge(path, [authority.certificate]).ok


def test_an_unsigned_package_is_not_under_any_anchor(workshop, tmp_path, judge, authority):
    found = judge(workshop.package(tmp_path, status="draft"), [authority.certificate])
    assert (found.kind, found.ok) == ("unsigned", False)


def test_a_certificate_that_ended_since_was_good_when_it_signed(workshop, tmp_path, authority):
    from datetime import timedelta

    from reportgen.archive.verify import verify_package

    path = workshop.package(tmp_path)
    workshop.sign(path, "prepared", "Ann Ash", identity=authority.issue("Ann Ash"))
    later = workshop.signed_time + timedelta(days=365 * 20)
    assert verify_package(path, [authority.certificate], now=later).kind == "trusted"


def test_anchors_are_read_from_a_file(tmp_path, workshop):
    from cryptography.hazmat.primitives.serialization import Encoding

    ann, bo = workshop.identity("Ann Ash"), workshop.identity("Bo Birch")
    (tmp_path / "two.pem").write_bytes(b"Ann and Bo\n" + ann.pem() + bo.pem())
    (tmp_path / "one.der").write_bytes(ann.certificate.public_bytes(Encoding.DER))
    assert load_anchors(tmp_path / "two.pem") == (ann.certificate, bo.certificate)
    assert load_anchors(tmp_path / "one.der") == (ann.certificate,)


@pytest.mark.parametrize("content", [None, b"", b"no", b"-----BEGIN CERTIFICATE-----\nAA\n"])
def test_a_file_without_anchors_is_one_clear_error(tmp_path, content):
    if content is not None:
        (tmp_path / "anchors.pem").write_bytes(content)
    with pytest.raises(SignatureError, match=r"anchors|certificate"):
        load_anchors(tmp_path / "anchors.pem")


def test_there_must_be_something_to_verify(tmp_path, judge):
    with pytest.raises(PackageError, match="no package here"):
        judge(tmp_path / "none")


def test_names_that_could_steer_a_terminal_are_told_as_escapes(approved, judge):
    for name in (b"\x1b[2Jgone", "\u202etxt.exe".encode(), b"\xff\xfe", b"a\nOK: intact"):
        (approved / "data" / os.fsdecode(name)).write_bytes(b"")
    found = judge(approved)
    subjects = {fault.subject for fault in found.faults}
    assert "data/\\x1b[2Jgone" in subjects
    assert "data/\\u202etxt.exe" in subjects
    assert "data/\\udcff\\udcfe" in subjects
    assert "data/a\\nOK: intact" in subjects
    assert found.headline.isprintable()
    json.dumps(found.to_json(), ensure_ascii=False).encode()


def test_what_is_larger_or_deeper_than_any_package_is_not_read(tmp_path, judge, monkeypatch):
    from reportgen.package import contents

    deep = tmp_path / "deep"
    deep.joinpath(*"abcdefghijklmnopqrst").mkdir(parents=True)
    with pytest.raises(PackageError, match="nested deeper"):
        judge(deep)
    monkeypatch.setattr(contents, "LARGEST_PACKAGE", 100)
    for name, sizes in (("one", [101]), ("sum", [60, 60])):
        for number, size in enumerate(sizes):
            (tmp_path / name).mkdir(exist_ok=True)
            (tmp_path / name / f"{number}").write_bytes(bytes(size))
        with pytest.raises(PackageError, match=r"larger than any package|no package"):
            judge(tmp_path / name)


def test_the_verdict_can_be_read_by_a_machine(approved_once, judge):
    given = json.loads(json.dumps(judge(approved_once).to_json()))
    assert given["ok"] is True
    assert given["kind"] == "self-issued"
    assert given["signers"][1]["time"] == "2026-03-02T11:00:00Z"
    assert {"kind", "subject", "ok", "detail"} == set(given["checks"][0])


def test_a_package_to_be_signed_may_be_unsigned_but_not_forged(workshop, tmp_path):
    path = workshop.package(tmp_path)
    assert require_sound(path).kind == "unsigned"
    folder = workshop.sign(path, "prepared", "Ann Ash")
    assert require_sound(path).ok
    statement = folder / "statement.json"
    statement.write_bytes(statement.read_bytes().replace(b"with care", b"carelessly"))
    with pytest.raises(VerificationError, match="is not the statement that was signed") as caught:
        require_sound(path)
    assert caught.value.exit_status == 4


WATCH = """
import sys
from pathlib import Path
import reportgen.archive.verify as verify
package = Path(sys.argv[1])
verify.verify_package(package)  # imports at first use are not what is watched
seen = []
def watch(event, arguments):
    if event == "open":
        path, mode, flags = arguments
        if any(c in (mode or "") for c in "wax+") or flags & 3:
            seen.append(f"{event} {arguments}")
    elif event in ("exec", "compile", "import", "socket.connect", "socket.getaddrinfo"):
        seen.append(f"{event} {arguments}")
    elif event.startswith(("subprocess.", "os.exec", "os.system", "os.fork", "os.posix_spawn",
                           "os.mkdir", "os.rename", "os.remove", "os.rmdir", "os.chmod")):
        seen.append(f"{event} {arguments}")
sys.addaudithook(watch)
found = verify.verify_package(package)
print(found.kind, seen)
"""


@pytest.mark.parametrize("harmed", [False, True])
def test_verifying_writes_fetches_and_executes_nothing(approved, harmed):
    # A notebook, a script and a module that would tell if they were run or imported.
    if harmed:
        (approved / "data" / "report.html").write_text("changed")
    for name in ("sitecustomize.py", "reportgen.py", "pyhanko.py"):
        (approved / "data" / name).write_text("raise SystemExit('executed')")
    done = subprocess.run(
        [sys.executable, "-c", WATCH, str(approved)],
        cwd=approved.parent,
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stderr
    assert done.stdout.strip() == "damaged []"
    assert done.stderr == ""


def test_verifying_needs_no_right_to_write(approved, judge):
    for path in [approved, *approved.rglob("*")]:
        path.chmod(0o555 if path.is_dir() else 0o444)
    before = {path: path.stat().st_mtime_ns for path in approved.rglob("*")}
    assert judge(approved).ok
    assert {path: path.stat().st_mtime_ns for path in approved.rglob("*")} == before
    for path in [approved, *approved.rglob("*")]:
        path.chmod(0o755)
