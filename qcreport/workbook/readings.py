"""What the walk over a table delivers, before names and values are judged."""

from __future__ import annotations

from typing import NamedTuple

from qcreport.measurements import CellRef
from qcreport.workbook.cells import Cell, Kind, Sheet
from qcreport.workbook.layout_model import ValueLayout

_MAX_KEPT_LABELS = 10_000


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


class RowLabel(NamedTuple):
    """A name that stands in the row of its reading: rows with the same name share it."""

    text: str
    """As stored, or as the cell shows a number; not trimmed."""
    column: int
    """Column where it stands."""


AnyLabel = Label | RowLabel


class LabelPool:
    """Makes names that rows share; it forgets now and then, as an export may name a million samples."""

    def __init__(self) -> None:
        self._known: dict[tuple[str, int], RowLabel] = {}

    def label(self, text: str, column: int) -> RowLabel:
        """Return a name that stands in a column of its row."""
        key = (text, column)
        known = self._known.get(key)
        if known is None:
            if len(self._known) >= _MAX_KEPT_LABELS:
                self._known.clear()
            known = self._known[key] = RowLabel(text, column)
        return known


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
    group: AnyLabel
    """The batch."""
    line: AnyLabel | None
    """The production line."""
    sample: AnyLabel | None
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

    def placed(self, label: AnyLabel) -> Label:
        """Return a name of this reading with the place where it stands."""
        if isinstance(label, Label):
            return label
        return Label(label.text, (self.sheet.name, self.row, label.column))


def plain_text(cell: Cell | None, shown: str | None = None) -> str | None:
    """Return the text of a cell that is no value: trimmed; None where there is none."""
    if cell is None:
        return None
    text = shown if cell.kind is Kind.NUMBER and shown is not None else cell.text
    return text.strip() or None
