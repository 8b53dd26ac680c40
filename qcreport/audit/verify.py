"""One report checked from its own contents: seal, signatures, attachments, numbers, pages."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from datetime import datetime
from typing import TYPE_CHECKING, Any

from qcreport.analysis.context import Signer
from qcreport.audit.differences import compare_results
from qcreport.audit.evidence import Evidence, gather
from qcreport.audit.pages import PagesStatus, compare_pages, not_compared
from qcreport.audit.signers import Signers, explained, signer_problems
from qcreport.audit.verdict import NOT_ASKED, NOT_ASKED_FOR, RecomputedStatus, VerifyStatus
from qcreport.errors import QcReportError
from qcreport.signing.attachments import attachments_of
from qcreport.signing.inspect import inspect_pdf
from qcreport.signing.reading import sealed_revision
from qcreport.signing.status import PdfStatus

if TYPE_CHECKING:
    from cryptography import x509

    from qcreport.audit.recompute import Anew

Recompute = Callable[[Evidence], dict[str, Any]]
Checked = tuple[RecomputedStatus, PagesStatus]


def verify_report(
    pdf: bytes,
    *,
    roots: tuple[x509.Certificate, ...] | None,
    now: datetime,
    recompute: bool = True,
    people: tuple[Signer, ...] = (),
    templates: Mapping[str, bytes] | None = None,
    recompute_with: Recompute | None = None,
) -> VerifyStatus:
    """Check one report from its own contents.

    1. Seal and signatures are judged, and what was appended after the seal.
    2. The attachments of the sealed revision are held against the digests in the context.
    3. The result is computed anew from them and compared with the attached one.
    4. The pages are rendered anew from that and their text is compared, where the same version with the same
       templates is at hand.

    Parameters
    ----------
    pdf : bytes
        The report.
    roots : tuple of certificates or None
        The only ones trusted; None leaves trust undecided.
    now : datetime
        Aware; the moment of checking.
    recompute : bool
        Whether steps 3 and 4 are done.
    people : tuple of Signer
        Persons whose certificates the caller trusts as they are; those that the seal names are added where
        the seal itself is trusted.
    templates : mapping or None
        The laboratory's own templates by file name, for step 4.
    recompute_with : callable or None
        Computes the result of step 3 in place of the shipped analysis; step 4 is then left out.

    Raises
    ------
    NotOurReportError
        Not a PDF, or not a sealed report that can be read.
    """
    sealed = sealed_revision(pdf)
    evidence = gather(attachments_of(sealed))
    context = evidence.context
    signers = Signers(by_seal=() if context is None else context.signers, by_site=people)
    status = inspect_pdf(pdf, roots=roots, at=now, pinned=signers.pinned(), vouched=signers.vouched())
    numbers, pages = NOT_ASKED, not_compared(NOT_ASKED_FOR)
    if recompute:
        numbers, pages = _checked(sealed, evidence, templates, recompute_with)
    return VerifyStatus(
        pdf=status,
        attachments=evidence.attachments,
        recomputed=numbers,
        pages=pages,
        explained=explained(status, signers),
        made_with=context.software_version if context is not None else None,
        report=context.report_number if context is not None else None,
        problems=(*_problems(status, evidence), *signer_problems(status, signers)),
    )


def _problems(status: PdfStatus, evidence: Evidence) -> Iterator[str]:
    """Yield where seal, context and result disagree."""
    context = evidence.context
    if context is None:
        return
    if context.seal_fingerprint_sha256 != status.seal.fingerprint_sha256:
        yield "the report was sealed with another key than the one it names"
    versions = evidence.result.get("versions") if evidence.result is not None else None
    if isinstance(versions, dict) and versions.get("qcreport") != context.software_version:
        yield "context.json and result.json name different versions of qcreport"


def _checked(
    sealed: bytes,
    evidence: Evidence,
    templates: Mapping[str, bytes] | None,
    recompute_with: Recompute | None,
) -> Checked:
    """Return what computing and rendering anew showed."""
    if not evidence.complete or evidence.result is None or evidence.context is None:
        return _not_done("not computed anew, because the attachments do not match")
    anew: Anew | None = None
    try:
        if recompute_with is not None:
            document = recompute_with(evidence)
        else:
            from qcreport.audit.recompute import recompute_result

            anew = recompute_result(evidence)
            document = anew.result.to_json()
    except QcReportError as error:
        return _not_done(f"could not be computed anew: {error.text}")
    except (ValueError, TypeError, ArithmeticError, LookupError):
        # The settings were read and the seal may hold, yet whoever sealed them made them disagree.
        return _not_done("could not be computed anew: the attachments do not fit together")
    compared = compare_results(evidence.result, document)
    numbers = RecomputedStatus(
        done=True, matches=compared.matches, differences=compared.differences, notes=compared.notes
    )
    if anew is None or not compared.matches:
        return numbers, not_compared("the numbers do not repeat" if anew is not None else NOT_ASKED_FOR)
    return numbers, compare_pages(sealed, evidence.context, anew, templates)


def _not_done(reason: str) -> Checked:
    numbers = RecomputedStatus(done=False, matches=False, differences=(reason,), notes=())
    return numbers, not_compared("the numbers could not be computed anew")
