"""What tests of more than one floor stand on."""

from __future__ import annotations

import fcntl
import json
import os
import re
import shutil
import subprocess
import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from datetime import UTC, datetime, timedelta
from functools import partial
from pathlib import Path
from typing import Any

import pytest

SIGNED = datetime(2026, 3, 2, 10, 0, tzinfo=UTC)
"""When the packages of these tests are signed."""

TYPST_SOURCE = """\
#set document(title: "Test report", author: "Nobody", date: datetime(
  year: 2026, month: 3, day: 2))
#set text(lang: "en")
= Test report
Rotor of an invented pump. A page that holds what PDF/A-3a and PDF/UA-1 ask for.
"""


def pytest_addoption(parser: pytest.Parser) -> None:
    """Add the option that notes outside checks; see ``tests/outside/conftest.py``."""
    parser.addoption("--catalogue", default="", help="file to note outside checks in")


@dataclass
class Workshop:
    """Makes throw-away identities and small packages, signed as far as asked."""

    folder: Path
    pdf: bytes
    identities: dict[str, Any] = field(default_factory=dict)
    signed_time: datetime = SIGNED

    def identity(self, name: str) -> Any:
        """Give the self-issued identity of a person, made once a session."""
        from reportgen.package.identity import self_issued_identity

        if name not in self.identities:
            self.identities[name] = self_issued_identity(
                name, folder=self.folder / "identities", now=SIGNED - timedelta(days=30)
            )
        return self.identities[name]

    def payload(self, **changes: Any) -> dict[str, bytes]:
        """Give a small payload; ``changes`` go into the document, ``results`` around it."""
        from reportgen.package.howto import how_to_check

        around = changes.pop("results", {})
        document = {
            "number": "CAL-0417",
            "title": "Lateral vibration of an invented pump rotor",
            "revision": "B",
            "status": "for review",
            "date": "2026-03-02",
            "prepared": {"name": "Ann Ash", "role": "engineer"},
            "checked": {"name": "Bo Birch", "role": "checker"},
            "approved": {"name": "Cy Cedar", "role": "lead"},
            **changes,
        }
        results = {
            "format": 1,
            "document": document,
            "results": [
                {"id": "critical", "value": 175.0, "second": {"agrees": True}},
                {"id": "sag", "value": 3.2e-4},
            ],
            "holds": [],
            **around,
        }
        number, revision = document["number"], document["revision"]
        return {
            "results.json": json.dumps(results, sort_keys=True).encode(),
            "inputs.json": json.dumps({"rotor": {"mass": {"si": 62.0, "unit": "kg"}}}).encode(),
            "report.pdf": self.pdf,
            "report.html": b"<!DOCTYPE html><title>Test report</title><p>Test</p>",
            "case.yaml": "number: CAL-0417 # mass 62 kg, ζ 0.02\n".encode(),
            "tables/stations.csv": b"station,diameter\n1,0.05\n",
            "HOW-TO-CHECK.txt": how_to_check(number, revision).encode(),
        }

    def package(self, out: Path, upto: str = "", **changes: Any) -> Path:
        """Write a package and sign it up to a role; every hold is accepted on the way."""
        from reportgen.package.names import package_name
        from reportgen.package.write import write_package

        payload = self.payload(**changes)
        document = json.loads(payload["results.json"])["document"]
        name = package_name(document["number"], document["revision"])
        info = {"External-Identifier": document["number"], "Bagging-Date": "2026-03-02"}
        path = write_package(out, name, payload, info)
        people = (("prepared", "Ann Ash"), ("checked", "Bo Birch"), ("approved", "Cy Cedar"))
        for hours, (role, person) in enumerate(people):
            if upto:
                self.sign(path, role, person, hours)
            if role == upto:
                break
        return path

    def sign(
        self, path: Path, role: str, person: str, hours: int = 0, identity: Any = None, **how: Any
    ) -> Path:
        """Sign a package as a person, hours after the usual time."""
        from reportgen.package.sign import sign_package

        if "accepted_holds" not in how:
            results = json.loads((path / "data" / "results.json").read_bytes())
            how["accepted_holds"] = [hold["id"] for hold in results["holds"]]
        how.setdefault("time", SIGNED + timedelta(hours=hours))
        identity = identity or self.identity(person)
        return sign_package(path, role, identity, f"{role} with care", person, **how)  # type: ignore[arg-type]


@pytest.fixture(scope="session")
def tiny_pdf() -> bytes:
    """Give a PDF of one page, PDF/A-3a and PDF/UA-1, as publishing makes them."""
    import typst

    pdf = typst.compile(TYPST_SOURCE.encode(), format="pdf", pdf_standards=["a-3a", "ua-1"])
    assert isinstance(pdf, bytes)
    return pdf


