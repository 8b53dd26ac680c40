"""Signing keys: made, and loaded only where they may be used."""

from __future__ import annotations

from dataclasses import dataclass, field
from datetime import datetime
from typing import TYPE_CHECKING

from qcreport.canonical import sha256_hex
from qcreport.errors import SigningDeniedError
from qcreport.signing.key_checks import is_pair, require_in_time, require_signing_use, require_usable_kind
from qcreport.signing.new_key import NewKey, new_key

if TYPE_CHECKING:
    from cryptography import x509
    from cryptography.hazmat.primitives.asymmetric.types import PrivateKeyTypes

    from qcreport.signing.key_checks import UsableKey

__all__ = [
    "NewKey",
    "SigningKey",
    "common_name",
    "fingerprint",
    "load_certificates",
    "load_signing_key",
    "new_key",
]

_CERTIFICATE_PEM = b"-----BEGIN CERTIFICATE-----"
_ANY_PEM = b"-----BEGIN "
LARGEST_KEY_FILE = 1 << 20
"""Bytes; a key with its chain is a few thousand."""


@dataclass(frozen=True, slots=True, kw_only=True)
class SigningKey:
    """A private key with its certificate, checked and ready to sign."""

    private_key: UsableKey = field(repr=False)
    """Loaded once; loading an RSA key costs more than signing with it."""
    certificate: x509.Certificate
    """The signer's certificate."""
    chain: tuple[x509.Certificate, ...]
    """Certificates of its issuers, as far as the file holds them."""

    @property
    def fingerprint_sha256(self) -> str:
        """Return the SHA-256 of the certificate, hexadecimal."""
        return fingerprint(self.certificate)

    @property
    def subject(self) -> str:
        """Return the common name in the certificate."""
        return common_name(self.certificate)

    @property
    def not_after(self) -> datetime:
        """Return the end of the certificate's validity, UTC."""
        return self.certificate.not_valid_after_utc

    def certificate_pem(self) -> bytes:
        """Return the certificate as PEM, the form that is published."""
        from cryptography.hazmat.primitives.serialization import Encoding

        return self.certificate.public_bytes(Encoding.PEM)


def fingerprint(certificate: x509.Certificate) -> str:
    """Return the SHA-256 of a certificate's DER bytes, hexadecimal."""
    from cryptography.hazmat.primitives.serialization import Encoding

    return sha256_hex(certificate.public_bytes(Encoding.DER))


def common_name(certificate: x509.Certificate) -> str:
    """Return the common name of a certificate, or its whole subject where it has none."""
    from cryptography.x509.oid import NameOID

    names = certificate.subject.get_attributes_for_oid(NameOID.COMMON_NAME)
    return str(names[0].value) if names else certificate.subject.rfc4514_string()


def load_signing_key(
    data: bytes, *, passphrase: bytes | None, now: datetime, certificate: bytes | None = None
) -> SigningKey:
    """Return the signing key held in PKCS#12 or PEM bytes.

    Parameters
    ----------
    data : bytes
        A PKCS#12 file, or PEM with the private key and usually its certificates.
    passphrase : bytes or None
        None where the key is not protected.
    now : datetime
        Aware; the certificate must be valid at this time.
    certificate : bytes or None
        PEM or DER of the certificate where `data` does not hold it.

    Returns
    -------
    SigningKey
        Key, matching certificate, and the certificates of its issuers.

    Raises
    ------
    SigningDeniedError
        Wrong passphrase or damaged file, no certificate, a certificate of another key, expired, not yet
        valid, not meant for signatures, or a kind of key that is too weak or not accepted by readers.
    """
    if len(data) > LARGEST_KEY_FILE:
        raise SigningDeniedError("This file is too large to be a key.")
    raw, held = _read_pem(data, passphrase) if _ANY_PEM in data else _read_pkcs12(data, passphrase)
    key = require_usable_kind(raw)
    certificates = (*(load_certificates(certificate) if certificate is not None else ()), *held)
    if not certificates:
        raise SigningDeniedError(
            "There is no certificate beside this key. Name the certificate file, or use a PKCS#12 file."
        )
    own = next((c for c in certificates if is_pair(key, c)), None)
    if own is None:
        raise SigningDeniedError(
            f"The certificate of {common_name(certificates[0])!r} belongs to another key. "
            "Name the certificate that was issued for this key."
        )
    require_in_time(own, now)
    require_signing_use(own)
    return SigningKey(private_key=key, certificate=own, chain=tuple(c for c in certificates if c != own))


def load_certificates(data: bytes) -> tuple[x509.Certificate, ...]:
    """Return the certificates of a PEM file (one or more) or a DER file (one), also used for trust roots.

    Raises
    ------
    SigningDeniedError
        The bytes hold no certificate.
    """
    from cryptography import x509

    try:
        if _CERTIFICATE_PEM in data:
            return tuple(x509.load_pem_x509_certificates(data))
        return (x509.load_der_x509_certificate(data),)
    except ValueError:
        raise SigningDeniedError(
            "This file holds no certificate; a PEM or DER certificate is expected."
        ) from None


def _read_pkcs12(
    data: bytes, passphrase: bytes | None
) -> tuple[PrivateKeyTypes, tuple[x509.Certificate, ...]]:
    from cryptography.exceptions import UnsupportedAlgorithm
    from cryptography.hazmat.primitives.serialization import pkcs12

    try:
        key, certificate, others = pkcs12.load_key_and_certificates(data, passphrase)
    except (ValueError, TypeError, UnsupportedAlgorithm):
        raise SigningDeniedError(_not_opened(passphrase)) from None
    if key is None:
        raise SigningDeniedError("This PKCS#12 file holds no private key.")
    return key, (*((certificate,) if certificate is not None else ()), *others)


def _read_pem(data: bytes, passphrase: bytes | None) -> tuple[PrivateKeyTypes, tuple[x509.Certificate, ...]]:
    from cryptography.exceptions import UnsupportedAlgorithm
    from cryptography.hazmat.primitives.serialization import load_pem_private_key

    try:
        key = load_pem_private_key(data, passphrase)
    except TypeError:
        if passphrase is None:
            raise SigningDeniedError(_not_opened(passphrase)) from None
        return _read_pem(data, None)
    except (ValueError, UnsupportedAlgorithm):
        raise SigningDeniedError(_not_opened(passphrase)) from None
    return key, load_certificates(data) if _CERTIFICATE_PEM in data else ()


def _not_opened(passphrase: bytes | None) -> str:
    if passphrase is None:
        return "This key is protected by a passphrase and none was given, or the file is not a key."
    return "The passphrase does not open this key, or the file is not a PKCS#12 or PEM key."
