"""The ledger in the database: appended to, read, never changed."""

from __future__ import annotations

import json
from collections.abc import Iterator
from dataclasses import dataclass

from sqlalchemy import Connection, RowMapping, insert, select

from qcreport.records.chain import EMPTY_HEAD, Entry, Head, Kind, entry_hash
from qcreport.records.facts import Facts, canonical_facts, clean_text
from qcreport.records.tables import LEDGER, ONCE


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """A step of handling one claim, by which its entry is written once however often the step is repeated."""

    claim: str
    """The claim's own id."""
    subject: str = ""
    """What tells steps of one kind apart within a claim: a plan, a number."""


def head(connection: Connection) -> Head:
    """Return the newest entry's number and hash."""
    query = select(LEDGER.c.sequence, LEDGER.c.entry_hash).order_by(LEDGER.c.sequence.desc()).limit(1)
    row = connection.execute(query).one_or_none()
    return EMPTY_HEAD if row is None else Head(sequence=row.sequence, entry_hash=row.entry_hash)


def append(
    connection: Connection, *, at: str, actor: str, kind: Kind, facts: Facts, step: Step | None = None
) -> Entry:
    """Append an entry and return it; where the same step wrote one before, return that one.

    The connection must come from `Database.write`: BEGIN IMMEDIATE keeps two processes from reading the same
    head, so they keep one chain.

    Raises
    ------
    LedgerError
        For facts with floats or other things JSON does not have.
    """
    if step is not None:
        earlier = entry_of(connection, kind, step)
        if earlier is not None:
            return earlier
    previous = head(connection)
    entry = _sealed_entry(previous, at=at, actor=clean_text(actor), kind=kind, facts=canonical_facts(facts))
    columns = ("sequence", "at", "actor", "kind", "facts", "previous_hash", "entry_hash")
    connection.execute(insert(LEDGER).values({name: getattr(entry, name) for name in columns}))
    if step is not None:
        row = {"claim": step.claim, "kind": kind.value, "subject": step.subject, "sequence": entry.sequence}
        connection.execute(insert(ONCE).values(row))
    return entry


def entries(
    connection: Connection,
    *,
    after: int = 0,
    kind: Kind | None = None,
    since: str | None = None,
    until: str | None = None,
) -> Iterator[Entry]:
    """Yield entries in order: those numbered above `after`, of one kind, with `since` <= time < `until`."""
    query = select(LEDGER).where(LEDGER.c.sequence > after).order_by(LEDGER.c.sequence)
    if kind is not None:
        query = query.where(LEDGER.c.kind == kind.value)
    if since is not None:
        query = query.where(LEDGER.c.at >= since)
    if until is not None:
        query = query.where(LEDGER.c.at < until)
    for row in connection.execute(query).mappings():
        yield _entry(row)


def entry_of(connection: Connection, kind: Kind, step: Step) -> Entry | None:
    """Return the entry that a step wrote, or None."""
    query = (
        select(LEDGER)
        .join(ONCE, ONCE.c.sequence == LEDGER.c.sequence)
        .where(ONCE.c.claim == step.claim, ONCE.c.kind == kind.value, ONCE.c.subject == step.subject)
    )
    row = connection.execute(query).mappings().one_or_none()
    return None if row is None else _entry(row)


def _sealed_entry(previous: Head, *, at: str, actor: str, kind: Kind, facts: str) -> Entry:
    sequence = previous.sequence + 1
    return Entry(
        sequence=sequence,
        at=at,
        actor=actor,
        kind=kind.value,
        facts=facts,
        previous_hash=previous.entry_hash,
        entry_hash=entry_hash(
            sequence=sequence,
            at=at,
            actor=actor,
            kind=kind.value,
            facts=json.loads(facts),
            previous_hash=previous.entry_hash,
        ),
    )


def _entry(row: RowMapping) -> Entry:
    return Entry(
        sequence=row["sequence"],
        at=row["at"],
        actor=row["actor"],
        kind=row["kind"],
        facts=row["facts"],
        previous_hash=row["previous_hash"],
        entry_hash=row["entry_hash"],
    )
