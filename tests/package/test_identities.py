"""Identities: made on first use, kept private, and refused with the reason."""

from __future__ import annotations

import os
import stat
import subprocess
import sys
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest
from cryptography import x509
from cryptography.hazmat.primitives import hashes, serialization
from cryptography.hazmat.primitives.asymmetric import ec, ed25519, rsa
from cryptography.hazmat.primitives.serialization import pkcs12
from cryptography.x509.oid import NameOID

from reportgen.errors import SignatureError
from reportgen.package.identity import (
    configuration_folder,
    load_pkcs11,
    load_pkcs12,
    passphrase_from_environment,
    passphrase_from_file,
    self_issued_identity,
)

SECRET = "open sesame äö"


def make_p12(path: Path, *, key=None, with_key=True, with_certificate=True, secret=SECRET) -> Path:
    key = key or ec.generate_private_key(ec.SECP256R1())
    name = x509.Name([x509.NameAttribute(NameOID.COMMON_NAME, "Ann Ash")])
    digest = None if isinstance(key, ed25519.Ed25519PrivateKey) else hashes.SHA256()
    certificate = (
        x509.CertificateBuilder()
        .subject_name(name)
        .issuer_name(name)
        .public_key(key.public_key())
        .serial_number(1)
        .not_valid_before(datetime(2026, 1, 1, tzinfo=UTC))
        .not_valid_after(datetime(2027, 1, 1, tzinfo=UTC))
        .sign(key, digest)
    )
    protection = (
        serialization.BestAvailableEncryption(secret.encode())
        if secret
        else serialization.NoEncryption()
    )
    path.write_bytes(
        pkcs12.serialize_key_and_certificates(
            b"ann",
            key if with_key else None,
            certificate if with_certificate else None,
            None,
            protection,
        )
    )
    return path


def test_an_identity_is_made_once_and_said(tmp_path):
    said = []
    one = self_issued_identity("Ann Ash", folder=tmp_path / "keys", announce=said.append)
    two = self_issued_identity("Ann  Ash ", folder=tmp_path / "keys", announce=said.append)
    assert one.fingerprint == two.fingerprint
    assert len(said) == 1
    assert one.fingerprint in said[0]
    assert "self-issued" in said[0]


def test_its_certificate_says_what_it_is(tmp_path):
    made = self_issued_identity("Ann Ash", folder=tmp_path, now=datetime(2026, 1, 1, tzinfo=UTC))
    organisation = made.certificate.subject.get_attributes_for_oid(NameOID.ORGANIZATION_NAME)
    assert "self-issued" in str(organisation[0].value)
    assert made.self_issued
    assert made.name == "Ann Ash"
    assert made.certificate.not_valid_after_utc.year >= 2035
    usage = made.certificate.extensions.get_extension_for_class(x509.KeyUsage).value
    assert usage.digital_signature
    assert usage.content_commitment
    assert not usage.key_cert_sign


def test_key_and_folder_are_for_the_user_alone(tmp_path):
    mask = os.umask(0)
    try:
        self_issued_identity("Ann Ash", folder=tmp_path / "a" / "keys")
    finally:
        os.umask(mask)
    folder = tmp_path / "a" / "keys"
    (file,) = folder.iterdir()
    assert stat.S_IMODE(folder.stat().st_mode) == 0o700
    assert stat.S_IMODE(file.stat().st_mode) == 0o600


@pytest.mark.parametrize("mode", [0o640, 0o604, 0o666])
def test_a_key_that_others_can_read_is_refused(tmp_path, mode):
    self_issued_identity("Ann Ash", folder=tmp_path)
    next(tmp_path.iterdir()).chmod(mode)
    with pytest.raises(SignatureError, match="chmod 600"):
        self_issued_identity("Ann Ash", folder=tmp_path)


def test_two_people_have_two_identities(tmp_path):
    names = ["Ann Ash", "ann ash 2", "Änn Ash", "山田"]
    made = {self_issued_identity(name, folder=tmp_path).fingerprint for name in names}
    assert len(made) == len(names)


def test_two_runs_at_once_make_one_identity(tmp_path):
    script = (
        "import sys; from pathlib import Path\n"
        "from reportgen.package.identity import self_issued_identity\n"
        "print('ready', flush=True); sys.stdin.readline()\n"
        "print(self_issued_identity('Ann Ash', folder=Path(sys.argv[1])).fingerprint)\n"
    )
    runs = [
        subprocess.Popen(
            [sys.executable, "-c", script, str(tmp_path)],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            text=True,
        )
        for _ in range(2)
    ]
    for run in runs:
        assert run.stdout is not None
        run.stdout.readline()
    for run in runs:
        assert run.stdin is not None
        run.stdin.write("go\n")
        run.stdin.flush()
    fingerprints = {run.communicate()[0] for run in runs}
    assert len(fingerprints) == 1
    assert len(list(tmp_path.iterdir())) == 1


@pytest.mark.parametrize(
    ("variables", "folder"),
    [
        ({"REPORTGEN_HOME": "/h", "XDG_CONFIG_HOME": "/x"}, "/h"),
        ({"XDG_CONFIG_HOME": "/x"}, "/x/reportgen"),
        ({}, "~/.config/reportgen"),
    ],
)
def test_the_configuration_folder_follows_the_environment(monkeypatch, variables, folder):
    for name in ("REPORTGEN_HOME", "XDG_CONFIG_HOME"):
        monkeypatch.delenv(name, raising=False)
    for name, value in variables.items():
        monkeypatch.setenv(name, value)
    assert configuration_folder() == Path(folder).expanduser()


