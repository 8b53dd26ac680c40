"""Runs in the database: one row a run key, one number a row."""

from __future__ import annotations

import json
from typing import Any

from sqlalchemy import ColumnElement, Connection, RowMapping, func, insert, select, update

from qcreport.canonical import to_json_bytes
from qcreport.errors import LedgerError
from qcreport.records.chain import Head
from qcreport.records.facts import clean_text
from qcreport.records.run import Answers, Run, RunInputs, Sealing, inputs_from_json, run_key
from qcreport.records.tables import RUN


def by_key(connection: Connection, key: str) -> Run | None:
    """Return the run of a run key."""
    return _one(connection, RUN.c.run_key == key)


def by_number(connection: Connection, number: str) -> Run | None:
    """Return the run of a report number."""
    return _one(connection, RUN.c.number == number)


def by_report(connection: Connection, report_sha256: str) -> Run | None:
    """Return the run whose sealed report has this digest."""
    return _one(connection, RUN.c.report_sha256 == report_sha256)


def of_export(connection: Connection, export_sha256: str, plan_name: str | None = None) -> tuple[Run, ...]:
    """Return the runs over an export, in order of number; with `plan_name` those by that plan."""
    where = [RUN.c.export_sha256 == export_sha256]
    if plan_name is not None:
        where.append(RUN.c.plan_name == clean_text(plan_name))
    return _many(connection, *where)


def all_runs(connection: Connection) -> tuple[Run, ...]:
    """Return every run, in order of number."""
    return _many(connection)


def next_number(connection: Connection, year: int) -> tuple[int, str]:
    """Return the next serial of a year and its report number."""
    query = select(func.coalesce(func.max(RUN.c.serial), 0)).where(RUN.c.year == year)
    serial = int(connection.execute(query).scalar_one()) + 1
    return serial, f"{year:04d}-{serial:04d}"


def where(connection: Connection, *conditions: ColumnElement[bool]) -> tuple[Run, ...]:
    """Return the runs that meet every condition on the table, in order of number."""
    return _many(connection, *conditions)


def insert_reserved(
    connection: Connection,
    *,
    inputs: RunInputs,
    export_name: str,
    plan_name: str,
    reason: str,
    year: int,
    serial: int,
    number: str,
    k: int,
    made_at: str,
    ledger_head: Head,
    context_sha256: str,
) -> None:
    """Write a reservation."""
    row: dict[str, Any] = {
        "number": number,
        "year": year,
        "serial": serial,
        "run_key": run_key(inputs),
        "export_sha256": inputs.export_sha256,
        "export_name": clean_text(export_name),
        "plan_name": clean_text(plan_name),
        "inputs": to_json_bytes(inputs.to_json()).decode("utf-8"),
        "k": k,
        "reason": clean_text(reason),
        "made_at": made_at,
        "ledger_sequence": ledger_head.sequence,
        "ledger_hash": ledger_head.entry_hash,
        "context_sha256": context_sha256,
    }
    connection.execute(insert(RUN).values(row))


def set_compared(connection: Connection, number: str, *, result_sha256: str, answers: Answers) -> None:
    """Write what a reserved run found."""
    text = to_json_bytes([list(answer) for answer in answers]).decode("utf-8")
    statement = update(RUN).where(RUN.c.number == number)
    connection.execute(statement.values(result_sha256=result_sha256, answers=text))


def set_sealed(
    connection: Connection, number: str, *, report_name: str, report_sha256: str, sealed_at: str
) -> None:
    """Write that a run's report is sealed and published; from then on the row never changes."""
    values = {
        "report_name": clean_text(report_name),
        "report_sha256": report_sha256,
        "sealed_at": sealed_at,
    }
    connection.execute(update(RUN).where(RUN.c.number == number).values(values))


def _one(connection: Connection, where: ColumnElement[bool]) -> Run | None:
    found = _many(connection, where)
    return found[0] if found else None


def _many(connection: Connection, *where: ColumnElement[bool]) -> tuple[Run, ...]:
    query = select(RUN).where(*where).order_by(RUN.c.year, RUN.c.serial)
    return tuple(_run(row) for row in connection.execute(query).mappings())


def _run(row: RowMapping) -> Run:
    try:
        inputs = inputs_from_json(json.loads(row["inputs"]))
        answers = tuple((name, code) for name, code in json.loads(row["answers"] or "[]"))
    except (ValueError, KeyError, TypeError, AttributeError) as error:
        raise LedgerError(f"The record of run {row['number']} is damaged: {error}.") from error
    return Run(
        number=row["number"],
        key=row["run_key"],
        inputs=inputs,
        export_name=row["export_name"],
        plan_name=row["plan_name"],
        k=row["k"],
        reason=row["reason"],
        made_at=row["made_at"],
        ledger_head=Head(sequence=row["ledger_sequence"], entry_hash=row["ledger_hash"]),
        context_sha256=row["context_sha256"],
        result_sha256=row["result_sha256"],
        answers=answers,
        sealing=_sealing(row),
    )


def _sealing(row: RowMapping) -> Sealing | None:
    if row["sealed_at"] is None:
        return None
    return Sealing(
        result_sha256=row["result_sha256"],
        report_name=row["report_name"],
        report_sha256=row["report_sha256"],
        sealed_at=row["sealed_at"],
    )
