"""The parts of a signature that are ours: a quiet incremental update, a cached key, a given time."""

from __future__ import annotations

import asyncio
import hashlib
from datetime import datetime
from io import BytesIO
from typing import TYPE_CHECKING, Any

from cryptography.hazmat.primitives import hashes
from cryptography.hazmat.primitives.asymmetric import ec, padding
from pyhanko.keys.internal import translate_pyca_cryptography_cert_to_asn1
from pyhanko.pdf_utils import generic
from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter
from pyhanko.sign.signers import PdfSignatureMetadata, PdfSigner, SimpleSigner
from pyhanko.sign.timestamps import TimeStamper
from pyhanko.stamp import BaseStampStyle
from pyhanko_certvalidator.registry import SimpleCertificateStore

if TYPE_CHECKING:
    from cryptography import x509

    from qcreport.signing.keys import SigningKey

_SIGNATURE_ROOM = 2048
"""Bytes beside the certificates: attributes and the signature value."""


class QuietWriter(IncrementalPdfFileWriter):
    """Append an update that leaves the metadata alone and whose identifier follows from the file."""

    def _update_meta(self) -> None:
        """Leave XMP and document information as rendered: rewriting them spoils the PDF/UA statement."""

    @classmethod
    def _handle_id(cls, prev: Any) -> Any:
        identifier = super()._handle_id(prev)  # type: ignore[no-untyped-call]
        stream = prev.stream
        stream.seek(0)
        digest = hashlib.sha256(stream.read()).digest()[:16]
        return generic.ArrayObject([identifier[0], generic.ByteStringObject(digest)])


class KeepAppearance(BaseStampStyle):
    """Leave the appearance that the field already has; a stamp would bring a font that is not embedded."""

    def create_stamp(self, writer: Any, box: Any, text_params: dict[str, Any]) -> Any:
        """Return no stamp."""
        return None


class HeldKeySigner(SimpleSigner):
    """Sign with a key that was loaded once."""

    def __init__(self, key: SigningKey) -> None:
        self._key = key.private_key
        store = SimpleCertificateStore()  # type: ignore[no-untyped-call]
        store.register_multiple([to_asn1(certificate) for certificate in key.chain])
        super().__init__(
            signing_cert=to_asn1(key.certificate),
            signing_key=None,
            cert_registry=store,
        )

    def sign_raw(self, data: bytes, digest_algorithm: str) -> bytes:
        """Return the raw signature: ECDSA, or RSA with PKCS #1 v1.5 padding, both over SHA-256."""
        if digest_algorithm != "sha256":
            raise ValueError(f"signatures are made over SHA-256, not {digest_algorithm}")
        if isinstance(self._key, ec.EllipticCurvePrivateKey):
            return self._key.sign(data, ec.ECDSA(hashes.SHA256()))
        return self._key.sign(data, padding.PKCS1v15(), hashes.SHA256())


class TimedSigner(PdfSigner):
    """Write the given time, not the clock's, as the claimed time of signing."""

    def __init__(
        self,
        metadata: PdfSignatureMetadata,
        signer: HeldKeySigner,
        at: datetime,
        timestamper: TimeStamper | None = None,
        stamp_style: BaseStampStyle | None = None,
    ) -> None:
        style = KeepAppearance() if stamp_style is None else stamp_style
        super().__init__(metadata, signer=signer, timestamper=timestamper, stamp_style=style)
        self._at = at

    def init_signing_session(self, pdf_out: Any, existing_fields_only: bool = False) -> Any:
        """Open the session with the given time."""
        session = super().init_signing_session(pdf_out, existing_fields_only=existing_fields_only)
        session.system_time = self._at
        return session


def to_asn1(certificate: x509.Certificate) -> Any:
    """Return the certificate in the form in which the PDF library takes it."""
    return translate_pyca_cryptography_cert_to_asn1(certificate)


def reserved_room(key: SigningKey) -> int:
    """Return the hexadecimal digits kept free for a signature: fixed for a key, so that files repeat."""
    held = sum(len(to_asn1(c).dump()) for c in (key.certificate, *key.chain))
    return 2 * (held + _SIGNATURE_ROOM)


def add_signature(
    pdf: bytes,
    key: SigningKey,
    metadata: PdfSignatureMetadata,
    at: datetime,
    stamp_style: BaseStampStyle | None = None,
) -> bytes:
    """Return the PDF with one signature appended in a field that exists already.

    Without `stamp_style` the field keeps the look that it has.
    """
    writer = QuietWriter(BytesIO(pdf))
    out = BytesIO()
    signer = TimedSigner(metadata, HeldKeySigner(key), at, stamp_style=stamp_style)
    signing = signer.async_sign_pdf(
        writer, existing_fields_only=True, bytes_reserved=reserved_room(key), output=out
    )
    asyncio.run(signing)
    return out.getvalue()
