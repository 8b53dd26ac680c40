"""A sealed PDF inspected: every signature, what was changed after the seal, what level it reaches."""

from __future__ import annotations

import re
from collections.abc import Iterator
from datetime import datetime
from typing import TYPE_CHECKING

from qcreport.signing.boundary import reading_pdf
from qcreport.signing.reading import OpenedPdf, open_sealed, signed_length
from qcreport.signing.status import PdfStatus, SignatureKind, SignatureStatus

if TYPE_CHECKING:
    from cryptography import x509

_AFTER_END = re.compile(rb"[\r\n \t\0]*\Z")
_LOST = "the signature in the field {} was taken out or replaced"
SEALED_REVISION = 1
"""A report is rewritten in one revision and sealed in the next; the first has number 0."""


def inspect_pdf(
    pdf: bytes,
    *,
    roots: tuple[x509.Certificate, ...] | None,
    at: datetime,
    pinned: frozenset[str] = frozenset(),
    vouched: frozenset[str] = frozenset(),
) -> PdfStatus:
    """Judge every signature of a sealed PDF and everything appended after the seal.

    Parameters
    ----------
    pdf : bytes
        The whole file.
    roots : tuple of certificates or None
        The only certificates that are trusted; a self-signed certificate of a seal may be one. None leaves
        trust undecided. Neither the file nor the operating system adds any, and nothing is fetched.
    at : datetime
        Aware; the moment of judging.
    pinned : frozenset of str
        SHA-256 of persons' certificates that are trusted as they are.
    vouched : frozenset of str
        The same, where the seal names them: they count only if the seal holds and is trusted.

    Returns
    -------
    PdfStatus
        What was found; a tampered report is a status, not an error.

    Raises
    ------
    NotOurReportError
        Not a PDF, not readable, or without a seal.
    """
    opened = open_sealed(pdf)
    with reading_pdf():
        from qcreport.signing.history import lost_signatures
        from qcreport.signing.judge import judge
        from qcreport.signing.levels import pades_level
        from qcreport.signing.stamping import to_asn1

        known = None if roots is None else tuple(to_asn1(root) for root in roots)
        seal = judge(opened, opened.seal, known, at)
        rest = [s for s in opened.signatures if s is not opened.seal]
        persons = pinned | vouched if seal.ok else pinned
        others = tuple(judge(opened, s, known, at, seal=seal, pinned=persons) for s in rest)
        lost = lost_signatures(opened)
        changed = (_appended(opened) and not seal.later_changes_allowed) or _trailing(opened) or bool(lost)
        return PdfStatus(
            seal=seal,
            others=others,
            sealed_length=opened.sealed_length,
            changed_after_seal=changed,
            pades_level=pades_level(opened, seal, others),
            problems=(*_problems(opened, seal, others), *(_LOST.format(name) for name in lost)),
        )


def _appended(opened: OpenedPdf) -> bool:
    return len(opened.data) > opened.sealed_length


def _trailing(opened: OpenedPdf) -> bool:
    """Return whether bytes follow the last revision that no reader takes for one."""
    last = max(signed_length(s) for s in opened.signatures)
    end = opened.data.rfind(b"%%EOF") + len(b"%%EOF")
    newest = opened.reader.xrefs.total_revisions - 1
    if any(s.signed_revision == newest for s in opened.signatures):
        return not _AFTER_END.match(opened.data, last)
    return not _AFTER_END.match(opened.data, end)


def _problems(opened: OpenedPdf, seal: SignatureStatus, others: tuple[SignatureStatus, ...]) -> Iterator[str]:
    yield from _about_seal(opened, seal)
    if _trailing(opened):
        yield "bytes were appended after the end of the report"
    if _appended(opened) and not seal.later_changes_allowed:
        yield "the report was changed after it was sealed, by more than signatures"
    for status in others:
        if status.kind is SignatureKind.PERSON and not status.holds:
            yield f"the signature in the field {status.field} does not hold"


def _about_seal(opened: OpenedPdf, seal: SignatureStatus) -> Iterator[str]:
    from pyhanko.sign.fields import MDPPerm

    if opened.seal is not opened.signatures[0] or opened.seal.signed_revision != SEALED_REVISION:
        yield "the seal is not the first thing that was added to the rendered report"
    if opened.seal.docmdp_level is not MDPPerm.FILL_FORMS:
        yield "the seal does not forbid later changes as ours does"
    if seal.kind is not SignatureKind.SEAL:
        yield "the field of the seal holds a time stamp"
