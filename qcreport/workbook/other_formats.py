"""Reading .xls, .xlsb and .ods through python-calamine: values and addresses, nothing else can be seen."""

from __future__ import annotations

import datetime as dt
import io
from typing import Any

from qcreport.errors import ExportRefusedError
from qcreport.workbook.archive import encrypted
from qcreport.workbook.cells import Book, Cell, Kind, Sheet, SheetInfo, SheetState
from qcreport.workbook.limits import Limits
from qcreport.workbook.ooxml import too_many_cells, too_many_rows
from qcreport.workbook.refusals import damaged, refused
from qcreport.workbook.rows import Rows

_STATES = {"Hidden": SheetState.HIDDEN, "VeryHidden": SheetState.VERY_HIDDEN}


def open_other(data: bytes, limits: Limits) -> Book:
    """Return a workbook in one of the other formats.

    The library allocates the whole range between the first and the last filled cell, so a far corner can
    exhaust the memory: exports are to be read in the reader child, which bounds it.
    """
    import python_calamine

    try:
        workbook = python_calamine.CalamineWorkbook.from_filelike(io.BytesIO(data))
        infos = tuple(_info(meta) for meta in workbook.sheets_metadata)
    except BaseException as error:  # noqa: BLE001 - the library's panics are no Exception
        _raise_unless_ours(error)
        raise _as_refusal(error) from None
    if len(infos) > limits.max_sheets:
        raise too_many_cells(limits.max_sheets, "sheets")
    counted = _Counter(limits)

    def load(info: SheetInfo) -> Sheet:
        try:
            values = workbook.get_sheet_by_name(info.name).to_python(skip_empty_area=False)
        except BaseException as error:  # noqa: BLE001 - as above
            _raise_unless_ours(error)
            raise _as_refusal(error) from None
        return Sheet(name=info.name, rows=counted.rows(info.name, values))

    return Book(sheets=infos, load=load, check_rest=lambda: None, limited=True)


def _info(meta: Any) -> SheetInfo:
    states = {
        "Visible": SheetState.VISIBLE,
        "Hidden": SheetState.HIDDEN,
        "VeryHidden": SheetState.VERY_HIDDEN,
    }
    return SheetInfo(
        name=meta.name,
        state=states.get(str(meta.visible).rsplit(".", 1)[-1], SheetState.VISIBLE),
        has_cells=str(meta.typ).rsplit(".", 1)[-1] == "WorkSheet",
    )


def _raise_unless_ours(error: BaseException) -> None:
    """Raise again what does not come from the library."""
    if isinstance(error, (KeyboardInterrupt, SystemExit, MemoryError, ExportRefusedError)):
        raise error


def _as_refusal(error: BaseException) -> ExportRefusedError:
    text = str(error)
    if "password" in text.lower() or "encrypt" in text.lower():
        return encrypted()
    return damaged(f"The workbook cannot be read ({text[:200]}).")


class _Counter:
    """Turns rows of values into cells and keeps count."""

    def __init__(self, limits: Limits) -> None:
        self._limits = limits
        self._n_cells = 0

    def rows(self, sheet: str, values: list[list[Any]]) -> Rows:
        """Return the filled cells of a sheet."""
        rows = Rows()
        for number, record in enumerate(values, start=1):
            cells = {c: cell for c, value in enumerate(record, start=1) if (cell := _cell(value))}
            if not cells:
                continue
            rows.put(number, cells)
            self._n_cells += len(cells)
            if len(rows) > self._limits.max_rows:
                raise too_many_rows(sheet, self._limits.max_rows)
            if self._n_cells > self._limits.max_cells:
                raise too_many_cells(self._limits.max_cells, "filled cells")
        return rows


def _cell(value: Any) -> Cell | None:
    if isinstance(value, bool):
        return Cell(Kind.BOOLEAN, str(int(value)))
    if isinstance(value, (int, float)):
        return Cell(Kind.NUMBER, repr(value).removesuffix(".0"))
    if isinstance(value, str):
        return Cell(Kind.TEXT, value) if value else None
    if isinstance(value, (dt.datetime, dt.date, dt.time)):
        return Cell(Kind.DATE, value.isoformat())
    if isinstance(value, dt.timedelta):
        return Cell(Kind.DATE, str(value))
    raise refused(
        "unsupported_format",
        where="the file",
        found=f"A cell holds a value of the kind {type(value).__name__}.",
        expected="Numbers, texts and dates.",
        next_step="Save the workbook as .xlsx and drop that.",
    )
