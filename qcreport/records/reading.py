"""What receiving and reading an export found."""

from __future__ import annotations

from dataclasses import dataclass

from qcreport.records.run import Run
from qcreport.records.store import Survey


@dataclass(frozen=True, slots=True, kw_only=True)
class Receipt:
    """That bytes were received, and what is known of them."""

    received_at: str
    """UTC time at which these bytes were first received."""
    first_name: str
    """The name they had then."""
    runs: tuple[Run, ...]
    """Runs over these bytes so far, reserved and sealed."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Reading:
    """What a reading of an export found, for the ledger."""

    plan_name: str
    """The plan that asked for it."""
    layout_name: str
    """The layout it was read by."""
    layout_sha256: str
    """Digest of the layout file."""
    n_measurements: int
    """Measurements read."""
    notices: tuple[str, ...]
    """Notice codes, each once."""
    survey: Survey
    """What the store held of it."""
    content: str | None = None
    """Digest of what it holds; None where exports are not joined."""
