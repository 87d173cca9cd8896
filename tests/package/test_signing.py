"""What signing leaves: one folder more, nothing else touched; time stamps; notebooks."""

from __future__ import annotations

import asyncio
import json
import shutil
import subprocess
import sys
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest

from reportgen.errors import PackageError, SignatureError
from reportgen.package.contents import read_folder
from reportgen.package.sign import earlier_sign_offs, latest_pdf


def snapshot(path: Path) -> dict[str, bytes]:
    return {p.relative_to(path).as_posix(): p.read_bytes() for p in path.rglob("*") if p.is_file()}


def test_a_sign_off_adds_one_folder_and_touches_nothing(workshop, tmp_path):
    path = workshop.package(tmp_path, "prepared")
    before = snapshot(path)
    folder = workshop.sign(path, "checked", "Bo Birch", 1)
    after = snapshot(path)
    assert folder == path / "signatures" / "checked"
    assert {name: after[name] for name in before} == before
    assert sorted(after.keys() - before.keys()) == [
        "signatures/checked/report.pdf",
        "signatures/checked/statement.json",
        "signatures/checked/tagmanifest-sha512.txt.p7s",
    ]
    assert [p.name for p in tmp_path.iterdir()] == [path.name]


def test_each_signed_pdf_begins_with_the_one_before(approved_once):
    files = snapshot(approved_once)
    published = files["data/report.pdf"]
    first, second, third = (
        files[f"signatures/{role}/report.pdf"] for role in ("prepared", "checked", "approved")
    )
    assert not published.endswith(b"\n")
    assert first.startswith(published + b"\n")
    assert second.startswith(first)
    assert third.startswith(second)


def test_a_package_without_a_pdf_is_signed_too(workshop, tmp_path, judge):
    from reportgen.package.write import write_package

    payload = workshop.payload()
    del payload["report.pdf"]
    path = write_package(tmp_path, "CAL-0417_B", payload, {})
    workshop.sign(path, "prepared", "Ann Ash")
    assert not (path / "signatures/prepared/report.pdf").exists()
    assert judge(path).ok


def test_the_statement_holds_what_the_signer_answers_for(approved_once):
    stated = json.loads((approved_once / "signatures/approved/statement.json").read_bytes())
    assert stated["role"] == "approved"
    assert stated["name"] == "Cy Cedar"
    assert stated["statement"] == "approved with care"
    assert stated["time"] == "2026-03-02T12:00:00Z"
    assert stated["document"] == {"number": "CAL-0417", "revision": "B"}
    assert stated["certificate is self-issued"] is True
    assert stated["second computations"] == {"agreed": ["critical"], "not agreed": []}
    assert sorted(stated["earlier signatures sha512"]) == ["checked", "prepared"]


def test_the_sign_offs_and_the_latest_pdf_can_be_read(approved_once):
    contents = read_folder(approved_once)
    assert list(earlier_sign_offs(contents)) == ["prepared", "checked", "approved"]
    assert latest_pdf(contents) == contents.files["signatures/approved/report.pdf"]


def test_signing_works_inside_a_running_event_loop(workshop, tmp_path, judge):
    path = workshop.package(tmp_path)

    async def notebook() -> None:
        workshop.sign(path, "prepared", "Ann Ash")
        assert judge(path).ok

    asyncio.run(notebook())


def test_an_issued_certificate_with_its_chain_signs(workshop, tmp_path, judge, authority):
    path = workshop.package(tmp_path)
    identity = authority.issue("Ann Ash")
    workshop.sign(path, "prepared", "Ann Ash", identity=identity)
    found = judge(path, [authority.certificate])
    assert (found.kind, found.ok) == ("trusted", True)
    assert judge(path).kind == "not anchored"


def test_an_rsa_identity_signs(workshop, tmp_path, judge, authority):
    path = workshop.package(tmp_path)
    workshop.sign(path, "prepared", "Ann Ash", identity=authority.issue("Ann Ash", rsa=True))
    assert judge(path, [authority.certificate]).ok


def test_a_time_stamp_is_taken_and_told(workshop, tmp_path, judge, stamper):
    path = workshop.package(tmp_path)
    workshop.sign(path, "prepared", "Ann Ash", timestamper=stamper.at(workshop.signed_time))
    unanchored = judge(path)
    assert unanchored.ok
    assert not unanchored.signers[0].time_stamped
    assert any(check.kind == "time stamp" for check in unanchored.checks)
    anchors = [stamper.certificate, workshop.identity("Ann Ash").certificate]
    anchored = judge(path, anchors)
    assert anchored.kind == "trusted"
    assert anchored.signers[0].time_stamped


def test_the_time_stamp_counts_where_its_authority_is_anchored(
    workshop, tmp_path, judge, stamper, authority
):
    # A signer who dates the sign-off back into the certificate's time is found out.
    first, last = workshop.signed_time - timedelta(days=9), workshop.signed_time - timedelta(days=1)
    identity = authority.issue("Ann Ash", first=first, last=last)
    path = workshop.package(tmp_path)
    workshop.sign(
        path,
        "prepared",
        "Ann Ash",
        identity=identity,
        time=last - timedelta(hours=1),
        timestamper=stamper.at(workshop.signed_time),
    )
    assert judge(path, [authority.certificate]).ok
    found = judge(path, [authority.certificate, stamper.certificate])
    assert not found.ok
    assert any("not when it was used (2026-03-02)" in fault.detail for fault in found.faults)


