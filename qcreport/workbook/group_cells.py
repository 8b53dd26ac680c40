"""The cells that name batches: merged ones, repeated ones, and numbers that stand for codes."""

from __future__ import annotations

from collections.abc import Sequence

from qcreport.errors import ExportRefusedError
from qcreport.measurements import CellRef
from qcreport.workbook.cells import Book, Cell, Kind
from qcreport.workbook.columns import TableColumns
from qcreport.workbook.notices import NoticeBook
from qcreport.workbook.readings import AnyLabel, Label, LabelPool, RowLabel
from qcreport.workbook.refusals import cells_in_words, refused, run_ends
from qcreport.workbook.sheet_xml import is_stored_number
from qcreport.workbook.value_refusals import refuse_errors, refuse_uncalculated


class GroupCells:
    """Reads the batch cells of one table; what cannot be a batch is collected and refused at the end."""

    def __init__(self, book: Book, table: TableColumns, notices: NoticeBook, pool: LabelPool) -> None:
        self._book, self._sheet, self._notices, self._pool = book, table.sheet, notices, pool
        self.not_text: list[tuple[CellRef, str]] = []
        self._above: dict[str, str] = {}
        self._last: AnyLabel | None = None
        self._last_row = 0
        self._column_merges: dict[int, bool] = {}
        self._first_row = table.layout.first_row
        self._headings: dict[int, Label | None] = {}

    def remember(self, name: str, text: str) -> None:
        """Keep a name that counts for the rows below it."""
        self._above[name] = text

    def above(self, name: str) -> str | None:
        """Return the name of the rows above that counts for this one too."""
        return self._above.get(name)

    def label(self, row: int, column: int, *, repeats: bool) -> AnyLabel | None:
        """Return the batch of a row: its own cell, the merged cell that covers it, or the one above."""
        cell = self._sheet.cell(row, column)
        if cell is not None:
            plain = cell.kind is Kind.TEXT and not cell.formula
            self._last = self._pool.label(cell.text, column) if plain else self._read(cell, row, column)
            self._last_row = row
            return self._last
        merged = self._merged(row, column)
        if merged is not None:
            self._notices.add("merged_group_filled", self._sheet.ref(row, column))
            return merged
        if not repeats or self._last is None or self._has_merges(column):
            return None
        self._notices.add("merged_group_filled", self._sheet.ref(row, column))
        if isinstance(self._last, RowLabel):
            self._last = Label(self._last.text, (self._sheet.name, self._last_row, column))
        return self._last

    def heading(self, row: int, column: int) -> Label | None:
        """Return the batch in a heading cell of a wide table."""
        if column not in self._headings:
            cell = self._sheet.cell(row, column)
            if cell is not None:
                self._headings[column] = self._read(cell, row, column)
            else:
                self._headings[column] = self._merged(row, column)
                if self._headings[column] is not None:
                    self._notices.add("merged_group_filled", self._sheet.ref(row, column))
        return self._headings[column]

    def _merged(self, row: int, column: int) -> Label | None:
        area = self._sheet.merged_area(row, column)
        if area is None:
            return None
        anchor = self._sheet.cell(area.first_row, area.first_column)
        if anchor is None:
            return None
        return self._read(anchor, area.first_row, area.first_column)

    def _has_merges(self, column: int) -> bool:
        """Return whether batches of a column stand in merged cells: then a gap is no repetition."""
        if column not in self._column_merges:
            self._column_merges[column] = any(
                area.first_column <= column <= area.last_column
                and area.last_row > area.first_row
                and area.last_row >= self._first_row
                for area in self._sheet.merges
            )
        return self._column_merges[column]

    def _read(self, cell: Cell, row: int, column: int) -> Label:
        place = (self._sheet.name, row, column)
        if cell.kind is Kind.TEXT and not cell.formula:
            return Label(cell.text, place)
        ref = self._sheet.ref(row, column)
        if cell.formula:
            if not cell.cached:
                raise refuse_uncalculated([ref])
            self._notices.add("formula_results_used", ref)
        if cell.kind is Kind.TEXT:
            return Label(cell.text, place)
        if cell.kind is Kind.ERROR:
            raise refuse_errors([(ref, cell.text)])
        shown = None
        if cell.kind is Kind.NUMBER and is_stored_number(cell.text):
            shown = self._book.number_format(cell).shown(cell.text)
        if shown is None:
            self.not_text.append((ref, cell.text))
            return Label(cell.text, place)
        self._notices.add("number_read_as_shown", ref)
        return Label(shown, place)


def refuse_not_text(found: Sequence[tuple[CellRef, str]]) -> ExportRefusedError:
    """Return the refusal of batch cells that were converted to something else."""
    cells = list(dict.fromkeys(ref for ref, _ in found))
    return refused(
        "group_cell_not_text",
        where=cells_in_words(cells),
        found=f"A date, a truth value or a number in scientific notation ({found[0][1]}) stands where a "
        'batch code is expected; a code such as "2403E5" was probably converted.',
        expected="Batch codes as text.",
        next_step="Enter the codes as text and drop it again.",
        cells=run_ends(cells),
    )
