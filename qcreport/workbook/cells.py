"""Workbooks, sheets and cells as every reader of a format delivers them."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from enum import StrEnum
from typing import NamedTuple

from qcreport.measurements import CellRef
from qcreport.workbook.number_format import GENERAL, NumberFormat
from qcreport.workbook.places import Area
from qcreport.workbook.rows import Rows


class Kind(StrEnum):
    """What a cell holds."""

    NUMBER = "n"
    TEXT = "s"
    BOOLEAN = "b"
    ERROR = "e"
    DATE = "d"


class Cell(NamedTuple):
    """One filled cell; a tuple, because a workbook may hold three million of them."""

    kind: Kind
    """What it holds."""
    text: str
    """The text stored in the file, escapes replaced; for a date of kind DATE its ISO form."""
    style: int = 0
    """Index into the workbook's styles."""
    formula: bool = False
    """The cell holds a formula; `text` is its saved result."""
    cached: bool = True
    """False for a formula without a saved result."""
    struck: bool = False
    """Part of the text is struck through (the cell's own font is in its style)."""

    @property
    def blank(self) -> bool:
        """True where nothing is to be seen."""
        return self.kind is Kind.TEXT and not self.text.strip()


class CellStyle(NamedTuple):
    """What matters of a cell's style."""

    number_format: NumberFormat = GENERAL
    """How a number is shown."""
    struck: bool = False
    """The font is struck through."""


class SheetState(StrEnum):
    """Whether a sheet is seen."""

    VISIBLE = "visible"
    HIDDEN = "hidden"
    VERY_HIDDEN = "veryHidden"


@dataclass(frozen=True, slots=True, kw_only=True)
class SheetInfo:
    """A sheet before it is read."""

    name: str
    """As on its tab."""
    state: SheetState = SheetState.VISIBLE
    """Whether it is seen."""
    has_cells: bool = True
    """False for chart sheets and the like."""
    part: str = ""
    """Where the workbook keeps it."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Sheet:
    """The filled cells of one sheet."""

    name: str | None
    """As on its tab; None for a text export."""
    rows: Rows
    """Row → column → cell, rows and columns ascending, filled cells only."""
    hidden_rows: frozenset[int] = frozenset()
    """Rows hidden by hand or by a filter."""
    hidden_columns: tuple[tuple[int, int], ...] = ()
    """(first, last) of hidden columns."""
    filters: tuple[Area, ...] = ()
    """Areas under an active filter."""
    merges: tuple[Area, ...] = ()
    """Merged areas."""
    comments: frozenset[tuple[int, int]] = frozenset()
    """(row, column) of cells with a comment."""
    extent: tuple[int, int] = (0, 0)
    """Rows and columns of the range of all cells that are there, also those with an empty text."""

    def cell(self, row: int, column: int) -> Cell | None:
        """Return a cell, or None where it is empty or blank."""
        found = self.rows.cell(row, column)
        return None if found is None or found.blank else found

    def ref(self, row: int, column: int) -> CellRef:
        """Return the name of a cell."""
        return CellRef(sheet=self.name, row=row, column=column)

    def column_hidden(self, column: int) -> bool:
        """Return whether a column is hidden."""
        return any(first <= column <= last for first, last in self.hidden_columns)

    def merged_area(self, row: int, column: int) -> Area | None:
        """Return the merged area that holds a cell."""
        return next((area for area in self.merges if area.holds(row, column)), None)


@dataclass(slots=True, kw_only=True)
class Book:
    """An opened export; sheets are read when asked for, and once."""

    sheets: tuple[SheetInfo, ...]
    """In the order of their tabs."""
    load: Callable[[SheetInfo], Sheet]
    """Reads one sheet."""
    check_rest: Callable[[], None]
    """Checks the parts that were not read."""
    styles: tuple[CellStyle, ...] = (CellStyle(),)
    """Styles that cells point to."""
    date_1904: bool = False
    """Dates count from 1904."""
    recalculates: bool = False
    """Written for a program that calculates all formulas on opening."""
    has_macros: bool = False
    """Holds macros."""
    has_external_links: bool = False
    """Formulas look into other workbooks."""
    limited: bool = False
    """A format in which formats, marks, hidden rows and formulas cannot be seen."""
    is_text: bool = False
    """A text export."""
    _read: dict[str, Sheet] = field(default_factory=dict)

    def sheet(self, info: SheetInfo) -> Sheet:
        """Return the cells of a sheet."""
        if info.name not in self._read:
            self._read[info.name] = self.load(info)
        return self._read[info.name]

    def number_format(self, cell: Cell) -> NumberFormat:
        """Return how a cell shows its number."""
        return self.styles[cell.style].number_format

    def struck(self, cell: Cell) -> bool:
        """Return whether a cell is struck through."""
        return cell.struck or self.styles[cell.style].struck
