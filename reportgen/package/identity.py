"""Who signs: X.509 identities from PKCS#12 files, tokens, or made on first use.

A self-issued identity proves that two signatures were made with one key. It does not prove
who holds the key: a reader must compare the fingerprint with one that the signer gave by
another way. Its certificate says so in its own subject.
"""

from __future__ import annotations

import hashlib
import os
import re
import stat
import sys
import unicodedata
from collections.abc import Callable
from contextlib import suppress
from dataclasses import dataclass
from datetime import UTC, datetime, timedelta
from pathlib import Path
from typing import TYPE_CHECKING

from cryptography import x509
from cryptography.exceptions import InvalidSignature
from cryptography.hazmat.primitives import hashes, serialization
from cryptography.hazmat.primitives.asymmetric import ec, rsa
from cryptography.hazmat.primitives.serialization import pkcs12
from cryptography.x509.oid import NameOID

from reportgen.errors import PackageError, SignatureError, SignatureNotMadeError
from reportgen.package.disk import flush_folder, write_files

if TYPE_CHECKING:
    from pyhanko.sign.signers import Signer

Passphrase = Callable[[], str | bytes | None]
"""Asked for the passphrase only when a key file needs one."""

SELF_ISSUED = "self-issued (identity not verified by anybody else)"
"""The organisation in the subject of a self-issued certificate."""

YEARS_VALID = 10
_SMALLEST_RSA = 2048
_LARGEST_FILE = 1_000_000


@dataclass(frozen=True)
class Identity:
    """A key that signs, and the certificate that names its holder.

    Parameters
    ----------
    signer
        pyHanko's signer; holds or reaches the private key.
    certificate
        The certificate that goes into signatures.
    origin
        Where it was taken from, for messages; never the key itself.
    """

    signer: Signer
    certificate: x509.Certificate
    origin: str

    def __repr__(self) -> str:
        """Show the holder and fingerprint, nothing of the key."""
        return f"<Identity {self.name!r} {self.fingerprint[:16]}…>"

    @property
    def name(self) -> str:
        """The holder's name, the subject's common name."""
        return holder(self.certificate)

    @property
    def fingerprint(self) -> str:
        """SHA-256 of the certificate, upper-case hexadecimal in pairs."""
        return fingerprint(self.certificate)

    @property
    def fingerprints(self) -> tuple[str, ...]:
        """Fingerprints of the certificates that go into signatures, the holder's first."""
        chain = {colons(other.sha256) for other in self.signer.cert_registry}
        return (self.fingerprint, *sorted(chain - {self.fingerprint}))

    @property
    def self_issued(self) -> bool:
        """Whether the certificate was issued by its own key."""
        return is_self_issued(self.certificate)

    def require_valid(self, time: datetime) -> None:
        """Raise :class:`SignatureError` if the certificate does not cover ``time``."""
        first, last = self.certificate.not_valid_before_utc, self.certificate.not_valid_after_utc
        if time > last:
            raise SignatureError(
                f"the certificate of {self.name} ({self.origin}) expired on {last:%Y-%m-%d}; "
                "use another identity, or move the file away to have a new one made"
            )
        if time < first:
            raise SignatureError(
                f"the certificate of {self.name} ({self.origin}) is valid from "
                f"{first:%Y-%m-%d %H:%M} UTC on; check this machine's clock"
            )

    def pem(self) -> bytes:
        """Give the certificate as PEM, to hand to those who will check signatures."""
        return self.certificate.public_bytes(serialization.Encoding.PEM)


def fingerprint(certificate: x509.Certificate) -> str:
    """Give the SHA-256 fingerprint as ``openssl x509 -fingerprint -sha256`` prints it."""
    return colons(certificate.fingerprint(hashes.SHA256()))


def colons(digest: bytes) -> str:
    """Write a digest as upper-case hexadecimal pairs with colons between them."""
    return digest.hex(":").upper()


