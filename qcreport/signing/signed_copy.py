"""A copy of a report that somebody signed: what exactly it adds to the report as filed."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime, timedelta
from typing import TYPE_CHECKING, Any

from qcreport.errors import SigningDeniedError
from qcreport.signing.boundary import reading_pdf
from qcreport.signing.inspect import inspect_pdf
from qcreport.signing.key_checks import require_in_time, require_signing_use
from qcreport.signing.reading import open_sealed
from qcreport.signing.roles import ROLE_OF_FIELD
from qcreport.signing.status import PdfStatus, SignatureKind, SignatureStatus

if TYPE_CHECKING:
    from cryptography import x509

CLOCKS_APART = timedelta(minutes=10)
"""How far the clocks of two machines may be apart."""


@dataclass(frozen=True, slots=True, kw_only=True)
class AddedSignature:
    """The one signature that a copy adds."""

    role: str
    """`reviewed` or `authorised`, from its field."""
    field: str
    """Its field."""
    signer: str
    """Common name in the certificate."""
    fingerprint_sha256: str
    """SHA-256 of the certificate, hexadecimal."""
    signed_at: datetime
    """UTC; stated by the signer, or by a time stamp."""
    meaning: str
    """Reason stated in the signature; empty where none is."""


def is_extension(copy: bytes, original: bytes) -> bool:
    """Return whether a copy is the original with something appended."""
    return len(copy) > len(original) and copy.startswith(original)


def added_signature(original: bytes, copy: bytes, *, at: datetime) -> AddedSignature:
    """Return the signature that a copy adds to a report, and nothing else.

    Parameters
    ----------
    original : bytes
        The report as filed.
    copy : bytes
        The same with something appended.
    at : datetime
        Aware; the moment at which the copy came in.

    Raises
    ------
    SigningDeniedError
        It adds no signature, more than one, or anything else; the signature does not hold, or its certificate
        is not valid now.
    NotOurReportError
        The copy cannot be read as a sealed report.
    """
    if not is_extension(copy, original):
        raise SigningDeniedError("It is not the report as filed with something added at its end.")
    known = {str(s.field_name) for s in open_sealed(original).signatures}
    status = inspect_pdf(copy, roots=None, at=at)
    added = [s for s in status.others if s.field not in known]
    if len(added) != 1:
        found = f"{len(added)} signatures" if added else "no signature"
        raise SigningDeniedError(f"It adds {found} to the report as filed; exactly one is expected.")
    _require_nothing_else(status, added[0])
    if added[0].fingerprint_sha256 is None or added[0].signed_at is None:
        raise SigningDeniedError("The signature names no certificate or no time.")
    _require_time(status.seal.signed_at, added[0].signed_at, at)
    _require_certificate(copy, added[0].field, at)
    return AddedSignature(
        role=ROLE_OF_FIELD[added[0].field],
        field=added[0].field,
        signer=added[0].signer or "",
        fingerprint_sha256=added[0].fingerprint_sha256,
        signed_at=added[0].signed_at,
        meaning=added[0].meaning or "",
    )


def _require_nothing_else(status: PdfStatus, added: SignatureStatus) -> None:
    if added.kind is not SignatureKind.PERSON or added.field not in ROLE_OF_FIELD:
        raise SigningDeniedError(
            f"The signature is in the field {added.field!r}; a person signs in one of "
            f"{', '.join(ROLE_OF_FIELD)}."
        )
    if added.problems:
        raise SigningDeniedError(f"The signature does not hold: {'; '.join(added.problems)}.")
    if not status.holds:
        reasons = "; ".join((*status.seal.problems, *status.problems))
        raise SigningDeniedError(f"The report was changed by more than a signature: {reasons}.")
    if not added.covers_entire_file:
        raise SigningDeniedError("Something was appended after the signature.")


def _require_time(sealed_at: datetime | None, signed_at: datetime, at: datetime) -> None:
    if sealed_at is not None and signed_at < sealed_at - CLOCKS_APART:
        raise SigningDeniedError(
            f"The signature states {signed_at:%Y-%m-%d %H:%M UTC}, before the report was sealed "
            f"({sealed_at:%Y-%m-%d %H:%M UTC}). Check the clock of the computer on which it was signed."
        )
    if signed_at > at + CLOCKS_APART:
        raise SigningDeniedError(
            f"The signature states {signed_at:%Y-%m-%d %H:%M UTC}, which lies ahead. "
            "Check the clock of the computer on which it was signed."
        )


def _require_certificate(copy: bytes, field: str, at: datetime) -> None:
    """Refuse a certificate that is not valid today, whatever time is stated, or that is not for signing."""
    certificate = _certificate(copy, field)
    require_in_time(certificate, at)
    require_signing_use(certificate)


def _certificate(copy: bytes, field: str) -> x509.Certificate:
    from cryptography import x509

    with reading_pdf():
        found: Any = next(s for s in open_sealed(copy).signatures if s.field_name == field)
        return x509.load_der_x509_certificate(found.signer_cert.dump())
