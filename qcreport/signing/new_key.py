"""A new key with a certificate of its own, for the service or for a person."""

from __future__ import annotations

from dataclasses import dataclass, field
from datetime import datetime, timedelta
from typing import TYPE_CHECKING, Literal

from qcreport.errors import UsageError

if TYPE_CHECKING:
    from cryptography import x509
    from cryptography.hazmat.primitives.asymmetric import ec
    from cryptography.hazmat.primitives.serialization import KeySerializationEncryption

Purpose = Literal["service", "person"]

DEMONSTRATION_WORDS = "DEMONSTRATION KEY, not for release"
LONGEST_NAME = 64
"""Characters; the upper bound of a common name in X.509."""
_UNIT = {"service": "Report seal", "person": "Personal signature"}


@dataclass(frozen=True, slots=True, kw_only=True)
class NewKey:
    """A key as it is written to disk, and what is published of it."""

    pkcs12: bytes = field(repr=False)
    """Private key and certificate."""
    certificate_pem: bytes
    """Certificate, to be handed to auditors as trust root."""
    fingerprint_sha256: str
    """SHA-256 of the certificate, hexadecimal, to be published."""


def new_key(
    name: str,
    *,
    purpose: Purpose,
    organisation: str,
    now: datetime,
    days: int,
    demonstration: bool = False,
    passphrase: bytes | None,
) -> NewKey:
    """Make a P-256 key and a self-signed certificate for it.

    Parameters
    ----------
    name : str
        Common name: of the laboratory's seal, or of the person; at most 64 characters.
    purpose : {"service", "person"}
        Printed in the subject's organisational unit.
    organisation : str
        The laboratory; at most 64 characters.
    now : datetime
        Aware; start of validity.
    days : int
        Length of validity, at least 1.
    demonstration : bool
        Whether the subject says that the key is not for release.
    passphrase : bytes or None
        Protects the PKCS#12 file; None leaves it open to whoever reads it.

    Returns
    -------
    NewKey
        PKCS#12, certificate and fingerprint.

    Raises
    ------
    UsageError
        A blank or too long name or organisation, or fewer than one day.
    """
    from cryptography.hazmat.primitives.asymmetric import ec
    from cryptography.hazmat.primitives.serialization import Encoding, pkcs12

    from qcreport.signing.keys import fingerprint

    _require_names(name, organisation)
    if days < 1:
        raise UsageError(f"A key must be valid for at least one day, not {days}.")
    key = ec.generate_private_key(ec.SECP256R1())
    unit = DEMONSTRATION_WORDS if demonstration else _UNIT[purpose]
    certificate = _self_signed(key, _subject(name, organisation, unit), now.replace(microsecond=0), days)
    return NewKey(
        pkcs12=pkcs12.serialize_key_and_certificates(
            name.encode("utf-8"), key, certificate, None, _encryption(passphrase)
        ),
        certificate_pem=certificate.public_bytes(Encoding.PEM),
        fingerprint_sha256=fingerprint(certificate),
    )


def is_demonstration(certificate: x509.Certificate) -> bool:
    """Return whether a certificate says that its key is a demonstration key."""
    from cryptography.x509.oid import NameOID

    units = certificate.subject.get_attributes_for_oid(NameOID.ORGANIZATIONAL_UNIT_NAME)
    return any(unit.value == DEMONSTRATION_WORDS for unit in units)


def _require_names(name: str, organisation: str) -> None:
    for what, text in (("name", name), ("organisation", organisation)):
        if not text.strip():
            raise UsageError(f"The {what} of a key must not be blank.")
        if len(text) > LONGEST_NAME:
            raise UsageError(
                f"The {what} of a key may have {LONGEST_NAME} characters; {text!r} has {len(text)}."
            )


def _subject(name: str, organisation: str, unit: str) -> x509.Name:
    from cryptography import x509
    from cryptography.x509.oid import NameOID

    return x509.Name(
        [
            x509.NameAttribute(NameOID.ORGANIZATION_NAME, organisation),
            x509.NameAttribute(NameOID.ORGANIZATIONAL_UNIT_NAME, unit),
            x509.NameAttribute(NameOID.COMMON_NAME, name),
        ]
    )


def _self_signed(
    key: ec.EllipticCurvePrivateKey, subject: x509.Name, start: datetime, days: int
) -> x509.Certificate:
    """Return a certificate that is its own trust root and can issue no other (RFC 5280, 4.2.1.3 and .9)."""
    from cryptography import x509
    from cryptography.hazmat.primitives import hashes

    public = key.public_key()
    identifier = x509.SubjectKeyIdentifier.from_public_key(public)
    return (
        x509.CertificateBuilder()
        .subject_name(subject)
        .issuer_name(subject)
        .public_key(public)
        .serial_number(x509.random_serial_number())
        .not_valid_before(start)
        .not_valid_after(start + timedelta(days=days))
        .add_extension(x509.BasicConstraints(ca=False, path_length=None), critical=True)
        .add_extension(_usage(), critical=True)
        .add_extension(identifier, critical=False)
        .add_extension(
            x509.AuthorityKeyIdentifier.from_issuer_subject_key_identifier(identifier), critical=False
        )
        .sign(key, hashes.SHA256())
    )


def _usage() -> x509.KeyUsage:
    from cryptography import x509

    return x509.KeyUsage(
        digital_signature=True,
        content_commitment=True,
        key_encipherment=False,
        data_encipherment=False,
        key_agreement=False,
        key_cert_sign=False,
        crl_sign=False,
        encipher_only=False,
        decipher_only=False,
    )


def _encryption(passphrase: bytes | None) -> KeySerializationEncryption:
    from cryptography.hazmat.primitives.serialization import BestAvailableEncryption, NoEncryption

    return NoEncryption() if passphrase is None else BestAvailableEncryption(passphrase)
