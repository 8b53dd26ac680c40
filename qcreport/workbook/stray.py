"""Cells that no table accounts for: below the end, beside the columns."""

from __future__ import annotations

from collections.abc import Sequence
from collections.abc import Set as AbstractSet
from typing import NamedTuple

from qcreport.measurements import CellRef
from qcreport.workbook.cells import Kind, Sheet
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
    used_rows: AbstractSet[int]
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
        own = _own_columns(table.columns)
        for row, cells in sheet.rows.items():
            if not layout.first_row <= row <= table.columns.last_row:
                continue
            if row in table.used_rows:
                if own is not None and not cells.keys() <= own:
                    beside = [c for c, cell in cells.items() if c not in own and not cell.blank]
                    _note(notices, [sheet.ref(row, column) for column in beside])
            elif not _is_heading_of_next(row, table, ordered):
                refs = [sheet.ref(row, column) for column, cell in cells.items() if not cell.blank]
                _note(notices, refs)
                lost.extend(_lost_value(table, row, known_groups))
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


def _note(notices: NoticeBook, refs: Sequence[CellRef]) -> None:
    if refs:
        notices.add("stray_cells", *refs)


def _own_columns(columns: TableColumns) -> frozenset[int] | None:
    """Return the columns that a table accounts for; None where it has no headings to tell.

    Any column under a heading is accounted for, except in a wide table, where it may be a further batch.
    """
    if not columns.layout.header_rows:
        return None
    own = {*columns.sources.values(), *(c for _, value_columns in columns.values for c in value_columns)}
    own.update(value.unit_column for value, _ in columns.values if value.unit_column is not None)
    if columns.layout.shape is not Shape.WIDE:
        own.update(columns.headings.texts)
    return frozenset(own)


def _lost_value(table: WalkedTable, row: int, known_groups: frozenset[str]) -> list[CellRef]:
    sources, sheet = table.columns.sources, table.columns.sheet
    if "group" not in sources or "sample" not in sources:
        return []
    group, sample = sheet.cell(row, sources["group"]), sheet.cell(row, sources["sample"])
    if group is None or sample is None or group.text.strip().casefold() not in known_groups:
        return []
    values = [c for _, value_columns in table.columns.values for c in value_columns]
    filled = ((column, sheet.cell(row, column)) for column in values)
    return [sheet.ref(row, c) for c, cell in filled if cell is not None and cell.kind is Kind.NUMBER]
