"""A PDF opened for judging: its signatures, and the revision that the seal covers."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from qcreport.errors import NotOurReportError
from qcreport.signing.boundary import NOT_READABLE, reading_pdf
from qcreport.signing.seal import SEAL_FIELD

if TYPE_CHECKING:
    from pyhanko.pdf_utils.reader import PdfFileReader
    from pyhanko.sign.validation.pdf_embedded import EmbeddedPdfSignature

LARGEST_PDF = 256 << 20
"""Bytes; a report with its export is a few hundred thousand."""
MOST_SIGNATURES = 32
_NOT_A_PDF = "This file is not a PDF."
_NO_SEAL = "This PDF carries no seal of a report."


@dataclass(frozen=True, slots=True, kw_only=True)
class OpenedPdf:
    """A readable PDF that carries a seal."""

    data: bytes
    """The whole file."""
    reader: PdfFileReader
    """Reads the newest revision and every one before it."""
    signatures: tuple[EmbeddedPdfSignature, ...]
    """All signatures and document time stamps, in the order in which they were made."""
    seal: EmbeddedPdfSignature
    """The one in the field named Seal."""

    @property
    def sealed_length(self) -> int:
        """Return the end of the bytes that the seal says it covers, never beyond the file."""
        return min(signed_length(self.seal), len(self.data))


def require_pdf(data: bytes) -> None:
    """Refuse what does not begin as a PDF, and what is larger than any report.

    Raises
    ------
    NotOurReportError
        It is one or the other.
    """
    if not data.startswith(b"%PDF-"):
        raise NotOurReportError(_NOT_A_PDF)
    if len(data) > LARGEST_PDF:
        raise NotOurReportError(f"This PDF is larger than {LARGEST_PDF >> 20} MB; no report of ours is.")


def open_sealed(pdf: bytes) -> OpenedPdf:
    """Return the PDF with its signatures found.

    Raises
    ------
    NotOurReportError
        Not a PDF, not readable, encrypted, or without a seal.
    """
    require_pdf(pdf)
    with reading_pdf():
        from qcreport.signing.pdf_reader import IndexedReader

        reader = IndexedReader(pdf)
        if reader.encrypted:
            raise NotOurReportError("This PDF is encrypted; a sealed report never is.")
        signatures = tuple(reader.embedded_signatures)
        seal = next((s for s in signatures if s.field_name == SEAL_FIELD), None)
        if seal is None:
            raise NotOurReportError(_NO_SEAL)
        if len(signatures) > MOST_SIGNATURES:
            raise NotOurReportError(f"This PDF carries {len(signatures)} signatures; no report of ours does.")
        return OpenedPdf(data=pdf, reader=reader, signatures=signatures, seal=seal)


def signed_length(signature: EmbeddedPdfSignature) -> int:
    """Return the end of the bytes that a signature says it covers.

    Raises
    ------
    NotOurReportError
        Its byte range is not two stretches from the start of the file with the signature between them.
    """
    with reading_pdf():
        start, first, second, rest = (int(number) for number in signature.byte_range)
        gap = 2 * len(signature.pkcs7_content) + 2
        if start != 0 or first <= 0 or rest < 0 or second != first + gap:
            raise NotOurReportError(NOT_READABLE)
        return second + rest


def sealed_revision(pdf: bytes) -> bytes:
    """Return the report as it was sealed, without anything that was appended later.

    Whether the seal over these bytes is intact is told by `inspect_pdf`.

    Raises
    ------
    NotOurReportError
        Not a PDF, not readable, or without a seal.
    """
    opened = open_sealed(pdf)
    return pdf[: opened.sealed_length]
