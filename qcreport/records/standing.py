"""What became of a sealed report: signed, issued, returned, withdrawn, replaced; as the ledger has it."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from enum import StrEnum

from sqlalchemy import Connection

from qcreport.records import ledger
from qcreport.records.chain import Entry, Kind


class ReportState(StrEnum):
    """How far a run has come."""

    RESERVED = "reserved"
    SEALED = "sealed"
    SIGNED = "signed"
    ISSUED = "issued"
    RETURNED = "returned"
    WITHDRAWN = "withdrawn"
    REPLACED = "replaced"


_STATES = {
    Kind.SIGNED: ReportState.SIGNED,
    Kind.ISSUED: ReportState.ISSUED,
    Kind.RETURNED: ReportState.RETURNED,
    Kind.WITHDRAWN: ReportState.WITHDRAWN,
    Kind.REPLACED: ReportState.REPLACED,
}
_FINAL = (ReportState.REPLACED, ReportState.WITHDRAWN)


@dataclass(frozen=True, slots=True, kw_only=True)
class Standing:
    """The newest word on one report."""

    state: ReportState
    """What it is now; a report once replaced or withdrawn stays so."""
    at: str
    """UTC time."""
    actor: str
    """Who."""
    reason: str
    """Why; empty where none was needed."""
    replaced_by: str
    """Number of the report that replaces it; empty where none does."""

    def words(self) -> str:
        """Return the state in words."""
        return f"replaced by {self.replaced_by}" if self.replaced_by else str(self.state)


def standings(connection: Connection) -> dict[str, Standing]:
    """Return the standing of every report about which more than the seal is recorded."""
    found: dict[str, Standing] = {}
    for entry in _entries(connection):
        facts = entry.facts_object()
        number = str(facts.get("number"))
        before = found.get(number)
        state = _STATES[Kind(entry.kind)]
        if before is not None and before.state in _FINAL and state is not ReportState.REPLACED:
            continue
        found[number] = Standing(
            state=state,
            at=entry.at,
            actor=entry.actor,
            reason=str(facts.get("reason", "")),
            replaced_by=str(facts.get("replaced_by", "")),
        )
    return found


def _entries(connection: Connection) -> Iterable[Entry]:
    found = [e for kind in _STATES for e in ledger.entries(connection, kind=kind)]
    return sorted(found, key=lambda e: e.sequence)
