"""Reading where a label is taken from: `{ col = "A" }`, `{ from = "cell", cell = "B3" }` and so on."""

from __future__ import annotations

import re

from qcreport.toml_source import TableReader
from qcreport.workbook.layout_model import Factor, Source, SourceKind, StatusColumn
from qcreport.workbook.places import parse_cell, parse_column, parse_columns

_FORMS = "col, header, header_cells, constant or from"


def parse_column_key(reader: TableReader, key: str, *, required: bool) -> int | None:
    """Return the 1-based column that `key` names."""
    text = reader.text(key) if required else reader.text(key, None)
    if not isinstance(text, str) or not text.strip():
        return None
    column = parse_column(text.strip())
    if column is None:
        reader.fault(key, f"must be a column such as C, found {text!r}")
    return column


def parse_source(parent: TableReader, key: str) -> Source | None:
    """Return the source that `key` of a table describes; None where the key is absent."""
    if key not in parent:
        return None
    return read_source(parent.table(key), allow_header_cells=key == "group")


def read_source(reader: TableReader, *, allow_header_cells: bool = False) -> Source:
    """Return the source that a small table describes; faults are noted in it."""
    repeats = bool(reader.flag("repeats_below", False))
    forms = [form for form in ("from", "col", "header_cells", "constant", "header") if form in reader]
    if forms[:2] == ["col", "header"]:
        forms = ["col"]
    if len(forms) != 1:
        reader.fault(None, f"must say where it stands by one of {_FORMS}")
        for key in ("col", "header", "header_cells", "constant", "from", "cell", "pattern"):
            reader.raw(key, None)
        return Source(kind=SourceKind.CONSTANT, constant="")
    form = forms[0]
    if form == "from":
        return _from(reader)
    if form == "constant":
        return Source(kind=SourceKind.CONSTANT, constant=str(reader.text("constant")).strip())
    if form == "header_cells":
        return _header_cells(reader, allowed=allow_header_cells)
    header = reader.text("header", None)
    if form == "header":
        return Source(kind=SourceKind.HEADER, header=header, repeats_below=repeats)
    column = parse_column_key(reader, "col", required=True)
    return Source(kind=SourceKind.COLUMN, column=column or 1, header=header, repeats_below=repeats)


def _header_cells(reader: TableReader, *, allowed: bool) -> Source:
    text = str(reader.text("header_cells"))
    columns = parse_columns(text)
    if columns is None:
        reader.fault("header_cells", f"must be columns such as B:E, found {text!r}")
        columns = (1, 1)
    if not allowed:
        reader.fault("header_cells", "only the group of a wide table can stand in the heading")
    return Source(kind=SourceKind.HEADER_CELLS, column=columns[0], last_column=columns[1])


def _from(reader: TableReader) -> Source:
    word = reader.text("from", choices=("sheet_name", "file_name", "cell"))
    if word == "file_name":
        return Source(kind=SourceKind.FILE_NAME, pattern=_pattern(reader))
    if word == "cell":
        text = str(reader.text("cell"))
        place = parse_cell(text)
        if place is None:
            reader.fault("cell", f"must be a cell such as B3, found {text!r}")
            place = (1, 1)
        return Source(kind=SourceKind.CELL, row=place[0], column=place[1])
    pattern = _pattern(reader) if "pattern" in reader else None
    return Source(kind=SourceKind.SHEET_NAME, pattern=pattern)


def _pattern(reader: TableReader) -> re.Pattern[str] | None:
    text = reader.text("pattern")
    try:
        return re.compile(text) if isinstance(text, str) else None
    except re.error as error:
        reader.fault("pattern", f"is not a regular expression: {error}")
        return None


def parse_status(parent: TableReader) -> StatusColumn | None:
    """Return `status = { col, use, exclude }`."""
    if "status" not in parent:
        return None
    reader = parent.table("status")
    use = tuple(reader.texts("use", ()))
    exclude = tuple(reader.texts("exclude", ()))
    if not use and not exclude:
        reader.fault(None, 'must say which rows count ("use") or do not ("exclude")')
    return StatusColumn(source=read_source(reader), use=use, exclude=exclude)


def parse_factors(parent: TableReader) -> tuple[Factor, ...]:
    """Return the `[[table.factor]]` of a table."""
    return tuple(
        Factor(name=str(reader.text("name")), source=read_source(reader))
        for reader in parent.tables("factor")
    )
