"""Choosing the sheets that a layout means."""

from __future__ import annotations

from fnmatch import fnmatchcase

from qcreport.errors import ExportRefusedError
from qcreport.workbook.cells import Book, Cell, Kind, Sheet, SheetInfo, SheetState
from qcreport.workbook.layout_model import Layout
from qcreport.workbook.notices import NoticeBook
from qcreport.workbook.refusals import quoted, refused

_SEVERAL = 2


def choose_sheets(book: Book, layout: Layout, notices: NoticeBook) -> tuple[Sheet, ...]:
    """Return the sheets to read; hidden ones only where the layout names them."""
    if book.is_text:
        return (book.sheet(book.sheets[0]),)
    infos = _chosen(book, layout)
    for info in book.sheets:
        if info.state is not SheetState.VISIBLE and info.has_cells and info not in infos:
            notices.add("hidden_sheet_ignored", detail=info.name)
    return tuple(book.sheet(info) for info in infos)


def _chosen(book: Book, layout: Layout) -> tuple[SheetInfo, ...]:
    if layout.sheet_name is not None:
        return (_named(book, layout.sheet_name),)
    visible = tuple(info for info in book.sheets if info.state is SheetState.VISIBLE and info.has_cells)
    if layout.sheet_pattern is not None:
        pattern = layout.sheet_pattern
        matching = tuple(info for info in visible if fnmatchcase(info.name.strip(), pattern))
        if not matching:
            raise _no_such_sheet(book, f"sheets that match {quoted(pattern)}")
        return matching
    filled = tuple(info for info in visible if book.sheet(info).rows)
    if len(filled) != 1:
        raise _no_such_sheet(book, "one sheet with data, or a layout that names the sheet")
    return filled


def _named(book: Book, name: str) -> SheetInfo:
    for info in book.sheets:
        if info.has_cells and info.name == name:
            return info
    wanted = name.strip().casefold()
    for info in book.sheets:
        if info.has_cells and info.name.strip().casefold() == wanted:
            return info
    raise _no_such_sheet(book, f"a sheet {quoted(name)}")


def _no_such_sheet(book: Book, wanted: str) -> ExportRefusedError:
    names = ", ".join(info.name for info in book.sheets[:10])
    return refused(
        "layout_mismatch",
        where="the workbook",
        found=f"Its sheets are: {names}.",
        expected=f"The layout asks for {wanted}.",
        next_step="Export with the sheet names as before, or change the layout to fit.",
    )


def no_table_found(book: Book) -> ExportRefusedError | None:
    """Return the refusal of a workbook without anything like a table, or None where there is one.

    A text export is one table by its nature: its heading tells more.
    """
    if book.is_text:
        return None
    looked_at = [info for info in book.sheets if info.has_cells and info.state is SheetState.VISIBLE]
    if any(_holds_table(book.sheet(info)) for info in looked_at):
        return None
    names = ", ".join(info.name for info in looked_at)
    return refused(
        "no_table_found",
        where="the workbook",
        found="No sheet holds a table with a batch column and a value column."
        + (f" Sheets looked at: {names}." if names else ""),
        expected="A table with a batch column and a value column.",
        next_step="Export the table of results and drop that.",
    )


def _holds_table(sheet: Sheet) -> bool:
    """Return whether two rows of several filled cells stand there, with a number among them."""
    n_rows = n_numbers = 0
    for columns in sheet.rows.values():
        filled = [cell for cell in columns.values() if not cell.blank or cell.formula]
        if len(filled) < _SEVERAL:
            continue
        n_rows += 1
        n_numbers += sum(_like_a_value(cell) for cell in filled)
        if n_rows >= _SEVERAL and n_numbers:
            return True
    return False


def _like_a_value(cell: Cell) -> bool:
    return cell.kind is not Kind.TEXT or cell.formula or any("0" <= c <= "9" for c in cell.text)
