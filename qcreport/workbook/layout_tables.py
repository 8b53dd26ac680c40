"""Reading `[[table]]` of a layout file."""

from __future__ import annotations

import re

from qcreport.toml_source import TableReader
from qcreport.workbook.layout_model import Shape, Source, SourceKind, TableLayout, UnitFrom, ValueLayout
from qcreport.workbook.layout_sources import parse_column_key, parse_factors, parse_source, parse_status
from qcreport.workbook.places import parse_cell, parse_columns

_END = re.compile(r"^blank:([1-9][0-9]{0,3})$")
_NO_GROUP = Source(kind=SourceKind.CONSTANT, constant="")


def parse_table(reader: TableReader) -> TableLayout:
    """Return one table; its faults are noted in the reader."""
    shape = Shape(_choice(reader, "shape", tuple(Shape), Shape.LONG))
    header_rows = tuple(reader.integers("header_rows", ()))
    units_row = reader.integer("units_row", None, minimum=1)
    first_row = reader.integer("first_row", minimum=1)
    _check_rows(reader, header_rows, units_row, first_row)
    if "group" not in reader:
        reader.fault(None, '"group" is missing: say where the batch stands')
    table = TableLayout(
        shape=shape,
        header_rows=header_rows,
        units_row=units_row,
        first_row=max(first_row, 1),
        blank_rows_end=_end(reader),
        group=parse_source(reader, "group") or _NO_GROUP,
        line=parse_source(reader, "line"),
        sample=parse_source(reader, "sample"),
        replicate=parse_source(reader, "replicate"),
        time=parse_source(reader, "time"),
        status=parse_status(reader),
        factors=parse_factors(reader),
        values=tuple(_value(value, shape) for value in reader.tables("value", required=True)),
    )
    _check_shape(reader, table)
    return table


def _choice(reader: TableReader, key: str, words: tuple[str, ...], default: str) -> str:
    """Return one of the words; the default where the file says something else (and a fault is noted)."""
    word = reader.text(key, default, choices=words)
    return word if word in words else default


def _end(reader: TableReader) -> int | None:
    text = reader.text("end", "blank:2")
    if text == "sheet":
        return None
    found = _END.match(text)
    if found is None:
        reader.fault("end", f'must be "sheet" or "blank:2" (so many blank rows end it), found {text!r}')
        return 2
    return int(found.group(1))


def _check_rows(
    reader: TableReader, header_rows: tuple[int, ...], units_row: int | None, first_row: int
) -> None:
    if any(row < 1 for row in header_rows) or list(header_rows) != sorted(set(header_rows)):
        reader.fault("header_rows", f"must be rows from 1, in order, found {list(header_rows)}")
    if "first_row" in reader and header_rows and max(header_rows) >= first_row:
        reader.fault("first_row", "must lie below the heading rows")
    if units_row is not None and "first_row" in reader and units_row >= first_row:
        reader.fault("units_row", "must lie above the first row of data")


def _check_shape(reader: TableReader, table: TableLayout) -> None:
    in_heading = table.group.kind is SourceKind.HEADER_CELLS
    if (table.shape is Shape.WIDE) != in_heading and "group" in reader:
        reader.fault("group", 'a wide table, and only that, has group = { header_cells = "B:E" }')
    if table.shape is Shape.WIDE and len(table.values) > 1:
        reader.fault("value", "a wide table holds one characteristic")
    if table.shape is Shape.WIDE and not table.header_rows:
        reader.fault("header_rows", "a wide table needs the row of its batch names")
    for value in table.values:
        if value.unit_from is UnitFrom.UNITS_ROW and table.units_row is None:
            reader.fault("units_row", 'is missing although unit_from = "units_row"')


def _value(reader: TableReader, shape: Shape) -> ValueLayout:
    header = reader.text("header", None)
    first, last = _value_columns(reader, shape, header)
    unit_from = UnitFrom(_choice(reader, "unit_from", tuple(UnitFrom), UnitFrom.LAYOUT))
    unit = reader.text("unit") if unit_from is UnitFrom.LAYOUT else reader.text("unit", None)
    return ValueLayout(
        characteristic=str(reader.text("characteristic")).strip(),
        first_column=first,
        last_column=last,
        header=header,
        unit=unit.strip() if isinstance(unit, str) else None,
        unit_from=unit_from,
        unit_cell=_unit_cell(reader, unit_from),
        unit_column=parse_column_key(reader, "unit_col", required=unit_from is UnitFrom.COLUMN),
    )


def _value_columns(reader: TableReader, shape: Shape, header: str | None) -> tuple[int | None, int | None]:
    if shape is Shape.WIDE:
        return None, None
    if "cols" in reader:
        text = str(reader.text("cols"))
        columns = parse_columns(text)
        if columns is None:
            reader.fault("cols", f"must be columns such as C:G, found {text!r}")
            return 1, 1
        if shape is Shape.LONG and columns[0] != columns[1]:
            reader.fault("cols", 'several columns are only for shape = "replicates_across"')
        return columns
    column = parse_column_key(reader, "col", required=header is None)
    return column, column


def _unit_cell(reader: TableReader, unit_from: UnitFrom) -> tuple[int, int] | None:
    text = reader.text("unit_cell") if unit_from is UnitFrom.CELL else reader.text("unit_cell", None)
    if not isinstance(text, str) or not text.strip():
        return None
    place = parse_cell(text.strip())
    if place is None:
        reader.fault("unit_cell", f"must be a cell such as B7, found {text!r}")
    return place
