"""One report checked from its own contents: seal, signatures, attachments, numbers."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from datetime import datetime
from typing import TYPE_CHECKING, Any

from qcreport.audit.differences import compare_results
from qcreport.audit.evidence import Evidence, gather
from qcreport.audit.verdict import NOT_ASKED, RecomputedStatus, VerifyStatus
from qcreport.errors import QcReportError
from qcreport.signing.attachments import attachments_of
from qcreport.signing.inspect import inspect_pdf
from qcreport.signing.status import PdfStatus

if TYPE_CHECKING:
    from cryptography import x509

Recompute = Callable[[Evidence], dict[str, Any]]


def verify_report(
    pdf: bytes,
    *,
    roots: tuple[x509.Certificate, ...] | None,
    now: datetime,
    recompute: bool = True,
    recompute_with: Recompute | None = None,
) -> VerifyStatus:
    """Check one report from its own contents.

    1. Seal and signatures are judged, and what was appended after the seal.
    2. The attachments of the sealed revision are held against the digests in the context.
    3. The result is computed anew from them and compared with the attached one.

    That the pages print what the result says is not checked here.

    Parameters
    ----------
    pdf : bytes
        The report.
    roots : tuple of certificates or None
        The only ones trusted; None leaves trust undecided.
    now : datetime
        Aware; the moment of checking.
    recompute : bool
        Whether step 3 is done.
    recompute_with : callable or None
        Computes the result of step 3; the shipped analysis where None.

    Raises
    ------
    NotOurReportError
        Not a PDF, or not a sealed report that can be read.
    """
    status = inspect_pdf(pdf, roots=roots, at=now)
    evidence = gather(attachments_of(pdf[: status.sealed_length]))
    return VerifyStatus(
        pdf=status,
        attachments=evidence.attachments,
        recomputed=_recomputed(evidence, recompute_with) if recompute else NOT_ASKED,
        report=evidence.context.report_number if evidence.context is not None else None,
        problems=tuple(_problems(status, evidence)),
    )


def _problems(status: PdfStatus, evidence: Evidence) -> Iterator[str]:
    """Yield where seal and context disagree."""
    context = evidence.context
    if context is not None and context.seal_fingerprint_sha256 != status.seal.fingerprint_sha256:
        yield "the report was sealed with another key than the one it names"


def _recomputed(evidence: Evidence, recompute_with: Recompute | None) -> RecomputedStatus:
    if not evidence.complete or evidence.result is None:
        return _not_done("not computed anew, because the attachments do not match")
    if recompute_with is None:
        from qcreport.audit.recompute import recompute_result

        recompute_with = recompute_result
    try:
        anew = recompute_with(evidence)
    except QcReportError as error:
        return _not_done(f"could not be computed anew: {error.text}")
    except (ValueError, TypeError, ArithmeticError, LookupError):
        # The settings were read and the seal may hold, yet whoever sealed them made them disagree.
        return _not_done("could not be computed anew: the attachments do not fit together")
    compared = compare_results(evidence.result, anew)
    return RecomputedStatus(
        done=True, matches=compared.matches, differences=compared.differences, notes=compared.notes
    )


def _not_done(reason: str) -> RecomputedStatus:
    return RecomputedStatus(done=False, matches=False, differences=(reason,), notes=())
