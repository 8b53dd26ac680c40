"""The status column: rows that count and rows that do not."""

from __future__ import annotations

from collections.abc import Sequence

from qcreport.errors import ExportRefusedError
from qcreport.workbook.layout_model import Layout, StatusColumn
from qcreport.workbook.notices import NoticeBook
from qcreport.workbook.readings import Reading
from qcreport.workbook.refusals import quoted, refused


def without_excluded(readings: Sequence[Reading], layout: Layout, notices: NoticeBook) -> list[Reading]:
    """Return the readings that count by their status; refuse a status that the layout does not know."""
    columns = {
        index: (table.status, _words(table.status.use), _words(table.status.exclude))
        for index, table in enumerate(layout.tables)
        if table.status is not None
    }
    kept: list[Reading] = []
    for reading in readings:
        rule = columns.get(reading.table)
        if rule is None:
            kept.append(reading)
            continue
        column, use, exclude = rule
        status = (reading.status or "").strip().casefold()
        if status in exclude or (use and not exclude and status not in use):
            if reading.cell is not None:
                notices.add("status_excluded", reading.ref)
        elif not use or status in use:
            kept.append(reading)
        else:
            raise _unknown_status(reading, column)
    return kept


def _words(texts: Sequence[str]) -> frozenset[str]:
    return frozenset(text.strip().casefold() for text in texts)


def _unknown_status(reading: Reading, column: StatusColumn) -> ExportRefusedError:
    known = ", ".join(quoted(text) for text in (*column.use, *column.exclude))
    found = f"The status is {quoted(reading.status)}." if reading.status else "The status is empty."
    place = column.source.column
    ref = reading.sheet.ref(reading.row, place) if place is not None else reading.ref
    return refused(
        "layout_mismatch",
        where=str(ref),
        found=found,
        expected=f"The layout knows {known}.",
        next_step="Correct the status, or state in the layout whether such rows count.",
        cells=[str(ref)],
    )
