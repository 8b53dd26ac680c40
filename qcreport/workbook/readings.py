"""What the walk over a table delivers, before names and values are judged."""

from __future__ import annotations

from typing import NamedTuple

from qcreport.measurements import CellRef
from qcreport.workbook.cells import Cell, Kind, Sheet
from qcreport.workbook.layout_model import ValueLayout


class Label(NamedTuple):
    """A name as it stands in the export."""

    text: str
    """As stored, or as the cell shows a number; not trimmed."""
    place: tuple[str | None, int, int] | None = None
    """Sheet, row and column where it stands; None for a sheet name, a file name or a constant."""

    @property
    def ref(self) -> CellRef | None:
        """The cell where it stands."""
        if self.place is None:
            return None
        sheet, row, column = self.place
        return CellRef(sheet=sheet, row=row, column=column)


class Reading(NamedTuple):
    """One value cell with the names that belong to it."""

    table: int
    """Position of the table in the layout."""
    layout: ValueLayout
    """What was measured."""
    sheet: Sheet
    """The sheet."""
    row: int
    """1-based."""
    column: int
    """1-based."""
    cell: Cell | None
    """None where the cell is empty."""
    group: Label
    """The batch."""
    line: Label | None
    """The production line."""
    sample: Label | None
    """The sample."""
    number: str | None
    """The number of the reading."""
    time: tuple[int, Cell] | None
    """(column, cell) of the time."""
    status: str | None
    """The status."""
    factors: tuple[tuple[str, str], ...]
    """Levels of blocking factors."""
    unit: tuple[CellRef, str] | None
    """Where the row states its unit, and the unit."""

    @property
    def ref(self) -> CellRef:
        """The value's cell."""
        return CellRef(sheet=self.sheet.name, row=self.row, column=self.column)


def plain_text(cell: Cell | None, shown: str | None = None) -> str | None:
    """Return the text of a cell that is no value: trimmed; None where there is none."""
    if cell is None:
        return None
    text = shown if cell.kind is Kind.NUMBER and shown is not None else cell.text
    return text.strip() or None
