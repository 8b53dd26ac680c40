"""Which exports hold the same data, and what was computed over them."""

from __future__ import annotations

from sqlalchemy import ColumnElement, Connection, func, insert, select

from qcreport.records import runs
from qcreport.records.facts import clean_text
from qcreport.records.run import Run, RunInputs, run_key
from qcreport.records.tables import CONTENT, RUN, TRIAL


def note_content(connection: Connection, export_sha256: str, layout_sha256: str, content: str | None) -> None:
    """Keep what an export holds as a layout reads it; None, where exports are not joined, is not kept."""
    if content is None or content_of(connection, export_sha256, layout_sha256) is not None:
        return
    row = {"export_sha256": export_sha256, "layout_sha256": layout_sha256, "content_sha256": content}
    connection.execute(insert(CONTENT).values(row))


def content_of(connection: Connection, export_sha256: str, layout_sha256: str) -> str | None:
    """Return the digest of what an export holds as a layout reads it, or None where that is not known."""
    c = CONTENT.c
    query = select(c.content_sha256).where(c.export_sha256 == export_sha256, c.layout_sha256 == layout_sha256)
    return connection.execute(query).scalar_one_or_none()


def runs_over(connection: Connection, export_sha256: str, plan_name: str) -> tuple[Run, ...]:
    """Return the runs by a plan over an export and over every other that holds the same, in order of k."""
    found = runs.where(
        connection, RUN.c.plan_name == clean_text(plan_name), _same(RUN.c.export_sha256, export_sha256)
    )
    return tuple(sorted(found, key=lambda run: run.k))


def next_k(connection: Connection, export_sha256: str, plan_name: str) -> int:
    """Return k of the next run over the same data by a plan."""
    query = select(func.coalesce(func.max(RUN.c.k), 0)).where(
        RUN.c.plan_name == clean_text(plan_name), _same(RUN.c.export_sha256, export_sha256)
    )
    return int(connection.execute(query).scalar_one()) + 1


def trials_over(connection: Connection, inputs: RunInputs, plan_name: str) -> int:
    """Return under how many other settings the same data were computed by a plan without a report."""
    query = select(func.count(TRIAL.c.run_key.distinct())).where(
        TRIAL.c.plan_name == clean_text(plan_name),
        TRIAL.c.run_key != run_key(inputs),
        _same(TRIAL.c.export_sha256, inputs.export_sha256),
    )
    return int(connection.execute(query).scalar_one())


def _same(column: ColumnElement[str], export_sha256: str) -> ColumnElement[bool]:
    """Return the condition that a column names this export or one that holds the same."""
    contents = select(CONTENT.c.content_sha256).where(CONTENT.c.export_sha256 == export_sha256)
    exports = select(CONTENT.c.export_sha256).where(CONTENT.c.content_sha256.in_(contents))
    return (column == export_sha256) | column.in_(exports)
