"""The rows of a sheet, held in little memory: a million rows of six cells are no rare export.

Rows that fill the same columns share one table of these columns; each row itself is one tuple.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from qcreport.workbook.cells import Cell

_MAX_KEPT_SHAPES = 10_000


class Rows(Mapping[int, Mapping[int, "Cell"]]):
    """Row → column → cell, filled cells only, columns ascending; a row's mapping is made when asked for."""

    __slots__ = ("_last", "_packed", "_shapes", "_sorted", "columns")

    def __init__(self, rows: Mapping[int, dict[int, Cell]] | None = None) -> None:
        self._packed: dict[int, tuple[Any, ...]] = {}
        self._shapes: dict[tuple[int, ...], dict[int, int]] = {}
        self._last = 0
        self._sorted = True
        self.columns: set[int] = set()
        for row, cells in (rows or {}).items():
            self.put(row, cells)

    def put(self, row: int, cells: dict[int, Cell]) -> None:
        """Hold the cells of a row, in place of those that it held before."""
        columns = tuple(cells)
        shape = self._shapes.get(columns)
        if shape is None:
            shape = self._new_shape(columns)
        self._packed[row] = (shape, *cells.values())
        if row < self._last:
            self._sorted = False
        self._last = row

    def _new_shape(self, columns: tuple[int, ...]) -> dict[int, int]:
        """Return column → position in the tuple of a row, columns ascending."""
        shape = dict(sorted((column, place) for place, column in enumerate(columns, start=1)))
        if len(self._shapes) < _MAX_KEPT_SHAPES:
            self._shapes[columns] = shape
        self.columns.update(columns)
        return shape

    def in_order(self) -> Rows:
        """Return these rows, ascending from now on; files may hold them in any order."""
        if not self._sorted:
            self._packed = {row: self._packed[row] for row in sorted(self._packed)}
            self._sorted = True
        return self

    def cell(self, row: int, column: int) -> Cell | None:
        """Return a filled cell, or None."""
        packed = self._packed.get(row)
        if packed is None:
            return None
        place = packed[0].get(column)
        return None if place is None else packed[place]

    def filled(self, row: int) -> dict[int, Cell]:
        """Return column → cell of a row; nothing where it is empty."""
        return self[row] if row in self._packed else {}

    def n_cells(self) -> int:
        """Return how many cells are filled."""
        return sum(map(len, self._packed.values())) - len(self._packed)

    def __getitem__(self, row: int) -> dict[int, Cell]:
        """Return column → cell of a row."""
        packed = self._packed[row]
        return {column: packed[place] for column, place in packed[0].items()}

    def __contains__(self, row: object) -> bool:
        return row in self._packed

    def __iter__(self) -> Iterator[int]:
        return iter(self._packed)

    def __len__(self) -> int:
        return len(self._packed)
