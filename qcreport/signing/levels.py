"""Which PAdES level the seal of a file reaches, claimed only from what the file carries intact."""

from __future__ import annotations

from qcreport.signing.reading import OpenedPdf
from qcreport.signing.status import SignatureKind, SignatureStatus


def pades_level(opened: OpenedPdf, seal: SignatureStatus, others: tuple[SignatureStatus, ...]) -> str:
    """Return B-B, B-T, B-LT or B-LTA.

    Each level needs the one before it: an intact time stamp in the seal, stored validation data, and an
    intact document time stamp made after them.
    """
    if not seal.time_stamped:
        return "B-B"
    if not _has_validation_data(opened):
        return "B-T"
    archived = any(s.kind is SignatureKind.TIME_STAMP and s.intact and s.valid for s in others)
    return "B-LTA" if archived else "B-LT"


def _has_validation_data(opened: OpenedPdf) -> bool:
    root = opened.reader.root
    return "/DSS" in root and any(key in root["/DSS"] for key in ("/Certs", "/OCSPs", "/CRLs"))