def holder(certificate: x509.Certificate) -> str:
    """Give the subject's common name, or the whole subject where it has none."""
    names = certificate.subject.get_attributes_for_oid(NameOID.COMMON_NAME)
    return str(names[0].value) if names else certificate.subject.rfc4514_string()


def is_self_issued(certificate: x509.Certificate) -> bool:
    """Whether a certificate's own key issued it."""
    if certificate.issuer != certificate.subject:
        return False
    try:
        certificate.verify_directly_issued_by(certificate)
    except (InvalidSignature, ValueError, TypeError):
        return False
    return True


def configuration_folder() -> Path:
    """Give the folder for a user's settings and keys.

    ``REPORTGEN_HOME`` if set, else ``reportgen`` under ``XDG_CONFIG_HOME``, ``APPDATA``
    (Windows) or ``~/.config``.
    """
    if home := os.environ.get("REPORTGEN_HOME"):
        return Path(home)
    if base := os.environ.get("XDG_CONFIG_HOME"):
        return Path(base) / "reportgen"
    if sys.platform == "win32" and (base := os.environ.get("APPDATA")):
        return Path(base) / "reportgen"
    return Path.home() / ".config" / "reportgen"


def self_issued_identity(
    name: str,
    *,
    folder: Path | None = None,
    passphrase: Passphrase | None = None,
    announce: Callable[[str], object] | None = None,
    now: datetime | None = None,
) -> Identity:
    """Give the self-issued identity of a person on this machine, making it on first use.

    Parameters
    ----------
    name
        The signer's name; becomes the certificate's common name.
    folder
        Where identities are kept; ``identities`` in :func:`configuration_folder` by default.
    passphrase
        Protects the key file; without one its file mode (0600) alone does.
    announce
        Told in one line when an identity is made.
    now
        Time of making, for tests.

    Raises
    ------
    SignatureError
        The name is empty, the folder cannot be written, or the key file is readable by
        others, damaged, or locked by another passphrase.
    """
    name = unicodedata.normalize("NFC", " ".join(name.split()))
    if not name:
        raise SignatureError("a self-issued identity needs the signer's name")
    if len(name) > 64:  # upper bound of a common name, RFC 5280 appendix A.1
        raise SignatureError(f"the signer's name has {len(name)} characters; at most 64 are signed")
    folder = folder or configuration_folder() / "identities"
    path = folder / _file_name(name)
    if not path.exists():
        content = _new_identity(name, passphrase, now or datetime.now(UTC))
        if _store(path, content) and announce is not None:
            made = _read_pkcs12(content, path, passphrase)
            announce(
                f"made a self-issued identity for {name}: {path}, "
                f"SHA-256 fingerprint {made.fingerprint}"
            )
    _require_private(path)
    return load_pkcs12(path, passphrase)


def load_pkcs12(path: Path, passphrase: Passphrase | None = None) -> Identity:
    """Read an identity from a PKCS#12 file (``.p12``, ``.pfx``).

    Parameters
    ----------
    path
        The file.
    passphrase
        Asked when the file does not open without one; see :func:`passphrase_from_file` and
        :func:`passphrase_from_environment`.

    Raises
    ------
    SignatureError
        The file is missing or no PKCS#12, the passphrase is wrong, there is no private key
        or no certificate in it, or the key is of a kind that is not signed with here.
    """
    try:
        if path.stat().st_size > _LARGEST_FILE:
            raise SignatureError(f"{path}: too large for a PKCS#12 identity")
        content = path.read_bytes()
    except OSError as error:
        raise SignatureError(f"{path}: the identity cannot be read: {error.strerror}") from error
    return _read_pkcs12(content, path, passphrase)


def passphrase_from_file(path: Path) -> Passphrase:
    """Give a passphrase that is the first line of a file, read only when asked for."""

    def ask() -> bytes:
        try:
            content = path.read_bytes()[:4096]
        except OSError as error:
            raise SignatureError(
                f"{path}: the passphrase file cannot be read: {error.strerror}"
            ) from error
        return content.split(b"\n")[0].rstrip(b"\r")

    return ask


