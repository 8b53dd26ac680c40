"""The verdict on one report, and its form for machines: `verify --json`."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from typing import TYPE_CHECKING, Any

import qcreport
from qcreport.signing.status import PdfStatus, SignatureStatus

if TYPE_CHECKING:
    from qcreport.audit.pages import PagesStatus
    from qcreport.audit.signers import Explained

Json = dict[str, Any]
VERIFY_SCHEMA = "qcreport/verify/1"


@dataclass(frozen=True, slots=True, kw_only=True)
class AttachmentStatus:
    """One attachment of a report."""

    name: str
    """Fixed name; `export` where the export is absent."""
    sha256: str | None
    """Digest of what is attached; None where absent."""
    matches: bool
    """It is there and is what the report says it is."""
    problem: str | None
    """What speaks against it."""

    def to_json(self) -> Json:
        """Return the entry of `verify --json`."""
        return {"name": self.name, "sha256": self.sha256, "matches": self.matches}


@dataclass(frozen=True, slots=True, kw_only=True)
class RecomputedStatus:
    """What computing the result anew from the attachments showed."""

    done: bool
    """False where it was not asked for or could not be done."""
    matches: bool | None
    """None where it was not asked for."""
    differences: tuple[str, ...]
    """By path, or the reason why it could not be done."""
    notes: tuple[str, ...]
    """Differences of version."""

    def to_json(self) -> Json:
        """Return the entry of `verify --json`."""
        return {
            "matches": self.matches,
            "differences": list(self.differences),
            "done": self.done,
            "notes": list(self.notes),
        }


NOT_ASKED_FOR = "not asked for"
NOT_ASKED = RecomputedStatus(done=False, matches=None, differences=(), notes=())


@dataclass(frozen=True, slots=True, kw_only=True)
class VerifyStatus:
    """Everything that checking one report showed."""

    pdf: PdfStatus
    """Signatures and changes."""
    attachments: tuple[AttachmentStatus, ...]
    """All that a report must carry."""
    recomputed: RecomputedStatus
    """Whether the numbers repeat."""
    pages: PagesStatus
    """Whether the pages show what the result says."""
    explained: tuple[Explained, ...]
    """Each person's signature in plain words, in the order in which they were made."""
    made_with: str | None
    """Version of qcreport that made the report."""
    report: str | None
    """Number of the report, from its context."""
    problems: tuple[str, ...]
    """Whatever speaks against the report as a whole, one plain clause each."""

    @property
    def valid(self) -> bool:
        """Return whether it is intact, changed only as allowed, complete, and repeats."""
        return (
            self.pdf.holds
            and not self.problems
            and all(a.matches for a in self.attachments)
            and self.recomputed.matches is not False
            and self.pages.matches is not False
        )

    @property
    def trusted(self) -> bool | None:
        """Return whether seal and signatures lead to a given root; None where none was given."""
        return self.pdf.trusted

    def to_json(self) -> Json:
        """Return the document `qcreport/verify/1`."""
        return {
            "schema": VERIFY_SCHEMA,
            "report": self.report,
            "valid": self.valid,
            "trusted": self.trusted,
            "sealed": _seal(self.pdf.seal),
            "signatures": [_signature(e) for e in self.explained],
            "attachments": [a.to_json() for a in self.attachments],
            "recomputed": self.recomputed.to_json(),
            "pages": self.pages.to_json(),
            "versions": {"report": self.made_with, "here": qcreport.__version__},
            "records": None,
            "pades_level": self.pdf.pades_level,
            "changed_after_seal": self.pdf.changed_after_seal,
            "problems": [*self.pdf.problems, *self.problems, *_attachment_problems(self.attachments)],
        }


def not_judged(reason: str) -> Json:
    """Return the document for a report whose checking had to be stopped: not valid, for that reason."""
    seal = {"intact": False, "valid": False, "trusted": None, "signer": None, "fingerprint_sha256": None}
    return {
        "schema": VERIFY_SCHEMA,
        "report": None,
        "valid": False,
        "trusted": None,
        "sealed": {**seal, "time": None, "problems": [], "notes": []},
        "signatures": [],
        "attachments": [],
        "recomputed": {"matches": False, "differences": [reason], "done": False, "notes": []},
        "pages": {"matches": None, "differences": [], "reason": reason},
        "versions": {"report": None, "here": qcreport.__version__},
        "records": None,
        "pades_level": None,
        "changed_after_seal": False,
        "problems": [reason],
    }


def _attachment_problems(attachments: tuple[AttachmentStatus, ...]) -> list[str]:
    return [f"{a.name}: {a.problem}" for a in attachments if a.problem is not None]


def _seal(seal: SignatureStatus) -> Json:
    return {
        "intact": seal.intact,
        "valid": seal.valid,
        "trusted": seal.trusted,
        "signer": seal.signer,
        "fingerprint_sha256": seal.fingerprint_sha256,
        "time": _time(seal.signed_at),
        "problems": list(seal.problems),
        "notes": list(seal.notes),
    }


def _signature(explained: Explained) -> Json:
    status = explained.status
    return {
        "name": status.signer,
        "meaning": status.meaning,
        "time": _time(status.signed_at),
        "valid": status.holds,
        "trusted": status.trusted,
        "field": status.field,
        "fingerprint_sha256": status.fingerprint_sha256,
        "problems": list(status.problems),
        "notes": list(status.notes),
        "explanation": explained.text,
    }


def _time(moment: datetime | None) -> str | None:
    return None if moment is None else f"{moment:%Y-%m-%dT%H:%M:%SZ}"
