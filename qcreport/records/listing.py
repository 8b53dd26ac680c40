"""Lists for people: the reports, and the refusals that nobody has mended yet."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum

from sqlalchemy import Connection, select

from qcreport.records import ledger, runs
from qcreport.records.chain import Kind
from qcreport.records.run import Answers
from qcreport.records.tables import EXPORT, REFUSAL


class ReportState(StrEnum):
    """How far a run has come."""

    RESERVED = "reserved"
    SEALED = "sealed"


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
    """… of n over this export by this plan, as known today."""
    reason: str
    """Why it was run again."""
    answers: Answers
    """Empty while nothing was compared."""
    state: ReportState
    """Whether a report exists."""
    report_name: str | None
    """File name in `reports/`."""
    sealed_at: str | None
    """UTC time of the record of the seal."""


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


def reports(connection: Connection) -> tuple[ReportRow, ...]:
    """Return one row a run, in order of number."""
    found = runs.all_runs(connection)
    totals: dict[tuple[str, str], int] = {}
    for run in found:
        key = (run.inputs.export_sha256, run.plan_name)
        totals[key] = totals.get(key, 0) + 1
    received = {
        row.sha256: row.received_at
        for row in connection.execute(select(EXPORT.c.sha256, EXPORT.c.received_at))
    }
    return tuple(
        ReportRow(
            number=run.number,
            received_at=received.get(run.inputs.export_sha256, ""),
            export_name=run.export_name,
            export_sha256=run.inputs.export_sha256,
            plan_name=run.plan_name,
            k=run.k,
            n=totals[run.inputs.export_sha256, run.plan_name],
            reason=run.reason,
            answers=run.answers,
            state=ReportState.RESERVED if run.sealing is None else ReportState.SEALED,
            report_name=None if run.sealing is None else run.sealing.report_name,
            sealed_at=None if run.sealing is None else run.sealing.sealed_at,
        )
        for run in found
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
    for kind in (Kind.READ, Kind.DUPLICATE):
        for entry in ledger.entries(connection, kind=kind):
            facts = entry.facts_object()
            for name in (facts.get("name"), facts.get("export_sha256")):
                for plan in (facts.get("plan"), ""):
                    key = (str(name), str(plan))
                    last[key] = max(last.get(key, 0), entry.sequence)
    return last
