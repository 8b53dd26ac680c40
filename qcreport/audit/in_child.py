"""A report checked in a process of its own, so that a hostile PDF costs bounded memory and time."""

from __future__ import annotations

from base64 import b64encode
from collections.abc import Mapping
from datetime import datetime
from typing import TYPE_CHECKING, Any

from qcreport.analysis.context import Signer
from qcreport.audit.verdict import Json, not_judged
from qcreport.signing.limited import StoppedError, ask, module_command
from qcreport.signing.limits import VerifyLimits
from qcreport.signing.reading import require_pdf

if TYPE_CHECKING:
    from cryptography import x509

_COMMAND = module_command("qcreport.audit.child")


def verify_in_child(
    pdf: bytes,
    *,
    roots: tuple[x509.Certificate, ...] | None,
    now: datetime,
    recompute: bool = True,
    people: tuple[Signer, ...] = (),
    templates: Mapping[str, bytes] | None = None,
    limits: VerifyLimits | None = None,
) -> Json:
    """Check one report in a limited process and return the document `qcreport/verify/1`.

    A report whose checking exceeds the limits is not valid, with that as its reason.

    Raises
    ------
    NotOurReportError
        Not a PDF, or not a sealed report that can be read.
    EnvironmentFailedError
        The process cannot be started, or fails on its own account.
    """
    require_pdf(pdf)
    order: dict[str, Any] = {
        "roots": None if roots is None else [_pem(root) for root in roots],
        "now": now.isoformat(),
        "recompute": recompute,
        "people": [person.to_json() for person in people],
        "templates": None if templates is None else {n: b64encode(t).decode() for n, t in templates.items()},
    }
    try:
        return ask(_COMMAND, order, pdf, limits if limits is not None else VerifyLimits())
    except StoppedError as stopped:
        return not_judged(str(stopped))


def _pem(certificate: x509.Certificate) -> str:
    from cryptography.hazmat.primitives.serialization import Encoding

    return certificate.public_bytes(Encoding.PEM).decode("ascii")
