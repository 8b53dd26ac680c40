"""The seal just made, verified in a worker before anything is published."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime


@dataclass(frozen=True, slots=True)
class SealToCheck:
    """A sealed report and what its seal must hold against."""

    report: bytes
    """The sealed report."""
    certificate: bytes
    """The sealing certificate, PEM."""
    at: datetime
    """Moment of the check."""


def check_seal(job: SealToCheck) -> None:
    """Raise SigningDeniedError unless the report holds against its own certificate."""
    from qcreport.signing.seal import require_sealed

    require_sealed(job.report, certificate=job.certificate, at=job.at)
