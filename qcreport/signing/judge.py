"""One signature judged: its bytes, its key, its certificate, and what was appended after it."""

from __future__ import annotations

import asyncio
from collections.abc import Iterator
from dataclasses import dataclass
from datetime import UTC, datetime, timedelta
from typing import TYPE_CHECKING, Any

from pyhanko.sign.validation import async_validate_pdf_signature, async_validate_pdf_timestamp
from pyhanko.sign.validation.status import SignatureCoverageLevel
from pyhanko_certvalidator import ValidationContext

from qcreport.signing.change_policy import change_policy
from qcreport.signing.cms_form import oddities
from qcreport.signing.reading import OpenedPdf
from qcreport.signing.seal import SEAL_FIELD
from qcreport.signing.status import SignatureKind, SignatureStatus

if TYPE_CHECKING:
    from pyhanko.sign.validation.pdf_embedded import EmbeddedPdfSignature

CLOCK_TOLERANCE = timedelta(hours=26)
"""A stated time may lie this far ahead of ours: a day, for clocks set to local time, and a little more."""
Roots = tuple[Any, ...]
"""Certificates in the form of the PDF library, which brings no types for them."""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Raw:
    """What the signature library says of one signature, as far as it got."""

    intact: bool = False
    valid: bool = False
    chained: bool = False
    covers_entire_file: bool = False
    later_changes_allowed: bool = False
    stamped_at: datetime | None = None
    stamp_trusted: bool = False
    problem: str | None = None


def judge(
    opened: OpenedPdf,
    signature: EmbeddedPdfSignature,
    roots: Roots | None,
    at: datetime,
    *,
    seal: SignatureStatus | None = None,
    pinned: frozenset[str] = frozenset(),
) -> SignatureStatus:
    """Return the status of one signature; never raises over what the signature holds.

    What was appended after the seal is compared once, for the seal. Whatever may follow the seal may follow
    a later signature too, so the others take that answer from the status of the seal, given as `seal`. A
    certificate whose digest is `pinned` is its own root.

    A certificate is judged at the stated time of signing, because a report outlives the certificate of its
    seal; that the time is only stated, and that the certificate has ended since, is told in the notes.
    """
    kind = _kind(signature)
    certificate = _attempt(lambda: signature.signer_cert)
    stated = _stated_time(signature)
    moment = stated if stated is not None and stated <= at else at
    own = (certificate,) if certificate is not None and certificate.sha256.hex() in pinned else ()
    raw = _validated(signature, _context((*(roots or ()), *own), moment), seal)
    problems = (*((raw.problem,) if raw.problem else ()), *_problems(opened, signature, stated, at))
    in_time = certificate is not None and _in_time(certificate, moment)
    return SignatureStatus(
        field=str(signature.field_name),
        kind=kind,
        signer=_signer(certificate),
        fingerprint_sha256=certificate.sha256.hex() if certificate is not None else None,
        signed_at=raw.stamped_at or stated,
        meaning=_text(signature, "/Reason"),
        location=_text(signature, "/Location"),
        intact=raw.intact,
        valid=raw.valid,
        trusted=None if roots is None else raw.valid and raw.chained and in_time,
        covers_entire_file=raw.covers_entire_file,
        later_changes_allowed=raw.later_changes_allowed,
        time_stamped=raw.stamped_at is not None,
        problems=problems,
        notes=tuple(_notes(certificate, moment, at, raw, roots)),
    )


def _kind(signature: EmbeddedPdfSignature) -> SignatureKind:
    if signature.sig_object_type == "/DocTimeStamp":
        return SignatureKind.TIME_STAMP
    return SignatureKind.SEAL if signature.field_name == SEAL_FIELD else SignatureKind.PERSON


def _context(roots: Roots | None, moment: datetime) -> ValidationContext:
    """Return a context that knows only the given roots and never goes to the network."""
    return ValidationContext(trust_roots=list(roots or ()), allow_fetching=False, moment=moment)


