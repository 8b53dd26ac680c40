"""Several data sets side by side on one sheet: a pair of columns each, one characteristic each."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from pathlib import Path

from openpyxl import Workbook
from openpyxl.utils import get_column_letter
from rig import Site

Cell = float | str
DataSets = Mapping[str, Mapping[str, Sequence[Cell]]]
"""Characteristic, group label, values."""

_HEAD = """layout_version = 1
name = "sheets"
[sheet]
name = "Results"
[numbers]
missing = ["n/a"]
"""
_TABLE = """[[table]]
shape = "long"
header_rows = [1]
first_row = 2
end = "blank:2"
group = {{ col = "{group}" }}
[[table.value]]
characteristic = "{name}"
col = "{value}"
header = "{name} (u)"
unit = "u"
unit_from = "header"
"""


def write_export(path: Path, data: DataSets) -> Path:
    """Write the export."""
    book = Workbook()
    (page,) = book.worksheets
    page.title = "Results"
    for number, (name, groups) in enumerate(data.items()):
        column = 2 * number + 1
        page.cell(1, column, f"{name} batch")
        page.cell(1, column + 1, f"{name} (u)")
        rows = [(label, value) for label, values in groups.items() for value in values]
        for row, (label, value) in enumerate(rows, start=2):
            page.cell(row, column, label)
            page.cell(row, column + 1, value)
    book.save(path)
    book.close()
    return path


def write_layout(site: Site, names: Sequence[str]) -> None:
    """Write the layout `sheets` of exports with these characteristics."""
    tables = [
        _TABLE.format(name=name, group=get_column_letter(2 * n + 1), value=get_column_letter(2 * n + 2))
        for n, name in enumerate(names)
    ]
    (site.root / "config/layouts/sheets.toml").write_text(_HEAD + "".join(tables), "utf-8")


def write_plan(
    site: Site, names: Sequence[str], comparison: str, characteristic: str = "", more: str = ""
) -> None:
    """Write a plan that compares every one of them in the same way."""
    entries = "".join(f'[[characteristic]]\nname = "{n}"\nunit = "u"\n{characteristic}\n' for n in names)
    head = 'name = "sheets"\ntitle = "T"\nexports = ["sheets*.xlsx"]\nlayout = "sheets"\n'
    text = f'{head}[comparison]\nindependent_unit = "reading"\n{comparison}\n{entries}{more}'
    (site.root / "config/plans/sheets.toml").write_text(text, "utf-8")
