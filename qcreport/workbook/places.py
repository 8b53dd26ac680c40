"""Cell names as spreadsheets and layouts write them: `E`, `C:G`, `B7`, `A1:C4`."""

from __future__ import annotations

import re
from typing import Final, NamedTuple

MAX_ROW: Final = 1_048_576
MAX_COLUMN: Final = 16_384

_CELL = re.compile(r"^\$?([A-Za-z]{1,3})\$?([0-9]{1,7})$")
_COLUMN = re.compile(r"^[A-Za-z]{1,3}$")


class Area(NamedTuple):
    """A rectangle of cells, both ends inside; rows and columns count from 1."""

    first_row: int
    first_column: int
    last_row: int
    last_column: int

    def holds(self, row: int, column: int) -> bool:
        """Return whether the cell lies inside."""
        return self.first_row <= row <= self.last_row and self.first_column <= column <= self.last_column


def parse_column(text: str) -> int | None:
    """Return the 1-based number of a column name, or None where it is none: A → 1, AA → 27."""
    if not _COLUMN.match(text):
        return None
    number = 0
    for letter in text.upper():
        number = number * 26 + ord(letter) - 64
    return number if number <= MAX_COLUMN else None


def parse_columns(text: str) -> tuple[int, int] | None:
    """Return (first, last) of `C:G`, of a single column `C`, or None where it is neither."""
    first_text, colon, last_text = text.partition(":")
    first = parse_column(first_text.strip())
    last = parse_column(last_text.strip()) if colon else first
    if first is None or last is None or last < first:
        return None
    return first, last


def parse_cell(text: str) -> tuple[int, int] | None:
    """Return (row, column) of `B7`, or None where it is no cell of a sheet."""
    found = _CELL.match(text)
    if found is None:
        return None
    column = parse_column(found.group(1))
    row = int(found.group(2))
    if column is None or not 1 <= row <= MAX_ROW:
        return None
    return row, column


def parse_area(text: str) -> Area | None:
    """Return the rectangle of `A1:C4` or `B7`, or None where it is none."""
    first_text, colon, last_text = text.partition(":")
    first = parse_cell(first_text)
    last = parse_cell(last_text) if colon else first
    if first is None or last is None or last[0] < first[0] or last[1] < first[1]:
        return None
    return Area(first[0], first[1], last[0], last[1])