def _validated(
    signature: EmbeddedPdfSignature, context: ValidationContext, seal: SignatureStatus | None
) -> _Raw:
    once: dict[str, Any] = {"diff_policy": change_policy(), "skip_diff": seal is not None}
    try:
        if _kind(signature) is SignatureKind.TIME_STAMP:
            return _from_stamp(asyncio.run(async_validate_pdf_timestamp(signature, context, **once)), seal)
        status = asyncio.run(async_validate_pdf_signature(signature, context, **once))
    except MemoryError:
        raise
    except Exception:  # noqa: BLE001  a hostile signature makes the library raise anything
        return _Raw(problem="the signature is damaged or has a form that cannot be checked")
    stamp = status.timestamp_validity
    stamped = stamp is not None and stamp.intact and stamp.valid
    damaged = stamp is not None and not stamped
    return _Raw(
        intact=status.intact,
        valid=status.valid,
        chained=status.trusted,
        covers_entire_file=status.coverage == SignatureCoverageLevel.ENTIRE_FILE,
        later_changes_allowed=_later_changes_allowed(status, seal),
        stamped_at=stamp.timestamp.astimezone(UTC) if stamp is not None and stamped else None,
        stamp_trusted=stamp is not None and stamp.trusted,
        problem="the time stamp in the signature is not intact" if damaged else _fault(status),
    )


def _from_stamp(status: Any, seal: SignatureStatus | None) -> _Raw:
    return _Raw(
        intact=status.intact,
        valid=status.valid,
        chained=status.trusted,
        covers_entire_file=status.coverage == SignatureCoverageLevel.ENTIRE_FILE,
        later_changes_allowed=_later_changes_allowed(status, seal),
        stamped_at=status.timestamp.astimezone(UTC) if status.intact and status.valid else None,
        stamp_trusted=status.trusted,
        problem=_fault(status),
    )


def _later_changes_allowed(status: Any, seal: SignatureStatus | None) -> bool:
    if status.coverage < SignatureCoverageLevel.ENTIRE_REVISION:
        return False
    if status.coverage == SignatureCoverageLevel.ENTIRE_FILE:
        return True
    return bool(status.docmdp_ok) if seal is None else seal.later_changes_allowed


def _fault(status: Any) -> str | None:
    if not status.intact:
        return "bytes that it covers were changed after signing"
    if not status.valid:
        return "it was not made with the key of the certificate it names"
    return None


def _problems(
    opened: OpenedPdf, signature: EmbeddedPdfSignature, stated: datetime | None, at: datetime
) -> Iterator[str]:
    found = _attempt(lambda: oddities(opened.data, signature))
    yield from ("its bytes cannot be read",) if found is None else found
    if stated is None:
        yield "it states no time"
    elif stated > at + CLOCK_TOLERANCE:
        yield f"its stated time, {stated:%Y-%m-%d %H:%M UTC}, lies in the future"


def _notes(certificate: Any, moment: datetime, at: datetime, raw: _Raw, roots: Roots | None) -> Iterator[str]:
    if raw.stamped_at is None:
        yield "the time is the signer's own statement"
    elif roots is not None and not raw.stamp_trusted:
        yield "the authority of its time stamp does not lead to a given root"
    if certificate is None:
        return
    if not _in_time(certificate, moment):
        yield "the certificate was not valid at the stated time"
    elif not _in_time(certificate, at):
        yield f"the certificate ended on {certificate.not_valid_after:%Y-%m-%d}, after the stated time"


def _in_time(certificate: Any, moment: datetime) -> bool:
    return bool(certificate.not_valid_before <= moment <= certificate.not_valid_after)


def _stated_time(signature: EmbeddedPdfSignature) -> datetime | None:
    stated: datetime | None = _attempt(lambda: signature.self_reported_timestamp)
    if stated is None:
        stated = _attempt(
            lambda: signature.signed_data["encap_content_info"]["content"].parsed["gen_time"].native
        )
    if stated is None or stated.tzinfo is None:
        return None
    return stated.astimezone(UTC)


def _signer(certificate: Any) -> str | None:
    if certificate is None:
        return None
    name = _attempt(lambda: certificate.subject.native.get("common_name"))
    if isinstance(name, list):
        name = name[0]
    return str(name) if name else _attempt(lambda: str(certificate.subject.human_friendly))


def _text(signature: EmbeddedPdfSignature, key: str) -> str | None:
    value = _attempt(lambda: signature.sig_object[key])
    return str(value) if isinstance(value, str) else None


def _attempt(read: Any) -> Any:
    """Return what `read` returns, or None where a damaged signature does not yield it."""
    try:
        return read()
    except MemoryError:
        raise
    except Exception:  # noqa: BLE001  a damaged signature raises anything
        return None