def passphrase_from_environment(variable: str) -> Passphrase:
    """Give a passphrase that an environment variable holds, read only when asked for."""

    def ask() -> str:
        try:
            return os.environ[variable]
        except KeyError:
            raise SignatureError(
                f"the environment variable {variable} is to hold the passphrase but is not set"
            ) from None

    return ask


def load_pkcs11(
    library: Path, token: str, *, certificate: str, key: str | None = None, pin: Passphrase
) -> Identity:
    """Reach an identity on a PKCS#11 token (smart card, hardware module).

    Parameters
    ----------
    library
        The token's PKCS#11 library.
    token
        Label of the token.
    certificate, key
        Labels of the certificate and of the private key; the key's is the certificate's
        unless stated.
    pin
        Asked for the user's PIN.

    Raises
    ------
    SignatureError
        The optional package ``python-pkcs11`` is missing, or the token, PIN or label is not
        accepted.
    """
    try:
        from pyhanko.config.pkcs11 import TokenCriteria
        from pyhanko.sign import pkcs11 as token_api  # needs an optional package
    except ImportError as error:
        raise SignatureNotMadeError(
            "signing with a token needs the package python-pkcs11: pip install 'pyHanko[pkcs11]'"
        ) from error
    secret = pin()
    text = secret.decode() if isinstance(secret, bytes) else secret
    session = None
    try:
        criteria = TokenCriteria(label=token)
        session = token_api.open_pkcs11_session(
            str(library), token_criteria=criteria, user_pin=text
        )
        signer = token_api.PKCS11Signer(
            session,
            cert_label=certificate,
            key_label=key or certificate,
            use_raw_mechanism=True,  # the digest is made here: not every token makes SHA-512
        )
        found = signer.signing_cert
    except Exception as error:  # the token libraries raise errors of many unrelated kinds
        if session is not None:
            session.close()
        # Not chained and not quoted: the cause could hold the PIN.
        raise SignatureError(
            f"the token {token!r} cannot be used ({type(error).__name__}); "
            "check library, token label, certificate label and PIN"
        ) from None
    if found is None:
        raise SignatureError(f"the token {token!r} holds no certificate {certificate!r}")
    loaded = x509.load_der_x509_certificate(found.dump())
    _require_supported(loaded, f"token {token}")
    return Identity(signer, loaded, f"token {token}")


def _read_pkcs12(content: bytes, path: Path, passphrase: Passphrase | None) -> Identity:
    from pyhanko.sign.signers import SimpleSigner  # takes most of the start-up time

    secret: bytes | None = None
    try:
        key, certificate, _ = pkcs12.load_key_and_certificates(content, None)
    except (ValueError, TypeError):
        if passphrase is None:
            raise SignatureError(
                f"{path}: not a PKCS#12 identity, or protected by a passphrase that was not given"
            ) from None
        given = passphrase()
        secret = given.encode() if isinstance(given, str) else given
        try:
            key, certificate, _ = pkcs12.load_key_and_certificates(content, secret)
        except (ValueError, TypeError):
            # Not chained: the cause could quote what was tried.
            raise SignatureError(
                f"{path}: the passphrase is wrong, or the file is damaged"
            ) from None
    if key is None:
        raise SignatureError(f"{path}: holds no private key; export the key with its certificate")
    if certificate is None:
        raise SignatureError(f"{path}: holds no certificate for its private key")
    _require_supported(certificate, str(path))
    signer = SimpleSigner.load_pkcs12_data(content, other_certs=[], passphrase=secret)
    return Identity(signer, certificate, str(path))


