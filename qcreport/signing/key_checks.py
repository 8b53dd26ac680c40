"""Whether a key and its certificate may be used: strength, match, time, file mode."""

from __future__ import annotations

import stat
from datetime import datetime
from pathlib import Path
from typing import TYPE_CHECKING, TypeAlias

from qcreport.errors import EnvironmentFailedError, SigningDeniedError

if TYPE_CHECKING:
    from cryptography import x509
    from cryptography.hazmat.primitives.asymmetric import ec, rsa
    from cryptography.hazmat.primitives.asymmetric.types import PrivateKeyTypes

    UsableKey: TypeAlias = ec.EllipticCurvePrivateKey | rsa.RSAPrivateKey

SMALLEST_RSA_BITS = 2048
CURVES = ("secp256r1", "secp384r1", "secp521r1")


def require_usable_kind(key: PrivateKeyTypes) -> UsableKey:
    """Return the key where PDF readers accept its kind and its strength.

    Raises
    ------
    SigningDeniedError
        RSA below 2048 bits, a curve other than P-256, P-384 or P-521, or another kind such as Ed25519,
        which common PDF readers reject.
    """
    from cryptography.hazmat.primitives.asymmetric import ec, rsa

    if isinstance(key, rsa.RSAPrivateKey):
        if key.key_size < SMALLEST_RSA_BITS:
            raise SigningDeniedError(
                f"This key is an RSA key of {key.key_size} bits; at least {SMALLEST_RSA_BITS} are needed. "
                "Make a new key."
            )
        return key
    if isinstance(key, ec.EllipticCurvePrivateKey):
        if key.curve.name not in CURVES:
            raise SigningDeniedError(
                f"This key lies on the curve {key.curve.name}; P-256, P-384 or P-521 is needed. "
                "Make a new key."
            )
        return key
    kind = type(key).__name__.removesuffix("PrivateKey").strip("_")
    raise SigningDeniedError(
        f"PDF readers do not accept a key of the kind {kind}; P-256 or RSA is needed. Make a new key."
    )


def is_pair(key: UsableKey, certificate: x509.Certificate) -> bool:
    """Return whether the certificate is about this key."""
    from cryptography.hazmat.primitives.serialization import Encoding, PublicFormat

    form = (Encoding.DER, PublicFormat.SubjectPublicKeyInfo)
    return key.public_key().public_bytes(*form) == certificate.public_key().public_bytes(*form)


def require_in_time(certificate: x509.Certificate, now: datetime) -> None:
    """Refuse a certificate that is not valid at `now` (an aware time).

    Raises
    ------
    SigningDeniedError
        Expired, or not yet valid.
    """
    if now > certificate.not_valid_after_utc:
        raise SigningDeniedError(
            f"The certificate expired on {certificate.not_valid_after_utc:%Y-%m-%d at %H:%M UTC}. "
            "Make or obtain a new key."
        )
    if now < certificate.not_valid_before_utc:
        raise SigningDeniedError(
            f"The certificate is valid only from {certificate.not_valid_before_utc:%Y-%m-%d at %H:%M UTC}. "
            "Check the clock of this machine, or wait."
        )


def require_signing_use(certificate: x509.Certificate) -> None:
    """Refuse a certificate whose stated use leaves out signatures.

    Raises
    ------
    SigningDeniedError
        A keyUsage extension without digitalSignature and without contentCommitment.
    """
    from cryptography import x509

    try:
        usage = certificate.extensions.get_extension_for_class(x509.KeyUsage).value
    except x509.ExtensionNotFound:
        return
    if not usage.content_commitment and not usage.digital_signature:
        raise SigningDeniedError(
            "The certificate is not meant for signatures: its key usage lists neither digitalSignature nor "
            "contentCommitment. Obtain one that does."
        )


def check_key_file_mode(path: Path) -> None:
    """Refuse a key or passphrase file that anyone but its owner may read.

    Raises
    ------
    SigningDeniedError
        Group or others have any right on the file.
    EnvironmentFailedError
        The file is absent or cannot be examined.
    """
    try:
        mode = stat.S_IMODE(path.stat().st_mode)
    except OSError as error:
        raise EnvironmentFailedError(
            f"{path.name} cannot be opened: {error.strerror}.", file=path.name
        ) from None
    if mode & 0o077:
        raise SigningDeniedError(
            f"{path.name} may be read or changed by others (mode {mode:03o}); only its owner may. "
            f"Run: chmod 600 {path}",
            file=path.name,
        )
