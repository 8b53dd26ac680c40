"""Reading text exports: one record a row, fields between delimiters."""

from __future__ import annotations

import csv
import io

from qcreport.workbook.cells import Book, Cell, Kind, Sheet, SheetInfo
from qcreport.workbook.layout_model import TextForm
from qcreport.workbook.limits import Limits
from qcreport.workbook.ooxml import too_many_rows
from qcreport.workbook.refusals import damaged, refused
from qcreport.workbook.rich_text import MAX_TEXT
from qcreport.workbook.rows import Rows

TEXT_SHEET = SheetInfo(name="")
"""A text export is one sheet without a name."""


def open_text(data: bytes, form: TextForm, limits: Limits) -> Book:
    """Return a text export as a workbook of one nameless sheet."""
    sheet = _read(_decoded(data, form), form, limits)
    return Book(
        sheets=(TEXT_SHEET,),
        load=lambda _info: sheet,
        check_rest=lambda: None,
        limited=True,
        is_text=True,
    )


def _decoded(data: bytes, form: TextForm) -> str:
    encoding = "utf-8-sig" if form.encoding.lower().replace("_", "-") in ("utf-8", "utf8") else form.encoding
    try:
        text = data.decode(encoding)
    except (UnicodeError, ValueError) as error:
        raise refused(
            "layout_mismatch",
            where="the file",
            found=f"The text is not written in {form.encoding} ({error}).",
            expected=f"The layout says encoding {form.encoding}.",
            next_step="State the encoding in the layout, or set it in the instrument's software.",
        ) from None
    if "\x00" in text:
        raise damaged("The text holds NUL characters.")
    return text.removeprefix("\ufeff")


def _read(text: str, form: TextForm, limits: Limits) -> Sheet:
    rows = Rows()
    n_cells = 0
    csv.field_size_limit(MAX_TEXT)
    records = csv.reader(io.StringIO(text, newline=""), delimiter=form.delimiter, strict=True)
    try:
        for number, record in enumerate(records, start=1):
            cells = {column: Cell(Kind.TEXT, field) for column, field in enumerate(record, start=1) if field}
            if not cells:
                continue
            rows.put(number, cells)
            n_cells += len(cells)
            _check(len(rows), n_cells, limits)
    except csv.Error as error:
        raise damaged(f"Record {len(rows) + 1} cannot be read ({error}).") from None
    return Sheet(name=None, rows=rows)


def _check(n_rows: int, n_cells: int, limits: Limits) -> None:
    if n_rows > limits.max_rows:
        raise too_many_rows(None, limits.max_rows)
    if n_cells > limits.max_cells:
        raise refused(
            "too_many_cells",
            where="the file",
            found=f"There are more than {limits.max_cells:,} filled fields.",
            expected=f"The limit is {limits.max_cells:,}.",
            next_step="Export fewer rows at a time, or ask IT to raise the limit in site.toml.",
        )