def test_the_default_folder_is_in_the_configuration_folder(monkeypatch, tmp_path):
    monkeypatch.setenv("REPORTGEN_HOME", str(tmp_path / "home"))
    made = self_issued_identity("Ann Ash")
    assert Path(made.origin).parent == tmp_path / "home" / "identities"


def test_a_passphrase_comes_from_a_callable_a_file_or_the_environment(tmp_path, monkeypatch):
    path = make_p12(tmp_path / "ann.p12")
    (tmp_path / "secret").write_text(SECRET + "\nsecond line\n", encoding="utf-8")
    monkeypatch.setenv("ANN", SECRET)
    asked = [
        lambda: SECRET,
        lambda: SECRET.encode(),
        passphrase_from_file(tmp_path / "secret"),
        passphrase_from_environment("ANN"),
    ]
    assert {load_pkcs12(path, ask).name for ask in asked} == {"Ann Ash"}


def test_no_passphrase_is_asked_for_a_file_without_one(tmp_path):
    def refuse() -> str:
        raise AssertionError("asked")

    assert load_pkcs12(make_p12(tmp_path / "a.p12", secret=""), refuse).name == "Ann Ash"


def test_a_self_issued_identity_can_be_locked(tmp_path):
    self_issued_identity("Ann Ash", folder=tmp_path, passphrase=lambda: SECRET)
    with pytest.raises(SignatureError, match="passphrase that was not given"):
        self_issued_identity("Ann Ash", folder=tmp_path)
    with pytest.raises(SignatureError, match="passphrase is wrong"):
        self_issued_identity("Ann Ash", folder=tmp_path, passphrase=lambda: "other")
    assert self_issued_identity("Ann Ash", folder=tmp_path, passphrase=lambda: SECRET).self_issued


def p12_of_key(key):
    return lambda path: make_p12(path, key=key, secret="")


@pytest.mark.parametrize(
    ("make", "words"),
    [
        (Path.absolute, "cannot be read"),
        (lambda path: path.write_bytes(b"no key"), "not a PKCS#12"),
        (lambda path: path.write_bytes(bytes(2_000_000)), "too large"),
        (lambda path: make_p12(path, with_key=False, secret=""), "no private key"),
        (lambda path: make_p12(path, with_certificate=False, secret=""), "no certificate"),
        (p12_of_key(ed25519.Ed25519PrivateKey.generate()), "is not used for signing"),
        (p12_of_key(ec.generate_private_key(ec.SECP256K1())), "secp256k1"),
        (p12_of_key(rsa.generate_private_key(65537, 1024)), "RSA of 1024 bits"),
    ],
)
def test_an_identity_that_cannot_sign_is_refused_with_the_reason(tmp_path, make, words):
    path = tmp_path / "identity.p12"
    make(path)
    with pytest.raises(SignatureError, match=words):
        load_pkcs12(path)


@pytest.mark.parametrize("wrong", ["", "qx-guess-7", SECRET + " "])
def test_a_wrong_passphrase_is_one_clear_error_that_quotes_nothing(tmp_path, wrong, capfd):
    path = make_p12(tmp_path / "ann.p12")
    with pytest.raises(SignatureError, match="passphrase is wrong") as caught:
        load_pkcs12(path, lambda: wrong)
    assert caught.value.__cause__ is None
    assert not wrong or wrong not in str(caught.value)
    assert capfd.readouterr() == ("", "")


@pytest.mark.parametrize(
    ("ask", "words"),
    [
        (passphrase_from_file(Path("no-such-file")), "cannot be read"),
        (passphrase_from_environment("NO_SUCH_VARIABLE"), "NO_SUCH_VARIABLE"),
    ],
)
def test_a_passphrase_that_cannot_be_had_is_one_clear_error(tmp_path, ask, words):
    with pytest.raises(SignatureError, match=words):
        load_pkcs12(make_p12(tmp_path / "ann.p12"), ask)


def test_a_certificate_outside_its_time_is_refused(tmp_path):
    made = load_pkcs12(make_p12(tmp_path / "a.p12", secret=""))
    made.require_valid(datetime(2026, 6, 1, tzinfo=UTC))
    with pytest.raises(SignatureError, match="expired on 2027-01-01"):
        made.require_valid(datetime(2027, 1, 1, tzinfo=UTC) + timedelta(seconds=1))
    with pytest.raises(SignatureError, match="valid from 2026-01-01"):
        made.require_valid(datetime(2025, 12, 31, tzinfo=UTC))


@pytest.mark.parametrize("name", ["", "  ", "N" * 65])
def test_a_name_that_a_certificate_cannot_hold_is_refused(tmp_path, name):
    with pytest.raises(SignatureError, match="name"):
        self_issued_identity(name, folder=tmp_path)
    assert list(tmp_path.iterdir()) == []


def test_an_identity_shows_nothing_of_its_key(tmp_path):
    made = load_pkcs12(make_p12(tmp_path / "ann.p12"), lambda: SECRET)
    assert SECRET not in repr(made)
    assert repr(made) == f"<Identity 'Ann Ash' {made.fingerprint[:16]}…>"


def test_a_folder_that_cannot_be_made_is_one_clear_error(tmp_path):
    (tmp_path / "file").write_text("")
    with pytest.raises(SignatureError, match="cannot be stored"):
        self_issued_identity("Ann Ash", folder=tmp_path / "file" / "keys")


def test_a_token_that_is_not_there_is_one_clear_error_without_the_pin(tmp_path):
    with pytest.raises(SignatureError) as caught:
        load_pkcs11(tmp_path / "no.so", "card", certificate="Ann", pin=lambda: "123456")
    assert "123456" not in str(caught.value)
    assert "token" in str(caught.value)
