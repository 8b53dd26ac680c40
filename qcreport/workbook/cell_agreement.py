"""Whether two readers found the same in a cell, whatever type each gives it."""

from __future__ import annotations

import datetime as dt
from typing import Any

from qcreport.workbook.cells import Cell, Kind
from qcreport.workbook.rich_text import unescape
from qcreport.workbook.sheet_xml import is_stored_number

_DAY = dt.timedelta(days=1)
_EPOCH = dt.datetime(1899, 12, 30)  # noqa: DTZ001 - spreadsheets know no time zones
_EPOCH_1904 = dt.datetime(1904, 1, 1)  # noqa: DTZ001 - as above
_TOLERANCE_DAYS = 1e-5
"""The second reader rounds moments to milliseconds; a second is 1.2e-5 days."""
_LAST_DOUBTFUL_DAY = 61.0
"""Spreadsheets count a day that 1900 did not have; the readers differ by it in its first two months."""


class Agreement:
    """Compares cells of the first reader with values of the second."""

    def __init__(self, *, date_1904: bool) -> None:
        self._epoch = _EPOCH_1904 if date_1904 else _EPOCH

    def agrees(self, cell: Cell | None, other: Any) -> bool:
        """Return whether both say the same.

        The second reader shows error cells and formulas without a saved result as empty, and numbers as
        moments where it takes their format for that of a date.
        """
        if cell is None:
            return other == "" or (isinstance(other, str) and not other.strip())
        kind = cell.kind
        if kind is Kind.TEXT:
            return bool(cell.text == other) or self._text(cell, other)
        if kind is Kind.NUMBER and type(other) is float and is_stored_number(cell.text):
            return bool(float(cell.text) == other)
        if not cell.cached:
            return bool(other == "" or other == 0)
        return self._rare(cell, other)

    def _text(self, cell: Cell, other: Any) -> bool:
        if not cell.cached:
            return bool(other == "")
        if not isinstance(other, str):
            return False
        return _plain(cell.text) in (_plain(other), _plain(unescape(other)))

    def _rare(self, cell: Cell, other: Any) -> bool:
        if cell.kind is Kind.ERROR:
            return isinstance(other, str) and (not other or other.startswith("#"))
        if cell.kind is Kind.BOOLEAN:
            return isinstance(other, bool) and other == (cell.text.strip().lower() in ("1", "true"))
        if cell.kind is Kind.DATE:
            return isinstance(other, (dt.date, dt.time, dt.timedelta)) or _plain(cell.text) == other
        if not is_stored_number(cell.text):
            return bool(cell.text.strip() == other)
        number = float(cell.text)
        if isinstance(other, str):  # a stored number with white space around it
            return is_stored_number(other.strip()) and other != other.strip() and float(other) == number
        if isinstance(other, (int, float)) and not isinstance(other, bool):
            return number == other
        days = self._days(other)
        if days is None:
            return False
        allowed = 1.0 + _TOLERANCE_DAYS if number < _LAST_DOUBTFUL_DAY else _TOLERANCE_DAYS
        return abs(days - number) <= allowed

    def _days(self, moment: Any) -> float | None:
        if isinstance(moment, dt.datetime):
            return (moment.replace(tzinfo=None) - self._epoch) / _DAY
        if isinstance(moment, dt.date):
            return (dt.datetime.combine(moment, dt.time()) - self._epoch) / _DAY
        if isinstance(moment, dt.time):
            return (dt.datetime.combine(self._epoch, moment) - self._epoch) / _DAY
        return moment / _DAY if isinstance(moment, dt.timedelta) else None


def _plain(text: str) -> str:
    """Return a text without the differences that no one sees: ends of lines, spaces around it."""
    return text.replace("\r\n", "\n").replace("\r", "\n").strip()
