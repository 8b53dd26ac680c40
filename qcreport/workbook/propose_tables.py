"""Finding tables in a sheet: a heading with rows of values below it."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

from qcreport.workbook import propose_words as known
from qcreport.workbook.cells import Cell, Kind, Sheet
from qcreport.workbook.propose_columns import like_a_value
from qcreport.workbook.units import looks_like_unit

_FEWEST_ROWS = 3
_LOOKED_ABOVE = 3
_GAP = 3


@dataclass(frozen=True, slots=True, kw_only=True)
class FoundTable:
    """Where a table stands."""

    sheet: Sheet
    """The sheet."""
    header_rows: tuple[int, ...]
    """Rows of its headings."""
    units_row: int | None
    """Row of units below them."""
    rows: tuple[int, ...]
    """Rows of data, means and the like among them."""
    columns: tuple[int, ...]
    """Columns under a heading."""
    widest_gap: int
    """Most blank rows between two rows of data."""

    @property
    def across(self) -> bool:
        """The values of a batch stand side by side below one heading."""
        return len(self.header_rows) > 1


def find_tables(sheet: Sheet) -> list[FoundTable]:
    """Return the tables of a sheet, top to bottom."""
    found: list[FoundTable] = []
    rows = list(sheet.rows)
    position = 0
    while position < len(rows):
        row = rows[position]
        if not _is_data(sheet, row) or _is_units(sheet, row) or not (top := _headings(sheet, row)):
            position += 1
            continue
        header_rows, units_row = top
        first = row + 1 if row in header_rows else row
        columns = _columns(sheet, header_rows)
        data = _data_rows(sheet, [r for r in rows[position:] if r >= first], frozenset(columns))
        if len(data) < _FEWEST_ROWS or len(columns) < 2:
            position += 1
            continue
        found.append(
            FoundTable(
                sheet=sheet,
                header_rows=header_rows,
                units_row=units_row,
                rows=tuple(data),
                columns=columns,
                widest_gap=max(b - a - 1 for a, b in pairwise(data)),
            )
        )
        position = rows.index(data[-1]) + 1
    return found


def _filled(sheet: Sheet, row: int) -> dict[int, Cell]:
    return {c: cell for c, cell in sheet.rows.get(row, {}).items() if not cell.blank or cell.formula}


def _is_data(sheet: Sheet, row: int) -> bool:
    filled = _filled(sheet, row)
    return len(filled) > 1 and any(like_a_value(cell) for cell in filled.values())


def _is_heading(sheet: Sheet, row: int) -> bool:
    filled = _filled(sheet, row)
    return len(filled) > 1 and all(c.kind is Kind.TEXT and not like_a_value(c) for c in filled.values())


def _headings(sheet: Sheet, row: int) -> tuple[tuple[int, ...], int | None] | None:
    """Return (heading rows, units row) above a row of data; the row itself may number the readings."""
    above = row - 1
    if _numbers_readings(sheet, row):
        return ((above, row), None) if _is_heading(sheet, above) else None
    if _is_units(sheet, above):
        return ((above - 1,), above) if _is_heading(sheet, above - 1) else None
    for place in range(above, max(0, above - _LOOKED_ABOVE), -1):
        if _is_heading(sheet, place):
            return (place,), None
        if _filled(sheet, place):
            return None
    return None


def _is_units(sheet: Sheet, row: int) -> bool:
    texts = [cell.text.strip().strip("[]()") for cell in _filled(sheet, row).values()]
    units = [text for text in texts if looks_like_unit(text)]
    return bool(units) and all(text in units or text in ("-", "–", "") for text in texts)


def _numbers_readings(sheet: Sheet, row: int) -> bool:
    """Return whether a row numbers readings 1, 2, 3 below a heading that is merged over them."""
    filled = _filled(sheet, row)
    merged = [
        area for area in sheet.merges if area.last_row == row - 1 and area.last_column > area.first_column
    ]
    if not merged or not all(cell.kind is Kind.NUMBER for cell in filled.values()):
        return False
    for area in merged:
        texts = [sheet.cell(row, column) for column in range(area.first_column, area.last_column + 1)]
        if [cell.text if cell else "" for cell in texts] != [str(i) for i in range(1, len(texts) + 1)]:
            return False
    return True


def _columns(sheet: Sheet, header_rows: tuple[int, ...]) -> tuple[int, ...]:
    """Return the columns with a heading; below a heading over several columns only the first."""
    return tuple(sorted(_filled(sheet, header_rows[0])))


def _data_rows(sheet: Sheet, rows: list[int], columns: frozenset[int]) -> list[int]:
    """Return the rows of a table: up to a wide gap, the next heading, or rows of another form."""
    data: list[int] = []
    for row in rows:
        filled = _filled(sheet, row)
        if not filled:
            continue
        if data and row - data[-1] > _GAP:
            break
        if data and row - data[-1] > 1 and _is_heading(sheet, row):
            break
        if len(filled.keys() & columns) > 1 or (columns & filled.keys() and _is_value_alone(filled)):
            data.append(row)
        elif len(filled) > 1:
            break
    return data


def _is_value_alone(filled: dict[int, Cell]) -> bool:
    return all(like_a_value(cell) for cell in filled.values())


def stated_beside(sheet: Sheet, above: int) -> tuple[tuple[int, int, str] | None, str | None]:
    """Return ((row, column, unit), name of the quantity) that a block above a table states."""
    unit, name = None, None
    for row, cells in sheet.rows.items():
        if row >= above:
            break
        for column, cell in cells.items():
            beside = sheet.cell(row, column + 1)
            if cell.kind is not Kind.TEXT or beside is None or beside.kind is not Kind.TEXT:
                continue
            key = known.words(cell.text)
            text = beside.text.strip()
            if key & known.UNIT_KEYS and looks_like_unit(text.strip("[]()")):
                unit = (row, column + 1, text)
            elif key & known.NAME_KEYS and name is None:
                name = text
    return unit, name
