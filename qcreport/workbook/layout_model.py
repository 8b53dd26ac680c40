"""What a layout says: how one instrument's export is laid out."""

from __future__ import annotations

import re
from dataclasses import dataclass
from enum import StrEnum


class Shape(StrEnum):
    """How the values of a table stand."""

    LONG = "long"
    WIDE = "wide"
    REPLICATES_ACROSS = "replicates_across"


class SourceKind(StrEnum):
    """Where a label (batch, line, sample …) is taken from."""

    COLUMN = "col"
    HEADER = "header"
    HEADER_CELLS = "header_cells"
    SHEET_NAME = "sheet_name"
    FILE_NAME = "file_name"
    CELL = "cell"
    CONSTANT = "constant"


class UnitFrom(StrEnum):
    """Where the export itself states the unit."""

    LAYOUT = "layout"
    HEADER = "header"
    UNITS_ROW = "units_row"
    CELL = "cell"
    COLUMN = "column"


class MarkUse(StrEnum):
    """What becomes of a struck, commented or hidden value."""

    KEEP = "keep"
    EXCLUDE = "exclude"


@dataclass(frozen=True, slots=True, kw_only=True)
class Source:
    """Where a label is taken from; only the fields of its kind are set."""

    kind: SourceKind
    """Which of the fields below counts."""
    column: int | None = None
    """1-based column (`col`), or the first of `header_cells`."""
    last_column: int | None = None
    """Last column of `header_cells`."""
    header: str | None = None
    """Heading by which the column is found, or checked where a column is given too."""
    row: int | None = None
    """1-based row of `cell`."""
    pattern: re.Pattern[str] | None = None
    """Searched in the file name; its first group (or the whole match) is the label."""
    constant: str | None = None
    """The label itself."""
    repeats_below: bool = False
    """A label counts for the rows below it that have none."""


@dataclass(frozen=True, slots=True, kw_only=True)
class StatusColumn:
    """A column that says which rows count."""

    source: Source
    """Where the status stands."""
    use: tuple[str, ...]
    """Words of rows that count; empty: all that are not excluded."""
    exclude: tuple[str, ...]
    """Words of rows that do not count."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Factor:
    """A blocking factor."""

    name: str
    """Name of the factor."""
    source: Source
    """Where its level stands."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ValueLayout:
    """One characteristic of a table."""

    characteristic: str
    """Name that plans use."""
    first_column: int | None
    """1-based; None where the column is found by its heading, or the shape is wide."""
    last_column: int | None
    """Same as `first_column` for a single column."""
    header: str | None
    """Heading that must stand above the column."""
    unit: str | None
    """Unit of the values; None where the export states it."""
    unit_from: UnitFrom
    """Where the export states the unit."""
    unit_cell: tuple[int, int] | None
    """(row, column) for `unit_from = "cell"`."""
    unit_column: int | None
    """Column for `unit_from = "column"`."""


@dataclass(frozen=True, slots=True, kw_only=True)
class TableLayout:
    """One table of a sheet."""

    shape: Shape
    """How its values stand."""
    header_rows: tuple[int, ...]
    """1-based rows of the headings, top to bottom."""
    units_row: int | None
    """Row that holds the units."""
    first_row: int
    """First row of data."""
    blank_rows_end: int | None
    """So many blank rows end the table; None: it goes to the end of the sheet."""
    group: Source
    """The batch."""
    line: Source | None
    """The production line."""
    sample: Source | None
    """The sample."""
    replicate: Source | None
    """The number of the reading."""
    time: Source | None
    """The time of the measurement."""
    status: StatusColumn | None
    """Which rows count."""
    factors: tuple[Factor, ...]
    """Blocking factors."""
    values: tuple[ValueLayout, ...]
    """What was measured, at least one."""


@dataclass(frozen=True, slots=True, kw_only=True)
class TextForm:
    """How a text export is written."""

    delimiter: str
    """One character between fields."""
    encoding: str
    """Name of a character encoding."""


@dataclass(frozen=True, slots=True, kw_only=True)
class NumberForms:
    """How numbers and the marks among them are written in text cells."""

    decimal: str | None = None
    """Decimal mark; None: only what can be read in one way is read."""
    thousands: str | None = None
    """Mark between groups of three digits."""
    missing: tuple[str, ...] = ()
    """Texts for a value that is missing (a blank text: an empty cell)."""
    not_detected: tuple[str, ...] = ()
    """Texts for `not detected`, without a limit."""
    below: str | None = None
    """Mark before the limit of a value below it, besides `<` and `<=`."""
    above: str | None = None
    """Mark before the limit of a value above it, besides `>` and `>=`."""
    errors_missing: bool = False
    """Error cells count as missing instead of refusing the export."""
    missing_errors: tuple[str, ...] = ()
    """Only these errors count as missing."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LeaveOut:
    """Rows that are not data."""

    blank: bool = False
    """Blank rows between the data rows."""
    group_matches: tuple[str, ...] = ()
    """Patterns with `*` and `?` for the batch cell of summary rows."""
    sample_matches: tuple[str, ...] = ()
    """Patterns for the sample cell of summary rows."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Marks:
    """What becomes of marked values."""

    struck: MarkUse = MarkUse.KEEP
    """Struck through."""
    comments: MarkUse = MarkUse.KEEP
    """With a comment."""
    hidden: MarkUse = MarkUse.KEEP
    """In a hidden or filtered row, or a hidden column."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Anchor:
    """A cell that must hold a text for the layout to fit."""

    row: int
    """1-based."""
    column: int
    """1-based."""
    text: str
    """Pattern with `*` and `?`."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Layout:
    """How one instrument's export is laid out."""

    name: str
    """Name of the layout."""
    sheet_name: str | None
    """The one sheet to read; None with `sheet_pattern`, `text` or a workbook with one sheet of data."""
    sheet_pattern: str | None
    """Pattern for the sheets to read, one a batch."""
    text: TextForm | None
    """Set for text exports."""
    tables: tuple[TableLayout, ...]
    """At least one."""
    numbers: NumberForms
    """How numbers are written."""
    leave_out: LeaveOut
    """Rows that are not data."""
    marks: Marks
    """What becomes of marked values."""
    anchors: tuple[Anchor, ...]
    """Cells that must hold a given text."""
    different_groups: frozenset[str]
    """Batch names that look alike and are meant to differ."""
