"""A person's signature in one of the fields that a sealed report has for it."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from typing import TYPE_CHECKING, Any

from qcreport.errors import SigningDeniedError
from qcreport.signing.boundary import reading_pdf
from qcreport.signing.key_checks import require_in_time
from qcreport.signing.reading import open_sealed
from qcreport.signing.roles import FIELD_OF_ROLE

if TYPE_CHECKING:
    from qcreport.signing.keys import SigningKey


@dataclass(frozen=True, slots=True, kw_only=True)
class FieldPlace:
    """An empty field on the page."""

    width_pt: float
    """Width, points."""
    height_pt: float
    """Height, points."""


def free_field(pdf: bytes, role: str) -> FieldPlace:
    """Return where the signature of a role goes.

    Raises
    ------
    SigningDeniedError
        There is no such field, or it holds a signature already.
    NotOurReportError
        Not a sealed report that can be read.
    """
    name = FIELD_OF_ROLE[role]
    opened = open_sealed(pdf)
    with reading_pdf():
        from pyhanko.sign.fields import enumerate_sig_fields

        fields = {str(n): (value, field) for n, value, field in enumerate_sig_fields(opened.reader)}
        if name not in fields:
            raise SigningDeniedError(f"This report has no field for the signature {role!r}.")
        value, field = fields[name]
        if value is not None:
            raise SigningDeniedError(f"This report is {role} already; its field {name} holds a signature.")
        return _place(field.get_object())


def _place(field: Any) -> FieldPlace:
    left, bottom, right, top = (float(number) for number in field["/Rect"])
    return FieldPlace(width_pt=abs(right - left), height_pt=abs(top - bottom))


def countersign(
    pdf: bytes,
    key: SigningKey,
    *,
    role: str,
    name: str,
    at: datetime,
    location: str = "",
    stamp: bytes | None = None,
) -> bytes:
    """Return the report with a person's signature appended.

    Everything before stays byte for byte as it is. PAdES level B-B, over SHA-256.

    Parameters
    ----------
    pdf : bytes
        The sealed report as filed, perhaps with a signature of another person.
    key : SigningKey
        The person's own.
    role : {"reviewed", "authorised"}
        What the signature means; stated in it, and decides its field.
    name : str
        The person's name, stated in the signature.
    at : datetime
        Aware; the time stated in the signature.
    location : str
        Stated in the signature; left out where blank.
    stamp : bytes or None
        A PDF of one page, of the field's size, shown in the field; None leaves the field as it looks.

    Raises
    ------
    SigningDeniedError
        The certificate is not valid at `at`, or the field is absent or filled.
    NotOurReportError
        Not a sealed report that can be signed.
    """
    require_in_time(key.certificate, at)
    free_field(pdf, role)
    with reading_pdf("This report cannot be signed: it is damaged or was changed."):
        from pyhanko.sign.fields import SigSeedSubFilter
        from pyhanko.sign.signers import PdfSignatureMetadata

        from qcreport.signing.stamped_field import PdfStamp
        from qcreport.signing.stamping import add_signature

        metadata = PdfSignatureMetadata(
            field_name=FIELD_OF_ROLE[role],
            md_algorithm="sha256",
            reason=role,
            location=location or None,
            name=name,
            subfilter=SigSeedSubFilter.PADES,
        )
        return add_signature(pdf, key, metadata, at, None if stamp is None else PdfStamp(pdf=stamp))
