"""Lists for people: the reports, and the refusals that nobody has mended yet."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from sqlalchemy import ColumnElement, Connection, insert, select

from qcreport.measurements import MeasurementSet
from qcreport.records import ledger, runs
from qcreport.records.chain import Kind
from qcreport.records.facts import clean_text
from qcreport.records.run import Answers, Run
from qcreport.records.standing import ReportState, Standing, standings
from qcreport.records.tables import CONTENT, EXPORT, REFUSAL, RUN_GROUP

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
    """Return one row a run, in order of number."""
    found = runs.all_runs(connection)
    data = _pairs(connection, CONTENT.c.export_sha256, CONTENT.c.content_sha256)
    keys = {
        run.number: (data.get(run.inputs.export_sha256, run.inputs.export_sha256), run.plan_name)
        for run in found
    }
    totals: dict[tuple[str, str], int] = {}
    for run in found:
        totals[keys[run.number]] = max(totals.get(keys[run.number], 0), run.k)
    received = _pairs(connection, EXPORT.c.sha256, EXPORT.c.received_at)
    after = standings(connection)
    groups = _numbers_of_groups(connection, wanted)
    rows = (
        _row(run, received.get(run.inputs.export_sha256, ""), totals[keys[run.number]], after.get(run.number))
        for run in found
        if groups is None or run.number in groups
    )
    return tuple(row for row in rows if _fits(row, wanted))


def _row(run: Run, received_at: str, n: int, standing: Standing | None) -> ReportRow:
    sealing = run.sealing
    state = ReportState.RESERVED if sealing is None else ReportState.SEALED
    return ReportRow(
        number=run.number,
        received_at=received_at,
        export_name=run.export_name,
        export_sha256=run.inputs.export_sha256,
        plan_name=run.plan_name,
        k=run.k,
        n=n,
        reason=run.reason,
        answers=run.answers,
        state=state if standing is None else standing.state,
        report_name=None if sealing is None else sealing.report_name,
        sealed_at=None if sealing is None else sealing.sealed_at,
        left_out=run.inputs.left_out,
        replaces=run.inputs.replaces,
        replaced_by="" if standing is None else standing.replaced_by,
        state_reason="" if standing is None else standing.reason,
    )


def _data(run: Run, contents: dict[str, str]) -> str:
    """Return what a run was made over, so that re-saved workbooks count as one."""
    return contents.get(run.inputs.export_sha256, run.inputs.export_sha256)


def _pairs(connection: Connection, key: ColumnElement[str], value: ColumnElement[str]) -> dict[str, str]:
    return {row[0]: row[1] for row in connection.execute(select(key, value))}


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
    mended = _last_readings(connection)
    newest: dict[tuple[str, str], OpenRefusal] = {}
    for row in connection.execute(select(REFUSAL).order_by(REFUSAL.c.sequence)):
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
    last: dict[tuple[str, str], int] = {}
    for kind in (Kind.READ, Kind.DUPLICATE, Kind.IMPORTED):
        for entry in ledger.entries(connection, kind=kind):
            facts = entry.facts_object()
            for name in (facts.get("name"), facts.get("export_sha256")):
                for plan in (facts.get("plan"), ""):
                    key = (str(name), str(plan))
                    last[key] = max(last.get(key, 0), entry.sequence)
    return last