def test_openssl_still_accepts_a_time_stamped_signature(workshop, tmp_path, stamper):
    path = workshop.package(tmp_path)
    workshop.sign(path, "prepared", "Ann Ash", timestamper=stamper.at(workshop.signed_time))
    (tmp_path / "ann.pem").write_bytes(workshop.identity("Ann Ash").pem())
    openssl = shutil.which("openssl") or "openssl"
    done = subprocess.run(
        [
            *(openssl, "cms", "-verify", "-binary", "-inform", "DER"),
            *("-in", "signatures/prepared/tagmanifest-sha512.txt.p7s"),
            *("-content", "tagmanifest-sha512.txt", "-CAfile", str(tmp_path / "ann.pem")),
            *("-purpose", "any", "-attime", "1772445600", "-out", "/dev/null"),
        ],
        cwd=path,
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stderr


def test_a_time_stamp_that_is_not_given_leaves_the_package_unsigned(workshop, tmp_path):
    from pyhanko.sign.timestamps import TimestampRequestError
    from pyhanko.sign.timestamps.api import TimeStamper

    class Refusing(TimeStamper):
        async def async_request_tsa_response(self, _):
            raise TimestampRequestError("the authority is closed")

    path = workshop.package(tmp_path)
    with pytest.raises(SignatureError, match="the authority is closed"):
        workshop.sign(path, "prepared", "Ann Ash", timestamper=Refusing())
    assert not (path / "signatures").exists()


def test_a_time_stamper_that_is_not_there_is_one_clear_error(workshop, tmp_path):
    from reportgen.package.stamps import http_timestamper

    path = workshop.package(tmp_path)
    with pytest.raises(SignatureError, match="no time stamp"):
        # Port 9 of this machine: nothing listens there.
        workshop.sign(
            path, "prepared", "Ann Ash", timestamper=http_timestamper("http://127.0.0.1:9/")
        )
    assert not (path / "signatures").exists()


@pytest.mark.parametrize("url", ["", "ftp://x", "http//x", "file:///etc/passwd"])
def test_an_address_that_is_none_is_refused(url):
    from reportgen.package.stamps import http_timestamper

    with pytest.raises(SignatureError, match="http"):
        http_timestamper(url)


def test_a_signing_time_far_ahead_is_written_as_the_standard_asks(workshop, tmp_path, authority):
    # RFC 5652 section 11.3: from 2050 on, GeneralizedTime.
    time = datetime(2051, 6, 1, tzinfo=UTC)
    identity = authority.issue("Ann Ash", first=time - timedelta(days=1), last=time + timedelta(9))
    path = workshop.package(tmp_path)
    workshop.sign(path, "prepared", "Ann Ash", identity=identity, time=time)
    from reportgen.archive.verify import verify_package

    assert verify_package(path, now=time).ok


LIMITED = """
import resource, sys
from datetime import UTC, datetime
from pathlib import Path
from reportgen.errors import PackageError
from reportgen.package.identity import self_issued_identity
from reportgen.package.sign import sign_package
path, keys, limit = Path(sys.argv[1]), Path(sys.argv[2]), int(sys.argv[3])
ann = self_issued_identity("Ann Ash", folder=keys)
resource.setrlimit(resource.RLIMIT_FSIZE, (limit, limit))
try:
    sign_package(path, "prepared", ann, "done", "Ann Ash", time=datetime(2026, 3, 2, tzinfo=UTC))
except PackageError as error:
    print(error)
"""


@pytest.mark.parametrize("limit", [0, 1_000, 10_000])
def test_a_disk_that_fills_while_signing_leaves_the_package_as_it_was(workshop, tmp_path, limit):
    path = workshop.package(tmp_path)
    workshop.identity("Ann Ash")
    before = snapshot(path)
    keys = workshop.folder / "identities"
    done = subprocess.run(
        [sys.executable, "-c", LIMITED, str(path), str(keys), str(limit)],
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stderr
    assert "the disk is full" in done.stdout
    assert snapshot(path) == before
    assert [p.name for p in tmp_path.iterdir()] == [path.name]


def test_there_must_be_a_package(tmp_path, workshop):
    with pytest.raises(PackageError, match="no package here"):
        workshop.sign(tmp_path / "none", "prepared", "Ann Ash", accepted_holds=())


def test_keys_and_passphrases_are_nowhere_in_a_package(approved_once, workshop):
    from cryptography.hazmat.primitives.serialization import (
        Encoding,
        NoEncryption,
        PrivateFormat,
        load_der_private_key,
    )

    everything = b"".join(snapshot(approved_once).values())
    for person in ("Ann Ash", "Bo Birch", "Cy Cedar"):
        key = load_der_private_key(workshop.identity(person).signer.signing_key.dump(), None)
        number = key.private_numbers().private_value.to_bytes(32, "big")
        pem = key.private_bytes(Encoding.PEM, PrivateFormat.PKCS8, NoEncryption())
        for secret in (number, number.hex().encode(), pem.splitlines()[1]):
            assert secret not in everything
    assert b"PRIVATE KEY" not in everything
