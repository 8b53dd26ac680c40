"""Writing to the records: one transaction, its time, its ledger entry."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager

from sqlalchemy import Connection

from qcreport.errors import LedgerError
from qcreport.records import ledger
from qcreport.records.archive import Archive
from qcreport.records.chain import Entry, Kind
from qcreport.records.database import Database
from qcreport.records.facts import Facts
from qcreport.records.ledger import Step
from qcreport.records.lookups import Lookups
from qcreport.records.moments import Clock, utc_text


class Writer(Lookups):
    """What every part of the records that writes has in common."""

    def __init__(self, *, database: Database, archive: Archive, clock: Clock) -> None:
        super().__init__(database=database, archive=archive)
        self._clock = clock

    def note(self, kind: Kind, facts: Facts, *, actor: str, step: Step | None = None) -> Entry:
        """Append an entry that changes no other table."""
        with self._moment() as (connection, now):
            return self._append(connection, now, kind, facts, actor, step)

    @contextmanager
    def _moment(self) -> Iterator[tuple[Connection, str]]:
        """Begin a writing transaction and take its time inside, so that entries are in order of time."""
        with self.database.write() as connection:
            yield connection, utc_text(self._clock())

    def _append(
        self,
        connection: Connection,
        now: str,
        kind: Kind,
        facts: Facts,
        actor: str,
        step: Step | None = None,
    ) -> Entry:
        return ledger.append(connection, at=now, actor=actor, kind=kind, facts=facts, step=step)

    def _require_archived(self, sha256: str) -> None:
        if not self.archive.has(sha256):
            raise LedgerError(f"{sha256} is not in the archive; bytes are kept before they are recorded.")
