"""The names that belong to a row: batch, line, sample, number of the reading, time, status, factors, unit."""

from __future__ import annotations

from qcreport.errors import ExportRefusedError
from qcreport.measurements import CellRef
from qcreport.workbook.cells import Book, Cell, Kind
from qcreport.workbook.columns import TableColumns, named_sources
from qcreport.workbook.group_cells import GroupCells
from qcreport.workbook.layout_model import Source, SourceKind, UnitFrom, ValueLayout
from qcreport.workbook.notices import NoticeBook
from qcreport.workbook.readings import AnyLabel, Label, LabelPool, plain_text
from qcreport.workbook.refusals import quoted, refused
from qcreport.workbook.sheet_xml import is_stored_number


class RowLabels:
    """Reads the names of the rows of one table."""

    def __init__(self, book: Book, table: TableColumns, file: str, notices: NoticeBook) -> None:
        self._book, self._table, self._sheet = book, table, table.sheet
        self._file = file
        self._sources = named_sources(table.layout)
        self._constants: dict[str, Label | None] = {
            name: self._constant(name, source)
            for name, source in self._sources.items()
            if name not in table.sources and source.kind is not SourceKind.HEADER_CELLS
        }
        self._pool = LabelPool()
        self._groups = GroupCells(book, table, notices, self._pool)
        self._at = 0
        self._of_row: dict[str, AnyLabel | None] = {}

    def _constant(self, name: str, source: Source) -> Label | None:
        """Return a name that is the same for all rows of the sheet."""
        if source.kind is SourceKind.CONSTANT:
            return Label(source.constant or "")
        if source.kind is SourceKind.CELL and source.row is not None and source.column is not None:
            text = self._text(self._sheet.cell(source.row, source.column))
            if text is None:
                raise _refuse_empty_cell(name, self._sheet.ref(source.row, source.column))
            return Label(text, (self._sheet.name, source.row, source.column))
        whole = self._file if source.kind is SourceKind.FILE_NAME else self._sheet.name or ""
        if source.pattern is None:
            return Label(whole)
        found = source.pattern.search(whole)
        text = (found.group(1) if found.re.groups else found.group(0)) if found else None
        if not text or not text.strip():
            raise _refuse_pattern(name, whole, source.pattern.pattern)
        return Label(text.strip())

    def _text(self, cell: Cell | None) -> str | None:
        shown = None
        if cell is not None and cell.kind is Kind.NUMBER and is_stored_number(cell.text):
            shown = self._book.number_format(cell).shown(cell.text)
        return plain_text(cell, shown)

    def _cell(self, name: str, row: int) -> Cell | None:
        column = self._table.sources.get(name)
        return self._sheet.cell(row, column) if column is not None else None

    def _label(self, name: str, row: int) -> AnyLabel | None:
        """Return a name of a row; its values share one object."""
        if row != self._at:
            self._at, self._of_row = row, {}
        if name not in self._of_row:
            self._of_row[name] = self._found_label(name, row)
        return self._of_row[name]

    def _found_label(self, name: str, row: int) -> AnyLabel | None:
        column = self._table.sources.get(name)
        if column is None:
            return self._constants.get(name)
        cell = self._sheet.cell(row, column)
        text = self._text(cell)
        if text is None and self._sources[name].repeats_below:
            text = self._groups.above(name)
        elif text is not None and self._sources[name].repeats_below:
            self._groups.remember(name, text)
        return None if text is None else self._pool.label(text, column)

    @property
    def not_text(self) -> list[tuple[CellRef, str]]:
        """Batch cells that hold no text."""
        return self._groups.not_text

    def group(self, row: int) -> AnyLabel | None:
        """Return the batch of a row, or None where there is none."""
        column = self._table.sources.get("group")
        if column is None:
            return self._constants.get("group")
        return self._groups.label(row, column, repeats=self._sources["group"].repeats_below)

    def wide_group(self, column: int) -> Label | None:
        """Return the batch in the heading of a column of a wide table."""
        return self._groups.heading(self._table.layout.header_rows[-1], column)

    def line(self, row: int) -> AnyLabel | None:
        """Return the production line of a row."""
        return self._label("line", row)

    def sample(self, row: int) -> AnyLabel | None:
        """Return the sample of a row."""
        return self._label("sample", row)

    def number(self, row: int) -> str | None:
        """Return the number of the reading in a row."""
        label = self._label("replicate", row)
        return label.text if label is not None else None

    def time(self, row: int) -> tuple[int, Cell] | None:
        """Return (column, cell) of the time of a row."""
        source = self._sources.get("time")
        if source is not None and source.kind is SourceKind.CELL and source.row and source.column:
            fixed = self._sheet.cell(source.row, source.column)
            return (source.column, fixed) if fixed is not None else None
        cell = self._cell("time", row)
        return (self._table.sources["time"], cell) if cell is not None else None

    def status(self, row: int) -> str | None:
        """Return the status of a row."""
        label = self._label("status", row)
        return label.text if label is not None else None

    def factors(self, row: int) -> tuple[tuple[str, str], ...]:
        """Return the levels of the blocking factors of a row."""
        levels = []
        for factor in self._table.layout.factors:
            label = self._label(f"factor:{factor.name}", row)
            if label is not None:
                levels.append((factor.name, label.text))
        return tuple(levels)

    def unit(self, row: int, value: ValueLayout) -> tuple[CellRef, str] | None:
        """Return (cell, unit) that a row states; the unit is blank where the cell is."""
        if value.unit_from is not UnitFrom.COLUMN or value.unit_column is None:
            return None
        text = plain_text(self._sheet.cell(row, value.unit_column)) or ""
        return self._sheet.ref(row, value.unit_column), text


def _refuse_empty_cell(name: str, ref: CellRef) -> ExportRefusedError:
    what = "batch" if name == "group" else name
    return refused(
        "group_missing" if name == "group" else "layout_mismatch",
        where=str(ref),
        found="The cell is empty.",
        expected=f"The layout says that the {what} stands here.",
        next_step="Fill the cell, or change the layout to fit.",
        cells=[str(ref)],
    )


def _refuse_pattern(name: str, text: str, pattern: str) -> ExportRefusedError:
    what = "batch" if name == "group" else name
    return refused(
        "group_missing" if name == "group" else "layout_mismatch",
        where=quoted(text),
        found=f"The name does not hold a {what}.",
        expected=f"The layout finds the {what} by the pattern {quoted(pattern)}.",
        next_step="Name the export as before, or change the pattern in the layout.",
    )