def _require_supported(certificate: x509.Certificate, origin: str) -> None:
    key = certificate.public_key()
    if isinstance(key, ec.EllipticCurvePublicKey):
        if isinstance(key.curve, ec.SECP256R1 | ec.SECP384R1 | ec.SECP521R1):
            return
        kind = f"elliptic curve {key.curve.name}"
    elif isinstance(key, rsa.RSAPublicKey):
        if key.key_size >= _SMALLEST_RSA:
            return
        kind = f"RSA of {key.key_size} bits"
    else:
        kind = type(key).__name__
    raise SignatureError(
        f"{origin}: a key of the kind {kind} is not used for signing; "
        f"use P-256, P-384, P-521 or RSA of {_SMALLEST_RSA} bits and more"
    )


def _new_identity(name: str, passphrase: Passphrase | None, now: datetime) -> bytes:
    key = ec.generate_private_key(ec.SECP256R1())
    subject = x509.Name(
        [
            x509.NameAttribute(NameOID.COMMON_NAME, name),
            x509.NameAttribute(NameOID.ORGANIZATION_NAME, SELF_ISSUED),
        ]
    )
    usage = dict.fromkeys(_USAGES, False) | {
        "digital_signature": True,
        "content_commitment": True,
    }
    certificate = (
        x509.CertificateBuilder()
        .subject_name(subject)
        .issuer_name(subject)
        .public_key(key.public_key())
        .serial_number(x509.random_serial_number())
        # A day back, so that a reader whose clock is behind does not refuse it.
        .not_valid_before(now - timedelta(days=1))
        .not_valid_after(now + timedelta(days=365 * YEARS_VALID))
        .add_extension(x509.BasicConstraints(ca=False, path_length=None), critical=True)
        .add_extension(x509.KeyUsage(**usage), critical=True)
        .add_extension(x509.SubjectKeyIdentifier.from_public_key(key.public_key()), critical=False)
        .sign(key, hashes.SHA256())
    )
    secret = passphrase() if passphrase is not None else None
    if isinstance(secret, str):
        secret = secret.encode()
    protection: serialization.KeySerializationEncryption = serialization.NoEncryption()
    if secret:
        protection = serialization.BestAvailableEncryption(secret)
    return pkcs12.serialize_key_and_certificates(name.encode(), key, certificate, None, protection)


_USAGES = (
    "digital_signature",
    "content_commitment",
    "key_encipherment",
    "data_encipherment",
    "key_agreement",
    "key_cert_sign",
    "crl_sign",
    "encipher_only",
    "decipher_only",
)


def _store(path: Path, content: bytes) -> bool:
    """Put a key file in place for this user alone; false if another run was first."""
    temporary = path.with_name(f".{path.name}.{os.urandom(4).hex()}.part")
    try:
        path.parent.mkdir(parents=True, exist_ok=True, mode=0o700)
        path.parent.chmod(0o700)
        write_files(path.parent, {temporary.name: content}, mode=0o600)
        try:
            os.link(temporary, path)  # unlike a rename, never replaces a key
        except FileExistsError:
            return False
        except OSError:  # a file system without hard links
            temporary.rename(path)
        flush_folder(path.parent)
    except (OSError, PackageError) as error:
        raise SignatureError(f"{path}: the new identity cannot be stored: {error}") from error
    finally:
        with suppress(OSError):
            temporary.unlink()
    return True


def _require_private(path: Path) -> None:
    if sys.platform == "win32":
        return
    mode = stat.S_IMODE(path.stat().st_mode)
    if mode & 0o077:
        raise SignatureError(
            f"{path}: the key can be read by other users (mode {mode:04o}); "
            f"if nobody had access, run: chmod 600 '{path}'"
        )


def _file_name(name: str) -> str:
    plain = unicodedata.normalize("NFKD", name).encode("ascii", "ignore").decode().lower()
    plain = re.sub(r"[^a-z0-9]+", "-", plain).strip("-")[:40] or "signer"
    return f"{plain}-{hashlib.sha256(name.casefold().encode()).hexdigest()[:8]}.p12"
