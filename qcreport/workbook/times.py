"""Times of measurements: date cells in both date systems, and dates written as text."""

from __future__ import annotations

import datetime as dt
import re
from collections.abc import Collection, Sequence

from qcreport.workbook.cells import Book, Cell, Kind
from qcreport.workbook.notices import NoticeBook
from qcreport.workbook.readings import Reading
from qcreport.workbook.sheet_xml import is_stored_number

_CLOCK = r"(?:[T ,]+([0-9]{1,2}):([0-9]{2})(?::([0-9]{2})(?:[.,][0-9]+)?)?\s*([AaPp][Mm])?)?"
_ISO = re.compile(r"([0-9]{4})[-/.]([0-9]{1,2})[-/.]([0-9]{1,2})" + _CLOCK + r"(?:Z|[+-][0-9]{2}:?[0-9]{2})?")
_DOTTED = re.compile(r"([0-9]{1,2})\.([0-9]{1,2})\.([0-9]{4})" + _CLOCK)
_SLASHED = re.compile(r"([0-9]{1,2})[/-]([0-9]{1,2})[/-]([0-9]{4})" + _CLOCK)
_LAST_SERIAL = 2_958_465.999999
_MONTHS = 12


def serial_time(serial: float, *, date_1904: bool) -> dt.datetime | None:
    """Return the time that a stored date number means, to the second; None where it means none.

    The 1900 system counts a 29 February 1900 that never was, so its days before March 1900 are shifted.
    """
    if not 0 <= serial <= _LAST_SERIAL:
        return None
    epoch = dt.datetime(1904, 1, 1) if date_1904 else dt.datetime(1899, 12, 30)  # noqa: DTZ001 - local time
    if not date_1904 and serial < 61:
        epoch += dt.timedelta(days=1)
    try:
        return epoch + dt.timedelta(seconds=round(serial * 86_400))
    except OverflowError:
        return None


def read_times(book: Book, readings: Sequence[Reading], notices: NoticeBook) -> list[str | None]:
    """Return the times in ISO 8601 without zone, None where there is none or it can be read in two ways."""
    texts = {reading.time[1].text.strip() for reading in readings if reading.time is not None}
    day_first = _slashed_order(texts)
    known: dict[tuple[Kind, str, int], str | None] = {}
    times: list[str | None] = []
    for reading in readings:
        if reading.time is None:
            times.append(None)
            continue
        column, cell = reading.time
        key = (cell.kind, cell.text, cell.style)
        if key not in known:
            found = _read_time(book, cell, day_first=day_first)
            known[key] = None if found is None else found.isoformat()
        times.append(known[key])
        if known[key] is None:
            notices.add("time_ambiguous", reading.sheet.ref(reading.row, column))
        elif cell.kind is Kind.NUMBER and book.date_1904:
            notices.add("date_system_1904", reading.sheet.ref(reading.row, column))
    return times


def _slashed_order(texts: Collection[str]) -> bool | None:
    """Return whether the day comes first in dates such as 03/04/2026; None where nothing decides it."""
    found = [match for text in texts if (match := _SLASHED.fullmatch(text))]
    first = any(int(match.group(1)) > _MONTHS for match in found)
    second = any(int(match.group(2)) > _MONTHS for match in found)
    return None if first == second else first


def _read_time(book: Book, cell: Cell, *, day_first: bool | None) -> dt.datetime | None:
    if cell.kind is Kind.NUMBER:
        if not is_stored_number(cell.text) or not book.number_format(cell).date:
            return None
        return serial_time(float(cell.text), date_1904=book.date_1904)
    if cell.kind not in (Kind.TEXT, Kind.DATE):
        return None
    text = cell.text.strip()
    if found := _ISO.fullmatch(text):
        year, month, day, *clock = found.groups()
    elif found := _DOTTED.fullmatch(text):
        day, month, year, *clock = found.groups()
    elif (found := _SLASHED.fullmatch(text)) and day_first is not None:
        day, month, year, *clock = found.groups()
        if not day_first:
            day, month = month, day
    else:
        return None
    return _built(int(year), int(month), int(day), clock)


def _built(year: int, month: int, day: int, clock: Sequence[str | None]) -> dt.datetime | None:
    hour, minute, second = (int(part or 0) for part in clock[:3])
    half = (clock[3] or "").lower()
    if half and not 1 <= hour <= _MONTHS:
        return None
    if half:
        hour = hour % 12 + (12 if half == "pm" else 0)
    try:
        return dt.datetime(year, month, day, hour, minute, second)  # noqa: DTZ001 - local time of the instrument
    except ValueError:
        return None