@pytest.fixture(scope="session")
def workshop(tmp_path_factory: pytest.TempPathFactory, tiny_pdf: bytes) -> Workshop:
    """Give the maker of throw-away identities and packages."""
    return Workshop(tmp_path_factory.mktemp("workshop"), tiny_pdf)


@pytest.fixture(scope="session")
def approved_once(workshop: Workshop, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Give a package with all three sign-offs; not to be changed, see ``approved``."""
    return workshop.package(tmp_path_factory.mktemp("approved"), "approved")


@pytest.fixture
def approved(approved_once: Path, tmp_path: Path) -> Path:
    """Give a copy, to do anything to, of a package with all three sign-offs."""
    return Path(shutil.copytree(approved_once, tmp_path / "copy" / approved_once.name))


@pytest.fixture
def judge() -> Callable[..., Any]:
    """Verify a package as a reader three days after signing would."""
    from reportgen.archive.verify import verify_package

    def verify(path: Path, trust: Any = None) -> Any:
        return verify_package(path, trust, now=SIGNED + timedelta(days=3))

    return verify


@dataclass(frozen=True)
class Demo:
    """A demo case as a user ran it: exit status, what was printed, the package left."""

    case: Path
    status: int
    out: str
    err: str
    package: Path

    def results(self) -> dict[str, Any]:
        """Give the package's ``results.json``."""
        found: dict[str, Any] = json.loads((self.package / "data" / "results.json").read_bytes())
        return found


DEMOS = tuple(sorted(path.stem for path in (Path(__file__).parents[1] / "cases").glob("*.yaml")))


@pytest.fixture(scope="session")
def made_once(tmp_path_factory: pytest.TempPathFactory) -> Callable[..., Any]:
    """Make something under a name once for all processes of a test run.

    Its maker gets a folder of its own and returns plain JSON, which is what everybody gets.
    """
    base = tmp_path_factory.getbasetemp()
    if os.environ.get("PYTEST_XDIST_WORKER"):
        base = base.parent
    shared = base / "once"
    shared.mkdir(exist_ok=True)

    def once(name: str, make: Callable[[Path], Any]) -> Any:
        record = shared / f"{name}.json"
        with one_at_a_time(shared / f"{name}.lock"):
            if not record.exists():
                folder = shared / name
                folder.mkdir(exist_ok=True)
                record.write_text(json.dumps(make(folder)))
        return json.loads(record.read_text())

    return once


@pytest.fixture(scope="session")
def run_demo(made_once: Callable[..., Any]) -> Callable[[str], Demo]:
    """Run a demo case by name as a user would; once for all processes of a test run."""

    def make(case: Path, folder: Path) -> list[Any]:
        place = folder / "reports"
        done = subprocess.run(
            [sys.executable, "-m", "reportgen.cli", "run", str(case), "-o", str(place)],
            env={**os.environ, "REPORTGEN_HOME": str(folder.parent / "identity")},
            capture_output=True,
            text=True,
            check=False,
        )
        packages = sorted(str(p) for p in place.iterdir() if p.is_dir()) if place.is_dir() else []
        return [str(case), done.returncode, done.stdout, done.stderr, packages]

    def run(name: str) -> Demo:
        case = Path(__file__).parents[1] / "cases" / f"{name}.yaml"
        found, status, out, err, packages = made_once(f"demo-{name}", partial(make, case))
        assert len(packages) == 1, f"{name}: status {status}, {err}"
        return Demo(Path(found), status, out, err, Path(packages[0]))

    return run


@contextmanager
def one_at_a_time(lock: Path) -> Iterator[None]:
    """Hold a lock file that other processes wait for."""
    with lock.open("w") as file:
        fcntl.flock(file, fcntl.LOCK_EX)
        yield


@pytest.fixture(scope="session")
def pdf_faults() -> Callable[[bytes], list[str]]:
    """Give what judges a PDF against PDF/A-3a and PDF/UA-1: every rule that it breaks."""
    return _pdf_faults


def _pdf_faults(pdf: bytes) -> list[str]:
    import page

    found = [
        f"{failure.rule_id}: {failure.message}"
        for profile in (page.ValidationProfile.PDF_A_3A, page.ValidationProfile.PDF_UA_1)
        for failure in page.validate_pdf_bytes(pdf, profile=profile).failures
    ]
    # The checker takes a carriage return that ends a stream's data for a part of the line end
    # after it (ISO 32000-1, 7.3.8.1 allows both readings), so this one rule is looked at here.
    length = "PDFA3A-STREAM-LENGTH"
    if any(fault.startswith(length) for fault in found) and _lengths_are_true(pdf):
        found = [fault for fault in found if not fault.startswith(length)]
    return found


def _lengths_are_true(pdf: bytes) -> bool:
    """Tell whether a line end and ``endstream`` stand right after each stream's stated length."""
    ends = []
    for stated in re.finditer(rb"/Length (\d+)[^<>]*>>\s*stream\r?\n", pdf):
        end = stated.end() + int(stated[1])
        ends.append(re.match(rb"\r?\nendstream", pdf[end : end + 11]) is not None)
    return len(ends) == len(re.findall(rb"\bendstream\b", pdf)) and all(ends)


@dataclass
class Authority:
    """A throw-away root that issues certificates, for signers and for a time stamper."""

    key: Any
    certificate: Any

    @classmethod
    def new(cls, name: str) -> Authority:
        from cryptography.hazmat.primitives.asymmetric import ec

        key = ec.generate_private_key(ec.SECP256R1())
        return cls(key, _certificate(name, key.public_key(), name, key, root=True))

    def issue(
        self,
        name: str,
        *,
        rsa: bool = False,
        first: datetime = SIGNED - timedelta(days=10),
        last: datetime = SIGNED + timedelta(days=365),
        **kind: Any,
    ) -> Any:
        """Give an identity with a certificate of this authority and its root beside it."""
        from cryptography.hazmat.primitives.asymmetric import ec
        from cryptography.hazmat.primitives.asymmetric import rsa as rsa_keys
        from cryptography.hazmat.primitives.serialization import NoEncryption, pkcs12
        from pyhanko.sign.signers import SimpleSigner

        from reportgen.package.identity import Identity, holder

        key: Any = (
            rsa_keys.generate_private_key(65537, 2048)
            if rsa
            else ec.generate_private_key(ec.SECP256R1())
        )
        made = _certificate(
            name, key.public_key(), holder(self.certificate), self.key, first, last, **kind
        )
        content = pkcs12.serialize_key_and_certificates(
            b"", key, made, [self.certificate], NoEncryption()
        )
        return Identity(SimpleSigner.load_pkcs12_data(content, []), made, "test")


def _certificate(
    name: str,
    public_key: Any,
    issuer: str,
    key: Any,
    first: datetime = SIGNED - timedelta(days=3650),
    last: datetime = SIGNED + timedelta(days=36500),
    *,
    root: bool = False,
    stamping: bool = False,
    signing: bool = True,
) -> Any:
    from cryptography import x509
    from cryptography.hazmat.primitives import hashes
    from cryptography.x509.oid import ExtendedKeyUsageOID, NameOID

    def named(text: str) -> x509.Name:
        return x509.Name([x509.NameAttribute(NameOID.COMMON_NAME, text)])

    off = dict.fromkeys(
        ("key_encipherment", "data_encipherment", "key_agreement", "encipher_only"), False
    )
    usage = x509.KeyUsage(
        digital_signature=signing and not root,
        content_commitment=signing and not root,
        key_cert_sign=root,
        crl_sign=root,
        decipher_only=False,
        **off,
    )
    builder = (
        x509.CertificateBuilder()
        .subject_name(named(name))
        .issuer_name(named(issuer))
        .public_key(public_key)
        .serial_number(x509.random_serial_number())
        .not_valid_before(first)
        .not_valid_after(last)
        .add_extension(x509.BasicConstraints(ca=root, path_length=None), critical=True)
        .add_extension(usage, critical=True)
        .add_extension(x509.SubjectKeyIdentifier.from_public_key(public_key), critical=False)
    )
    if stamping:
        purpose = x509.ExtendedKeyUsage([ExtendedKeyUsageOID.TIME_STAMPING])
        builder = builder.add_extension(purpose, critical=True)
    return builder.sign(key, hashes.SHA256())


@pytest.fixture(scope="session")
def authority() -> Authority:
    """Give a throw-away certificate authority."""
    return Authority.new("Test root")


@dataclass
class Stamper:
    """A local time-stamping authority under a root of its own."""

    root: Authority
    identity: Any

    @property
    def certificate(self) -> Any:
        """The root, to be given as a trust anchor."""
        return self.root.certificate

    def at(self, time: datetime) -> Any:
        """Give a time stamper whose clock stands at ``time``."""
        from pyhanko.sign.timestamps.dummy_client import DummyTimeStamper

        signer = self.identity.signer
        return DummyTimeStamper(signer.signing_cert, signer.signing_key, fixed_dt=time)


@pytest.fixture(scope="session")
def stamper() -> Stamper:
    """Give a local time stamper."""
    root = Authority.new("Test time-stamping root")
    return Stamper(root, root.issue("Test time stamper", rsa=True, stamping=True))
