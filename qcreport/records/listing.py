"""Lists for people: the reports, and the refusals that nobody has mended yet."""

from __future__ import annotations

import json
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Any

from sqlalchemy import Connection, func, insert, select

from qcreport.errors import LedgerError
from qcreport.measurements import MeasurementSet
from qcreport.records.chain import Kind
from qcreport.records.facts import clean_text
from qcreport.records.run import Answers
from qcreport.records.standing import ReportState, Standing, standings
from qcreport.records.tables import CONTENT, EXPORT, LEDGER, REFUSAL, RUN, RUN_GROUP

__all__ = ["EVERYTHING", "OpenRefusal", "ReportRow", "ReportState", "Wanted", "open_refusals", "reports"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Wanted:
    """Which reports are listed; None and "" mean any."""

    since: str | None = None
    """UTC time; received then or later."""
    until: str | None = None
    """UTC time; received before."""
    line: str = ""
    """A line it compares."""
    batch: str = ""
    """A batch it compares."""
    characteristic: str = ""
    """A characteristic it compares."""
    answer: str = ""
    """An answer code that one of its characteristics has; of `characteristic` where that is given."""
    state: str = ""
    """Its state today."""


EVERYTHING = Wanted()


@dataclass(frozen=True, slots=True, kw_only=True)
class ReportRow:
    """One line of the list of reports."""

    number: str
    """`YYYY-NNNN`."""
    received_at: str
    """UTC time at which the export was first received."""
    export_name: str
    """File name as dropped."""
    export_sha256: str
    """Digest of the export."""
    plan_name: str
    """Name in the plan."""
    k: int
    """This is run k …"""
    n: int
    """… of n over the same data by this plan, as known today."""
    reason: str
    """Why it was run again."""
    answers: Answers
    """Empty while nothing was compared."""
    state: ReportState
    """What it is today."""
    report_name: str | None
    """File name in `reports/`."""
    sealed_at: str | None
    """UTC time of the record of the seal."""
    left_out: tuple[str, ...]
    """Cells that a person left out."""
    replaces: str
    """Number of the report it replaces; empty where none."""
    replaced_by: str
    """Number of the report that replaces it; empty where none."""
    state_reason: str
    """Why it was returned, withdrawn or replaced."""


@dataclass(frozen=True, slots=True, kw_only=True)
class OpenRefusal:
    """A refusal after which the export was not read under its name."""

    name: str
    """File name as dropped."""
    plan_name: str
    """The plan by which it was refused; empty where no plan was asked."""
    code: str
    """Code of the refusal."""
    text: str
    """Why."""
    folder: str
    """Folder in `refused/`."""
    refused_at: str
    """UTC time."""


def note_groups(connection: Connection, number: str, measurements: MeasurementSet) -> None:
    """Keep which lines, batches and characteristics a report compares."""
    found = dict.fromkeys(
        (clean_text(m.characteristic), clean_text(m.line or ""), clean_text(m.batch))
        for m in measurements.measurements
    )
    rows = [{"number": number, "characteristic": c, "line": line, "batch": b} for c, line, b in found]
    if rows:
        connection.execute(insert(RUN_GROUP), rows)


def reports(connection: Connection, wanted: Wanted = EVERYTHING) -> tuple[ReportRow, ...]:
    """Return one row a run, in order of number.

    Plain rows instead of whole runs: a list of ten thousand must come within a second.
    """
    after = standings(connection)
    totals = _totals(connection)
    groups = _numbers_of_groups(connection, wanted)
    query = select(*_COLUMNS).outerjoin(EXPORT, EXPORT.c.sha256 == RUN.c.export_sha256)
    found = []
    for row in connection.execute(query.order_by(RUN.c.year, RUN.c.serial)):
        if groups is None or row[0] in groups:
            listed = _row(tuple(row), totals, after.get(row[0]))
            if _fits(listed, wanted):
                found.append(listed)
    return tuple(found)


_COLUMNS = (
    RUN.c.number,
    EXPORT.c.received_at,
    RUN.c.export_name,
    RUN.c.export_sha256,
    RUN.c.plan_name,
    RUN.c.k,
    RUN.c.reason,
    RUN.c.answers,
    RUN.c.report_name,
    RUN.c.sealed_at,
    RUN.c.inputs,
)


def _row(row: Sequence[Any], totals: _Totals, standing: Standing | None) -> ReportRow:
    number, received_at, name, export, plan, k, reason, answers, report, sealed_at, inputs = row
    state = ReportState.RESERVED if sealed_at is None else ReportState.SEALED
    try:
        decided = json.loads(inputs) if '"left_out"' in inputs or '"replaces"' in inputs else {}
        answered = tuple((found, code) for found, code in json.loads(answers or "[]"))
    except (ValueError, TypeError) as error:
        raise LedgerError(f"The record of run {number} is damaged: {error}.") from error
    return ReportRow(
        number=number,
        received_at=received_at or "",
        export_name=name,
        export_sha256=export,
        plan_name=plan,
        k=k,
        n=totals.of(export, plan),
        reason=reason,
        answers=answered,
        state=state if standing is None else standing.state,
        report_name=report,
        sealed_at=sealed_at,
        left_out=tuple(decided.get("left_out", ())),
        replaces=decided.get("replaces", ""),
        replaced_by="" if standing is None else standing.replaced_by,
        state_reason="" if standing is None else standing.reason,
    )


@dataclass(frozen=True, slots=True)
class _Totals:
    """How many runs there are over the same data by the same plan, where there is more than one."""

    content: dict[str, str]
    highest: dict[tuple[str, str], int]

    def of(self, export: str, plan: str) -> int:
        return self.highest.get((self.content.get(export, export), plan), 1)


def _totals(connection: Connection) -> _Totals:
    """Return the totals; re-saved workbooks that hold the same count as one."""
    again = select(RUN.c.export_sha256, RUN.c.plan_name, RUN.c.k).where(RUN.c.k > 1)
    rows = connection.execute(again).all()
    contents = select(CONTENT.c.export_sha256, CONTENT.c.content_sha256)
    content = {row[0]: row[1] for row in connection.execute(contents)} if rows else {}
    highest: dict[tuple[str, str], int] = {}
    for export, plan, k in rows:
        key = (content.get(export, export), plan)
        highest[key] = max(highest.get(key, 1), k)
    return _Totals(content, highest)


def _numbers_of_groups(connection: Connection, wanted: Wanted) -> frozenset[str] | None:
    """Return the reports that compare what is wanted; None where any will do."""
    c = RUN_GROUP.c
    asked = ((c.line, wanted.line), (c.batch, wanted.batch), (c.characteristic, wanted.characteristic))
    conditions = [column == value for column, value in asked if value]
    if not conditions:
        return None
    return frozenset(connection.execute(select(c.number).where(*conditions)).scalars())


def _fits(row: ReportRow, wanted: Wanted) -> bool:
    answers: Iterator[tuple[str, str]] = (
        a for a in row.answers if not wanted.characteristic or a[0] == wanted.characteristic
    )
    return (
        (wanted.since is None or row.received_at >= wanted.since)
        and (wanted.until is None or row.received_at < wanted.until)
        and (not wanted.state or row.state == wanted.state)
        and (not wanted.answer or any(code == wanted.answer for _, code in answers))
    )


def open_refusals(connection: Connection) -> tuple[OpenRefusal, ...]:
    """Return the newest refusal of each name and plan, unless the export was read afterwards.

    Mended means read later, as the same bytes (the settings were mended) or under the same name (the export
    was); a refusal by one plan is not mended by what another plan can read.
    """
    refused = connection.execute(select(REFUSAL).order_by(REFUSAL.c.sequence)).all()
    if not refused:
        return ()
    mended = _last_readings(connection)
    newest: dict[tuple[str, str], OpenRefusal] = {}
    for row in refused:
        newest.pop((row.name, row.plan), None)
        names = (row.name, row.export_sha256)
        if any(mended.get((name, row.plan), 0) > row.sequence for name in names if name):
            continue
        newest[row.name, row.plan] = OpenRefusal(
            name=row.name,
            plan_name=row.plan,
            code=row.code,
            text=row.text,
            folder=row.folder,
            refused_at=row.refused_at,
        )
    return tuple(newest.values())


def _last_readings(connection: Connection) -> dict[tuple[str, str], int]:
    """Return the last entry that read or recognised a name or digest, by plan and (plan "") by any."""
    fields = [func.json_extract(LEDGER.c.facts, f"$.{field}") for field in ("name", "export_sha256", "plan")]
    query = select(LEDGER.c.sequence, *fields).where(LEDGER.c.kind.in_([str(kind) for kind in _READ]))
    last: dict[tuple[str, str], int] = {}
    for sequence, name, sha256, plan in connection.execute(query.order_by(LEDGER.c.sequence)):
        for known in (name, sha256):
            last[str(known), str(plan)] = last[str(known), ""] = sequence
    return last


_READ = (Kind.READ, Kind.DUPLICATE, Kind.IMPORTED)
