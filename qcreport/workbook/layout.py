"""Reading a layout file."""

from __future__ import annotations

from qcreport.toml_source import TomlSource
from qcreport.workbook.layout_model import Layout
from qcreport.workbook.layout_parts import (
    parse_anchors,
    parse_leave_out,
    parse_marks,
    parse_numbers,
    parse_sheet,
)
from qcreport.workbook.layout_tables import parse_table

__all__ = ["LAYOUT_VERSION", "Layout", "parse_layout"]

LAYOUT_VERSION = 1


def parse_layout(data: bytes, file: str) -> Layout:
    """Return the layout that a file's bytes describe.

    Parameters
    ----------
    data : bytes
        TOML text in UTF-8.
    file : str
        The file's name as the person knows it, for the faults.

    Returns
    -------
    Layout
        The checked layout.

    Raises
    ------
    ConfigError
        With all faults at once, each with its line and key.
    """
    source = TomlSource.from_bytes(data, file)
    top = source.top
    version = top.integer("layout_version", 1)
    if version != LAYOUT_VERSION:
        top.fault("layout_version", f"this software reads version {LAYOUT_VERSION}, found {version}")
    name = str(top.text("name"))
    sheet_name, sheet_pattern, text = parse_sheet(top.table("sheet"))
    tables = tuple(parse_table(table) for table in top.tables("table", required=True))
    if not tables:
        top.fault("table", "at least one [[table]] is needed")
    layout = Layout(
        name=name,
        sheet_name=sheet_name,
        sheet_pattern=sheet_pattern,
        text=text,
        tables=tables,
        numbers=parse_numbers(top.table("numbers")),
        leave_out=parse_leave_out(top.table("leave_out_rows")),
        marks=parse_marks(top.table("marks")),
        anchors=parse_anchors(top.table("match")),
        different_groups=frozenset(top.table("groups").texts("different", ())),
    )
    source.finish()
    return layout
