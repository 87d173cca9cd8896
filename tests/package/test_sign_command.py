"""Signing, verifying and packing from the command line, as those who sign off would."""

from __future__ import annotations

import json
import os
import shutil
import subprocess
import sys
from collections.abc import Callable, Iterator
from datetime import UTC, datetime, timedelta
from http.server import BaseHTTPRequestHandler, ThreadingHTTPServer
from pathlib import Path
from threading import Thread
from typing import Any

import pytest

Call = Callable[..., subprocess.CompletedProcess[str]]


@pytest.fixture
def reportgen(tmp_path: Path) -> Call:
    """Call the program with a home of its own."""

    def call(*words: object, **environment: str) -> subprocess.CompletedProcess[str]:
        return subprocess.run(
            [sys.executable, "-m", "reportgen.cli", *map(str, words)],
            env={**os.environ, "REPORTGEN_HOME": str(tmp_path / "home"), **environment},
            stdin=subprocess.DEVNULL,
            capture_output=True,
            text=True,
            check=False,
        )

    return call


def test_a_calculation_goes_through_all_hands(
    run_demo: Any, reportgen: Call, tmp_path: Path
) -> None:
    package = Path(shutil.copytree(run_demo("circulating-pump").package, tmp_path / "CAL-0417_B"))
    results = json.loads((package / "data" / "results.json").read_bytes())
    document, holds = results["document"], [hold["id"] for hold in results["holds"]]
    assert holds
    preparer, checker = document["prepared"]["name"], document["checked"]["name"]

    refused = reportgen("sign", package, "--role", "checked", "--name", preparer)
    assert refused.returncode == 2
    assert f"the report names {checker} under checked" in refused.stderr

    done = reportgen("sign", package, "--role", "checked", "--name", checker)
    assert done.returncode == 0, done.stderr
    assert "made a self-issued identity" in done.stderr

    approve = ("sign", package, "--role", "approved", "--name", "C. Lead")
    refused = reportgen(*approve)
    assert refused.returncode == 2
    assert f"open holds are not accepted: {', '.join(holds)}" in refused.stderr
    accepted = [word for hold in holds for word in ("--accept-hold", hold)]
    assert reportgen(*approve, *accepted).returncode == 0

    zipped = [reportgen("zip", package, "-o", tmp_path / f"{n}.zip") for n in "ab"]
    assert [done.returncode for done in zipped] == [0, 0]
    assert (tmp_path / "a.zip").read_bytes() == (tmp_path / "b.zip").read_bytes()
    for place in (package, tmp_path / "a.zip"):
        found = json.loads(reportgen("verify", place, "--json").stdout)
        assert found["kind"] == "self-issued"
        assert [one["role"] for one in found["signers"]] == ["prepared", "checked", "approved"]
        assert sorted(found["signers"][2]["accepted_holds"]) == sorted(holds)
    statement = json.loads((package / "signatures/checked/statement.json").read_bytes())
    agreed = [one["id"] for one in results["results"] if one.get("second")]
    assert statement["second computations"] == {"agreed": agreed, "not agreed": []}


def test_nobody_signs_on_top_of_a_forged_sign_off(
    workshop: Any, reportgen: Call, tmp_path: Path
) -> None:
    package = workshop.package(tmp_path, "prepared")
    forged = package / "signatures" / "prepared" / "statement.json"
    forged.write_bytes(forged.read_bytes().replace(b"with care", b"with CARE"))
    done = reportgen("sign", package, "--role", "checked", "--name", "Bo Birch")
    assert done.returncode == 4
    assert "signatures/prepared" in done.stderr
    assert not (package / "signatures" / "checked").exists()


@pytest.mark.parametrize(
    ("words", "status", "told"),
    [
        (["--pkcs11", "none.so"], 2, "--token and --key"),
        (["--pkcs11", "none.so", "--token", "a", "--key", "b"], 1, "python-pkcs11"),
        (["--timestamp", "http://127.0.0.1:9/"], 1, "time"),
        (["--timestamp", "ftp://127.0.0.1/"], 2, "http"),
        (["--identity", "none.p12"], 2, "cannot be read"),
    ],
)
def test_what_cannot_sign_says_so_and_leaves_the_package_as_it_was(
    workshop: Any, reportgen: Call, tmp_path: Path, words: list[str], status: int, told: str
) -> None:
    package = workshop.package(tmp_path)
    before = sorted(path.name for path in package.rglob("*"))
    sign = ("sign", package, "--role", "prepared", "--name", "Ann Ash")
    done = reportgen(*sign, *words, REPORTGEN_PASSPHRASE="x")
    assert done.returncode == status, done.stderr
    assert told in done.stderr
    assert sorted(path.name for path in package.rglob("*")) == before


@pytest.fixture
def authority_of_time(stamper: Any) -> Iterator[str]:
    """Give the address of a time-stamping authority on this machine."""
    from asn1crypto import tsp
    from pyhanko.sign.timestamps.dummy_client import DummyTimeStamper

    now = datetime.now(UTC)
    own = stamper.root.issue(
        "Test time stamper", rsa=True, stamping=True,
        first=now - timedelta(days=1), last=now + timedelta(days=1),
    ).signer  # fmt: skip
    stamps = DummyTimeStamper(own.signing_cert, own.signing_key)

    class Answer(BaseHTTPRequestHandler):
        def do_POST(self) -> None:
            asked = tsp.TimeStampReq.load(self.rfile.read(int(self.headers["Content-Length"])))
            content = stamps.request_tsa_response(asked).dump()
            self.send_response(200)
            self.send_header("Content-Type", "application/timestamp-reply")
            self.send_header("Content-Length", str(len(content)))
            self.end_headers()
            self.wfile.write(content)

        def log_message(self, *_: Any) -> None:
            """Print nothing."""

    with ThreadingHTTPServer(("127.0.0.1", 0), Answer) as server:
        Thread(target=server.serve_forever).start()
        yield f"http://127.0.0.1:{server.server_port}/"
        server.shutdown()


def test_the_time_is_stamped_where_an_authority_is_named(
    workshop: Any, reportgen: Call, tmp_path: Path, stamper: Any, authority_of_time: str
) -> None:
    from cryptography.hazmat.primitives.serialization import Encoding

    package = workshop.package(tmp_path)
    sign = ("sign", package, "--role", "prepared", "--name", "Ann Ash")
    done = reportgen(*sign, "--timestamp", authority_of_time)
    assert done.returncode == 0, done.stderr
    (tmp_path / "time.pem").write_bytes(stamper.certificate.public_bytes(Encoding.PEM))
    own = reportgen("identity", "--name", "Ann Ash", "--pem")
    (tmp_path / "ann.pem").write_text(own.stdout)
    trust = ("--trust", tmp_path / "ann.pem", "--trust", tmp_path / "time.pem")
    found = json.loads(reportgen("verify", package, "--json", *trust).stdout)
    assert found["kind"] == "trusted"
    assert found["signers"][0]["time_stamped"]
    untrusted = reportgen("verify", package, *trust[2:])
    assert untrusted.returncode == 4
    assert "not signed under the trust anchors" in untrusted.stdout
