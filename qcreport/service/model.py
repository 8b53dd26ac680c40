"""What the folder service is told, what it tells, and what it counts."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from enum import StrEnum
from pathlib import Path

from qcreport.errors import ExportRefusedError
from qcreport.intake.exports import ClaimedExport
from qcreport.intake.journal import Claim


@dataclass(frozen=True, slots=True, kw_only=True)
class ServiceSettings:
    """Where the service looks, and how long it waits."""

    inbox: Path
    """Where exports are dropped; may be a network share."""
    refused: Path
    """Where refused exports are put with the reason."""
    work: Path
    """The site's own `work/`, on a local disk."""
    max_bytes: int
    """Files above this are refused unread."""
    quiet_s: float = 5.0
    """A file is taken when it has been still for so long, seconds."""
    grace_s: float = 60.0
    """A still file that looks incomplete is taken anyway after so much longer (and then refused), seconds."""
    poll_s: float = 3.0
    """The inbox is listed at least so often, seconds."""
    pause_s: float = 30.0
    """After a failure of the machine the work is tried again after so long, seconds."""
    min_free_bytes: int = 64 << 20
    """Nothing new is taken while the disk of `work` has less left."""
    time_zone: dt.tzinfo = dt.UTC
    """Zone of the day in the names of refused folders."""


class OutcomeKind(StrEnum):
    """What became of one export."""

    REPORTED = "reported"
    """A report was sealed."""
    RECORDED = "recorded"
    """Something was recorded without a new report (a signed copy, a duplicate)."""
    REFUSED = "refused"
    """It was refused, and whoever handled it wrote that down."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Outcome:
    """What became of one export, in words."""

    kind: OutcomeKind
    """What became of it."""
    text: str
    """One sentence for the log."""


class EventKind(StrEnum):
    """What the service tells."""

    STARTED = "started"
    STOPPED = "stopped"
    SHARE_LOST = "share lost"
    SHARE_BACK = "share back"
    POLLING_ONLY = "polling only"
    HANDLED = "handled"
    REFUSED = "refused"
    FAILED = "failed"
    PAUSED = "paused"
    RESUMED = "resumed"


@dataclass(frozen=True, slots=True, kw_only=True)
class Event:
    """Something that somebody should know, or that belongs into the ledger."""

    kind: EventKind
    """What happened."""
    text: str
    """One sentence."""
    claim: Claim | None = None
    """The claim concerned."""
    export: ClaimedExport | None = None
    """The export concerned, where it could be read."""
    refusal: ExportRefusedError | None = None
    """Why it was refused."""
    folder: Path | None = None
    """Where it was put."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Counts:
    """How far the service has come since it started."""

    done: int = 0
    """Exports reported or recorded."""
    refused: int = 0
    """Exports refused."""
    failed: int = 0
    """Exports set aside for a fault of the program."""
    waiting: int = 0
    """Files in the inbox or in hand, not handled yet."""

    @property
    def seen(self) -> int:
        """Return all files met."""
        return self.done + self.refused + self.failed + self.waiting
