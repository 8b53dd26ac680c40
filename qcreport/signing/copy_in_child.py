"""A signed copy looked at in a process of its own: whoever can write to the inbox can drop a hostile one."""

from __future__ import annotations

from datetime import datetime

from qcreport.errors import SigningDeniedError
from qcreport.signing.limited import StoppedError, ask, module_command
from qcreport.signing.limits import VerifyLimits
from qcreport.signing.signed_copy import AddedSignature

_COMMAND = module_command("qcreport.signing.copy_child")


def added_signature_in_child(
    original: bytes, copy: bytes, *, at: datetime, limits: VerifyLimits | None = None
) -> AddedSignature:
    """Return what `added_signature` does, from a limited process.

    Raises
    ------
    SigningDeniedError
        As `added_signature`; also where looking at the copy exceeds the limits.
    NotOurReportError
        The copy cannot be read as a sealed report.
    EnvironmentFailedError
        The process cannot be started, or fails on its own account.
    """
    order = {"now": at.isoformat(), "original_bytes": len(original)}
    try:
        told = ask(_COMMAND, order, original + copy, limits if limits is not None else VerifyLimits())
    except StoppedError as stopped:
        raise SigningDeniedError(f"It could not be looked at: {stopped}.") from None
    return AddedSignature(**{**told, "signed_at": datetime.fromisoformat(told["signed_at"])})
