"""Cells that no table accounts for: below the end, beside the columns."""

from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple

from qcreport.measurements import CellRef
from qcreport.workbook.cells import Cell, Kind, Sheet
from qcreport.workbook.columns import TableColumns
from qcreport.workbook.layout_model import Shape
from qcreport.workbook.notices import NoticeBook
from qcreport.workbook.refusals import cells_in_words, refused


class WalkedTable(NamedTuple):
    """A table after its walk."""

    columns: TableColumns
    """Where its parts stand."""
    end_row: int
    """Last row that was looked at."""
    used_rows: frozenset[int]
    """Rows that were read or left out on purpose."""


def note_stray_cells(
    sheet: Sheet, tables: Sequence[WalkedTable], known_groups: frozenset[str], notices: NoticeBook
) -> None:
    """Note the filled cells in and below the tables of a sheet that were not read.

    Refuses rows below the end of a table that hold a known batch, a sample and a value: they would be lost.
    """
    ordered = sorted(tables, key=lambda table: table.columns.layout.first_row)
    for table in ordered:
        layout = table.columns.layout
        lost: list[CellRef] = []
        for row, cells in sheet.rows.items():
            if not layout.first_row <= row <= table.columns.last_row:
                continue
            if row in table.used_rows:
                _note_beside(sheet, table, row, notices)
            elif not _is_heading_of_next(row, table, ordered):
                refs = [sheet.ref(row, column) for column, cell in cells.items() if not cell.blank]
                notices.add("stray_cells", *refs)
                lost.extend(_lost_value(table, row, cells, known_groups))
        if lost:
            raise refused(
                "layout_mismatch",
                where=cells_in_words(lost),
                found="Rows below the end of the table hold a batch, a sample and a value.",
                expected=f"The layout says that {layout.blank_rows_end} blank rows end the table.",
                next_step='Close the gap, or state end = "sheet" in the layout.',
                cells=[str(ref) for ref in lost],
            )


def _is_heading_of_next(row: int, table: WalkedTable, ordered: Sequence[WalkedTable]) -> bool:
    """Return whether a row holds the caption of the next table: one line directly above its heading."""
    following = [
        other.columns.layout for other in ordered if other.columns.layout.first_row > table.end_row + 1
    ]
    tops = [min((*layout.header_rows, layout.first_row)) for layout in following]
    return any(0 < top - row <= 3 for top in tops)


def _note_beside(sheet: Sheet, table: WalkedTable, row: int, notices: NoticeBook) -> None:
    """Note cells of a table's row that stand under no heading, or in a further column of batches."""
    columns = table.columns
    if not columns.layout.header_rows:
        return
    wide = columns.layout.shape is Shape.WIDE
    own = {*columns.sources.values(), *(c for _, value_columns in columns.values for c in value_columns)}
    own.update(value.unit_column for value, _ in columns.values if value.unit_column is not None)
    for column, cell in sheet.rows[row].items():
        if column in own or cell.blank or (not wide and column in columns.headings.texts):
            continue
        notices.add("stray_cells", sheet.ref(row, column))


def _lost_value(
    table: WalkedTable, row: int, cells: Sequence[Cell] | object, known_groups: frozenset[str]
) -> list[CellRef]:
    sources, sheet = table.columns.sources, table.columns.sheet
    if "group" not in sources or "sample" not in sources:
        return []
    group, sample = sheet.cell(row, sources["group"]), sheet.cell(row, sources["sample"])
    if group is None or sample is None or group.text.strip().casefold() not in known_groups:
        return []
    values = [c for _, value_columns in table.columns.values for c in value_columns]
    filled = ((column, sheet.cell(row, column)) for column in values)
    return [sheet.ref(row, c) for c, cell in filled if cell is not None and cell.kind is Kind.NUMBER]
