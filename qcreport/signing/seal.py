"""The seal: the service's certification signature over a finished report."""

from __future__ import annotations

from datetime import datetime
from typing import TYPE_CHECKING

from qcreport.errors import SigningDeniedError
from qcreport.signing.boundary import reading_pdf
from qcreport.signing.key_checks import require_in_time
from qcreport.signing.repack import repack

if TYPE_CHECKING:
    from cryptography import x509

    from qcreport.signing.keys import SigningKey

SEAL_FIELD = "Seal"
PERSON_FIELDS = ("Reviewed", "Authorised")


def seal(
    pdf: bytes,
    key: SigningKey,
    *,
    at: datetime,
    field_name: str = SEAL_FIELD,
    reason: str,
    location: str,
    name: str | None = None,
) -> bytes:
    """Seal a rendered report.

    A certification signature that afterwards allows nothing but signatures in the fields that exist,
    PAdES level B-B, over SHA-256. The same report, key and time give the same bytes up to the signature
    value itself.

    Parameters
    ----------
    pdf : bytes
        The rendered report with its empty signature fields.
    key : SigningKey
        The service's key.
    at : datetime
        Aware; the time stated in the seal.
    field_name : str
        An empty signature field of the report.
    reason, location : str
        Stated in the seal.
    name : str or None
        Stated in the seal; the certificate's common name where None.

    Returns
    -------
    bytes
        The sealed report.

    Raises
    ------
    SigningDeniedError
        The certificate is not valid at `at`, or the report has no such empty field.
    NotOurReportError
        The bytes are not a PDF that can be sealed.
    """
    require_in_time(key.certificate, at)
    base = repack(pdf)
    with reading_pdf("This PDF cannot be sealed: it is damaged or has a form that does not allow it."):
        from pyhanko.sign.fields import MDPPerm, SigSeedSubFilter
        from pyhanko.sign.general import SigningError
        from pyhanko.sign.signers import PdfSignatureMetadata

        from qcreport.signing.stamping import add_signature

        metadata = PdfSignatureMetadata(
            field_name=field_name,
            md_algorithm="sha256",
            reason=reason,
            location=location,
            name=name if name is not None else key.subject,
            certify=True,
            docmdp_permissions=MDPPerm.FILL_FORMS,
            subfilter=SigSeedSubFilter.PADES,
        )
        try:
            return add_signature(base, key, metadata, at)
        except SigningError as error:
            raise SigningDeniedError(
                f"The report cannot be sealed in its field {field_name!r}: {error}."
            ) from None


def require_sealed(pdf: bytes, *, certificate: x509.Certificate | bytes, at: datetime) -> None:
    """Refuse to go on unless the report just sealed holds against its own certificate.

    Takes the certificate as PEM too, so that a worker without the key can check.

    Raises
    ------
    SigningDeniedError
        The seal is not intact, not valid, or not made by this certificate.
    NotOurReportError
        There is no seal.
    """
    from qcreport.signing.inspect import inspect_pdf
    from qcreport.signing.keys import fingerprint, load_certificates

    root = load_certificates(certificate)[0] if isinstance(certificate, bytes) else certificate
    status = inspect_pdf(pdf, roots=(root,), at=at)
    found = list(status.problems)
    if status.seal.fingerprint_sha256 != fingerprint(root):
        found.append("it was made with another key")
    if not status.seal.ok or status.changed_after_seal or found:
        reasons = "; ".join((*status.seal.problems, *found)) or "its certificate does not hold"
        raise SigningDeniedError(f"The seal just made does not hold: {reasons}.")
