"""Marked values: struck through, commented, hidden."""

from __future__ import annotations

from qcreport.measurements import CellRef
from qcreport.workbook.cells import Book
from qcreport.workbook.layout_model import Marks, MarkUse
from qcreport.workbook.notices import NoticeBook
from qcreport.workbook.readings import Reading


class MarkReader:
    """Finds the marks of values, notes them, and tells which values a layout leaves out for them."""

    def __init__(self, book: Book, use: Marks, notices: NoticeBook) -> None:
        self._book, self._use, self._notices = book, use, notices
        self._marks: dict[CellRef, tuple[str, ...]] = {}

    def keeps(self, reading: Reading) -> bool:
        """Return whether a value counts; its marks are noted either way."""
        found = self._found(reading)
        if not found:
            return True
        self._marks[reading.ref] = found
        use = self._use
        excluded = {"struck": use.struck, "commented": use.comments, "hidden": use.hidden}
        return not any(excluded[mark] is MarkUse.EXCLUDE for mark in found)

    def marks(self, reading: Reading) -> tuple[str, ...]:
        """Return the marks of a value that was judged before."""
        return self._marks.get(reading.ref, ()) if self._marks else ()

    def _found(self, reading: Reading) -> tuple[str, ...]:
        cell, sheet = reading.cell, reading.sheet
        if cell is None:
            return ()
        found = []
        if self._book.struck(cell):
            found.append("struck")
            self._note("struck_cells", reading, self._use.struck)
        if (reading.row, reading.column) in sheet.comments:
            found.append("commented")
            self._note("commented_cells", reading, self._use.comments)
        if reading.row in sheet.hidden_rows:
            filtered = any(area.first_row <= reading.row <= area.last_row for area in sheet.filters)
            found.append("hidden")
            code = "filtered_rows_included" if filtered else "hidden_rows_included"
            self._note(code, reading, self._use.hidden)
        elif sheet.column_hidden(reading.column):
            found.append("hidden")
            self._note("hidden_columns", reading, self._use.hidden)
        return tuple(found)

    def _note(self, code: str, reading: Reading, use: MarkUse) -> None:
        detail = "left out, as the layout says" if use is MarkUse.EXCLUDE else "kept"
        self._notices.add(code, reading.ref, detail=detail)
