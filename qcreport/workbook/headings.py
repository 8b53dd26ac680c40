"""Headings of a table: what stands above each column, and whether that is what the layout says."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import islice
from typing import NamedTuple

from qcreport.errors import ExportRefusedError
from qcreport.measurements import CellRef, column_letters
from qcreport.workbook.cells import Kind, Sheet
from qcreport.workbook.layout_model import TableLayout
from qcreport.workbook.refusals import quoted, refused
from qcreport.workbook.units import looks_like_unit, same_unit, unit_in_heading, without_unit

_ROWS_LOOKED_AT = 100


def collapsed(text: str) -> str:
    """Return a text with each run of white space as one space."""
    return " ".join(text.split())


class Headings(NamedTuple):
    """The heading rows of one table, merged cells filled."""

    sheet: Sheet
    """The sheet."""
    rows: tuple[int, ...]
    """1-based heading rows."""
    texts: dict[int, tuple[str, ...]]
    """Column → the different texts above it, top to bottom."""

    def ref(self, column: int) -> CellRef:
        """Return the heading cell of a column that refusals name: the lowest row."""
        return self.sheet.ref(self.rows[-1] if self.rows else 1, column)

    def says(self, column: int, wanted: str) -> bool:
        """Return whether the heading of a column is the wanted text, as a whole or in one of its rows."""
        texts = self.texts.get(column, ())
        return collapsed(wanted) in (" ".join(texts), *texts)

    def columns_saying(self, wanted: str) -> list[int]:
        """Return the columns with a heading."""
        return [column for column in sorted(self.texts) if self.says(column, wanted)]

    def shown(self, column: int) -> str:
        """Return the heading of a column as one text."""
        return " ".join(self.texts.get(column, ()))


def read_headings(sheet: Sheet, table: TableLayout) -> Headings:
    """Return the headings of a table."""
    texts: dict[int, list[str]] = {}
    for row in table.header_rows:
        for column, text in _row_texts(sheet, row).items():
            above = texts.setdefault(column, [])
            if not above or above[-1] != text:
                above.append(text)
    return Headings(sheet, table.header_rows, {column: tuple(found) for column, found in texts.items()})


def _row_texts(sheet: Sheet, row: int) -> dict[int, str]:
    texts = {
        column: collapsed(cell.text)
        for column, cell in sheet.rows.get(row, {}).items()
        if not cell.blank and cell.kind in (Kind.TEXT, Kind.NUMBER)
    }
    for area in sheet.merges:
        if area.first_row <= row <= area.last_row:
            anchor = sheet.cell(area.first_row, area.first_column)
            if anchor is not None:
                columns = range(area.first_column, min(area.last_column, area.first_column + 1000) + 1)
                texts.update(dict.fromkeys(columns, collapsed(anchor.text)))
    return texts


def check_heading(headings: Headings, column: int, wanted: str, *, unit: str | None = None) -> None:
    """Refuse a column whose heading is not what the layout says."""
    if headings.says(column, wanted):
        return
    found = headings.shown(column)
    if unit is not None and found and _differs_in_unit(found, wanted, unit):
        raise refuse_heading_unit(headings, column, found, wanted)
    elsewhere = headings.columns_saying(wanted)
    where = f" {quoted(wanted)} stands in column {column_letters(elsewhere[0])}." if elsewhere else ""
    cells = [headings.ref(c) for c in (column, *elsewhere[:1])]
    if not elsewhere and (lower := find_text(headings.sheet, wanted)) is not None:
        where, cells = f" {quoted(wanted)} stands in {lower}.", [*cells, lower]
    raise refused(
        "layout_mismatch",
        where=str(headings.ref(column)),
        found=(f"The heading is {quoted(found)}." if found else "There is no heading.") + where,
        expected=f"The layout says {quoted(wanted)}.",
        next_step="Export with the columns as before, or change the layout to fit.",
        cells=[str(cell) for cell in cells],
    )


def find_text(sheet: Sheet, wanted: str) -> CellRef | None:
    """Return the one cell near the top of a sheet that holds a text: a heading may have moved up or down."""
    text = collapsed(wanted)
    found = [
        sheet.ref(row, column)
        for row, cells in islice(sheet.rows.items(), _ROWS_LOOKED_AT)
        for column, cell in cells.items()
        if cell.kind is Kind.TEXT and collapsed(cell.text) == text
    ]
    return found[0] if len(found) == 1 else None


def _differs_in_unit(found: str, wanted: str, unit: str) -> bool:
    """Return whether two headings are the same but for the unit in them."""
    found_unit = unit_in_heading(found) or found.rpartition(" ")[2]
    if not looks_like_unit(found_unit) or same_unit(found_unit, unit):
        return False
    return without_unit(found, unit) == without_unit(collapsed(wanted), unit)


def refuse_heading_unit(headings: Headings, column: int, found: str, wanted: str) -> ExportRefusedError:
    """Return the refusal of a heading that states another unit."""
    return refused(
        "unit_conflict",
        where=str(headings.ref(column)),
        found=f"The heading is {quoted(found)}.",
        expected=f"The layout says {quoted(wanted)}.",
        next_step="Export in the unit of the layout, or change unit and margins in layout and plan.",
        cells=[str(headings.ref(column))],
    )


def find_column(headings: Headings, wanted: str) -> int:
    """Return the one column with a heading; refuse where there is none, or more than one."""
    columns = headings.columns_saying(wanted)
    if len(columns) == 1:
        return columns[0]
    if columns:
        raise refuse_ambiguous_column(headings, columns, wanted)
    row = headings.rows[-1] if headings.rows else 1
    lower = find_text(headings.sheet, wanted)
    raise refused(
        "layout_mismatch",
        where=f"row {row}" if headings.sheet.name is None else f"sheet {headings.sheet.name}, row {row}",
        found=f"No column has the heading {quoted(wanted)}." + (f" It stands in {lower}." if lower else ""),
        expected=f"The layout says that there is a column {quoted(wanted)}.",
        next_step="Export with the columns as before, or change the layout to fit.",
        cells=[str(lower)] if lower else [],
    )


def all_differences(refusals: Sequence[ExportRefusedError]) -> ExportRefusedError:
    """Return one refusal that shows everything in which a table differs from its layout."""
    if len(refusals) == 1:
        return refusals[0]
    told = list(dict.fromkeys((r.where, r.found, r.expected) for r in refusals))
    return refused(
        "layout_mismatch",
        where=", ".join(dict.fromkeys(where for where, _, _ in told)),
        found=" ".join(f"{where}: {found}" for where, found, _ in told),
        expected=" ".join(f"{where}: {expected}" for where, _, expected in told),
        next_step=refusals[0].next_step,
        cells=list(dict.fromkeys(cell for refusal in refusals for cell in refusal.cells)),
    )


def refuse_ambiguous_column(headings: Headings, columns: Sequence[int], wanted: str) -> ExportRefusedError:
    """Return the refusal of a heading that stands above more than one column."""
    cells = [str(headings.ref(column)) for column in columns]
    return refused(
        "ambiguous_column",
        where=", ".join(cells),
        found=f"{len(columns)} columns have the heading {quoted(wanted)}.",
        expected="One such column.",
        next_step="Give the columns different headings, or leave one out of the export.",
        cells=cells,
    )
