"""The second look: what the first reader found, compared cell by cell with an independent reader.

The two readers share no code: the first is our own scan of the sheet's XML (or of the text), the second is
python-calamine (or pandas). Whatever decides a result is compared both ways, so that a cell which the first
reader lost is found as well as one that it read differently.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Any

from qcreport.errors import ExportRefusedError
from qcreport.measurements import CellRef
from qcreport.workbook.cell_agreement import Agreement
from qcreport.workbook.cells import Book, Cell, Sheet
from qcreport.workbook.columns import TableColumns
from qcreport.workbook.layout_model import TextForm
from qcreport.workbook.notices import NoticeBook
from qcreport.workbook.refusals import cells_in_words, quoted, refused

_LISTED = 5
_NO_SECOND_READER = "there is no second reader for this format"
_SPARSE = "cells lie so far apart that the second reader was not asked"
_CANNOT_OPEN = "the second reader cannot open the file"

Walked = Sequence[tuple[Sheet, Sequence[TableColumns]]]
Difference = tuple[CellRef, str, str]


def take_second_look(
    data: bytes, book: Book, walked: Walked, text: TextForm | None, notices: NoticeBook
) -> None:
    """Compare all cells that count with what an independent reader finds.

    Parameters
    ----------
    data : bytes
        The file as dropped.
    book : Book
        The opened export.
    walked : sequence of (Sheet, tables)
        The sheets that were read, as the first reader found them, with the columns of their tables.
    text : TextForm or None
        How a text export is written.
    notices : NoticeBook
        Told where the comparison was not possible.

    Raises
    ------
    ExportRefusedError
        `readers_disagree`, with the cells and both values.
    """
    if book.limited and not book.is_text:
        notices.add("limited_checks", detail=_NO_SECOND_READER)
        return
    if any(_too_sparse(sheet) for sheet, _ in walked):
        notices.add("limited_checks", detail=_SPARSE)
        return
    records = _second_reader(data, text)
    if records is None:
        notices.add("limited_checks", detail=_CANNOT_OPEN)
        return
    agreement = Agreement(date_1904=book.date_1904)
    differences: list[Difference] = []
    for sheet, tables in walked:
        found = records(sheet.name)
        if found is None:
            notices.add("limited_checks", detail=_CANNOT_OPEN)
            return
        differences.extend(_compare(sheet, _columns(tables), found, agreement))
    if differences:
        raise _refuse(differences)


def _too_sparse(sheet: Sheet) -> bool:
    """Return whether the second reader, which allocates the whole range, would need far too much for it."""
    rows, columns = sheet.extent
    return rows * columns > max(1_000_000, 4 * sheet.rows.n_cells())


def _second_reader(data: bytes, text: TextForm | None) -> Any:
    from qcreport.workbook.second_reader import read_text, read_workbook

    return read_workbook(data) if text is None else read_text(data, text)


def _columns(tables: Sequence[TableColumns]) -> tuple[int, ...]:
    """Return the columns that decide results: labels, values and units of all tables of a sheet."""
    wanted: set[int] = set()
    for table in tables:
        wanted.update(table.sources.values())
        for value, columns in table.values:
            wanted.update(columns)
            if value.unit_column is not None:
                wanted.add(value.unit_column)
    return tuple(sorted(wanted))


def _compare(
    sheet: Sheet, columns: Sequence[int], records: Iterator[tuple[int, Sequence[Any]]], agreement: Agreement
) -> list[Difference]:
    """Return the differing cells; `records` holds all rows from the first on."""
    differences: list[Difference] = []
    agrees, last = agreement.agrees, 0
    for last, (shift, record) in enumerate(records, start=1):
        cells, width = sheet.rows.filled(last), len(record)
        for column in columns:
            place = column - shift - 1
            other = record[place] if 0 <= place < width else ""
            cell = cells.get(column)
            if not agrees(cell, other):
                differences.append(_difference(sheet, last, column, cell, other))
    for row in sheet.rows:
        if row > last:
            for column in columns:
                if not agrees(cell := sheet.rows.cell(row, column), ""):
                    differences.append(_difference(sheet, row, column, cell, ""))
    return differences


def _difference(sheet: Sheet, row: int, column: int, cell: Cell | None, other: Any) -> Difference:
    return sheet.ref(row, column), cell.text if cell is not None else "", str(other)


def _refuse(differences: Sequence[Difference]) -> ExportRefusedError:
    cells = [ref for ref, _, _ in differences]
    listed = "; ".join(
        f"{ref}: {_shown(first)} and {_shown(second)}" for ref, first, second in differences[:_LISTED]
    )
    more = f"; and {len(differences) - _LISTED} more" if len(differences) > _LISTED else ""
    return refused(
        "readers_disagree",
        where=cells_in_words(cells),
        found=f"Two independent readers find different contents: {listed}{more}.",
        expected="The same content by both readers.",
        next_step="Open the file in the spreadsheet program, save it as a new .xlsx and drop that; keep this "
        "file for whoever looks after the instrument's software.",
        cells=[str(ref) for ref in cells],
    )


def _shown(text: str) -> str:
    return quoted(text) if text else "nothing"
