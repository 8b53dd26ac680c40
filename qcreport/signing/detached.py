"""A signature beside the document it is about, in the form that common tools check without us."""

from __future__ import annotations

from typing import TYPE_CHECKING

from qcreport.errors import SigningDeniedError
from qcreport.signing.keys import SigningKey, load_certificates

if TYPE_CHECKING:
    from cryptography import x509


def sign_detached(key: SigningKey, document: bytes) -> bytes:
    """Return the signature of a document: ECDSA or RSA (PKCS #1 v1.5), both over SHA-256."""
    from cryptography.hazmat.primitives import hashes
    from cryptography.hazmat.primitives.asymmetric import ec, padding

    private = key.private_key
    if isinstance(private, ec.EllipticCurvePrivateKey):
        return private.sign(document, ec.ECDSA(hashes.SHA256()))
    return private.sign(document, padding.PKCS1v15(), hashes.SHA256())


def signer_of(document: bytes, signature: bytes, certificate_pem: bytes) -> x509.Certificate | None:
    """Return the certificate whose key made the signature, or None where it does not hold."""
    from cryptography.exceptions import InvalidSignature
    from cryptography.hazmat.primitives import hashes
    from cryptography.hazmat.primitives.asymmetric import ec, padding, rsa

    try:
        certificate = load_certificates(certificate_pem)[0]
        public = certificate.public_key()
        if isinstance(public, ec.EllipticCurvePublicKey):
            public.verify(signature, document, ec.ECDSA(hashes.SHA256()))
        elif isinstance(public, rsa.RSAPublicKey):
            public.verify(signature, document, padding.PKCS1v15(), hashes.SHA256())
        else:
            return None
    except (InvalidSignature, SigningDeniedError, ValueError, IndexError):
        return None
    return certificate
