"""What was measured: the frozen values that leave the reading of an export and enter everything else."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum


def column_letters(column: int) -> str:
    """Return the spreadsheet name of a 1-based column: 1 → A, 27 → AA."""
    letters = ""
    while column > 0:
        column, rest = divmod(column - 1, 26)
        letters = chr(ord("A") + rest) + letters
    return letters


_PLAIN_SHEET_CHARACTERS = frozenset("ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789_")


def quoted_sheet(name: str) -> str:
    """Return a sheet name as a formula would write it: quoted unless letters, digits and underscores only."""
    if name and name[0] not in "0123456789" and all(c in _PLAIN_SHEET_CHARACTERS for c in name):
        return name
    return "'" + name.replace("'", "''") + "'"


@dataclass(frozen=True, slots=True, kw_only=True, order=True)
class CellRef:
    """The place of one value in an export."""

    sheet: str | None
    """Sheet name; None in a text export."""
    row: int
    """1-based row, or record in a text export."""
    column: int
    """1-based column."""

    def __str__(self) -> str:
        """Return `Results!C12`, `'This month'!C6`, or `record 2, column 3`."""
        if self.sheet is None:
            return f"record {self.row}, column {self.column}"
        return f"{quoted_sheet(self.sheet)}!{column_letters(self.column)}{self.row}"


class Censoring(StrEnum):
    """How a value is known only by a limit."""

    BELOW = "<"
    ABOVE = ">"
    AT_MOST = "<="
    AT_LEAST = ">="
    NOT_DETECTED = "nd"


LIMITS_BELOW = frozenset({Censoring.BELOW, Censoring.AT_MOST, Censoring.NOT_DETECTED})
"""Censorings of results that lie below what is written."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Measurement:
    """One reading of one characteristic, as it stands in one cell."""

    characteristic: str
    """Name in the layout."""
    batch: str
    """Batch label, spaces trimmed."""
    line: str | None
    """Production line, where the layout gives one."""
    sample: str | None
    """Sample id, where the layout gives one."""
    reading: str | None
    """Number of the reading inside the sample, where the layout gives one."""
    value: float | None
    """In `unit`; the limit itself for a censored value; None where missing or not detected."""
    text: str
    """The text stored in the cell, before any conversion."""
    decimals: int
    """Decimals shown by the export (number format or text), for the report's rounding."""
    unit: str
    """Unit of `value`."""
    censored: Censoring | None
    """None for a plain number (or a missing value)."""
    status: str | None
    """Text of the status column, where the layout gives one."""
    time: str | None
    """ISO 8601 local time of the measurement, where the layout gives one."""
    cell: CellRef
    """Where the value stands."""
    marks: tuple[str, ...] = ()
    """`struck`, `commented`, `hidden`: states of the cell a reader should know."""
    factors: tuple[tuple[str, str], ...] = ()
    """(name, level) of blocking factors."""

    @property
    def missing(self) -> bool:
        """True where the cell holds a marker for a missing value."""
        return self.value is None and self.censored is None


@dataclass(frozen=True, slots=True, kw_only=True)
class Notice:
    """Something about the export that a reader of the report should know; it did not stop the reading."""

    code: str
    """One of the documented notice codes."""
    cells: tuple[str, ...]
    """Cells as written in `CellRef.__str__`."""
    text: str
    """One sentence with file, sheet and cells."""


@dataclass(frozen=True, slots=True, kw_only=True)
class MeasurementSet:
    """All that was read from one export."""

    export_name: str
    """File name as dropped (a name, never a path)."""
    export_sha256: str
    """Digest of the bytes that were read."""
    layout_name: str
    """Name in the layout file."""
    measurements: tuple[Measurement, ...]
    """In export order (sheet, table, row, column)."""
    notices: tuple[Notice, ...] = ()
    """In order of first occurrence."""

    def characteristics(self) -> tuple[str, ...]:
        """Return the characteristic names in order of first appearance."""
        return tuple(dict.fromkeys(m.characteristic for m in self.measurements))
