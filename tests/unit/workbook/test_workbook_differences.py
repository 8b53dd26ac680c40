"""A layout that no longer fits: the refusal shows what stands where the layout says what."""

from __future__ import annotations

import pytest

from qcreport.errors import ExportRefusedError
from qcreport.workbook.layout import parse_layout
from qcreport.workbook.reading import read_export
from workbook.books import LAYOUT, parts, row, table, zipped

ROWS = [["LA-1", "S1", 24.1], ["LA-1", "S2", 24.2], ["LB-1", "S3", 24.3]]
CHECKED = (
    LAYOUT.replace(b'group = { col = "A" }', b'group = { col = "A", header = "Batch" }')
    .replace(b'sample = { col = "B" }', b'sample = { col = "B", header = "Sample" }')
)  # fmt: skip
BY_HEADING = LAYOUT.replace(b'col = "C"\n', b"")


def refusal(found: dict[str, str | bytes], layout: bytes = CHECKED) -> ExportRefusedError:
    with pytest.raises(ExportRefusedError) as caught:
        read_export(zipped(found), name="x.xlsx", layout=parse_layout(layout, "l.toml"))
    assert caught.value.code == "layout_mismatch"
    return caught.value


def test_moved_columns_are_all_told_with_where_they_stand_now() -> None:
    moved = [[c, a, b] for a, b, c in ROWS]
    found = refusal(parts(table(moved, heading=("Shear [MPa]", "Batch", "Sample"))))
    assert found.where == "Data!A1, Data!B1, Data!C1"
    assert 'Data!A1: The heading is "Shear [MPa]". "Batch" stands in column B.' in found.found
    assert 'Data!B1: The heading is "Batch". "Sample" stands in column C.' in found.found
    assert 'Data!C1: The heading is "Sample". "Shear [MPa]" stands in column A.' in found.found
    assert 'Data!A1: The layout says "Batch".' in found.expected
    assert found.cells == ("Data!A1", "Data!B1", "Data!C1")


def test_swapped_label_columns_are_told() -> None:
    swapped = [[b, a, c] for a, b, c in ROWS]
    found = refusal(parts(table(swapped, heading=("Sample", "Batch", "Shear [MPa]"))))
    assert found.cells == ("Data!A1", "Data!B1")


def test_changed_heading_is_told() -> None:
    found = refusal(parts(table(ROWS, heading=("Batch", "Sample", "Peel force"))))
    assert found.where == "Data!C1"
    assert found.found == 'The heading is "Peel force".'
    assert found.expected == 'The layout says "Shear [MPa]".'


def test_shifted_first_row_is_told_with_where_the_heading_stands_now() -> None:
    rows = row(1, "Export of 2026-01-12") + row(3, "Batch", "Sample", "Shear [MPa]")
    rows += "".join(row(i, *cells) for i, cells in enumerate(ROWS, start=4))
    found = refusal(parts(rows))
    assert 'Data!C1: There is no heading. "Shear [MPa]" stands in Data!C3.' in found.found
    assert 'Data!A1: The heading is "Export of 2026-01-12". "Batch" stands in Data!A3.' in found.found
    assert {"Data!A1", "Data!A3", "Data!C3"} <= set(found.cells)
    assert "It stands in Data!C3." in refusal(parts(rows), BY_HEADING).found


def test_heading_that_is_gone_is_told() -> None:
    found = refusal(parts(table(ROWS, heading=("Batch", "Sample", "Peel force"))), BY_HEADING)
    assert found.where == "sheet Data, row 1"
    assert found.found == 'No column has the heading "Shear [MPa]".'


def test_missing_or_renamed_sheet_is_told_with_the_sheets_there_are() -> None:
    book = parts(table(ROWS))
    book["xl/workbook.xml"] = str(book["xl/workbook.xml"]).replace('name="Data"', 'name="Results &#8238;x"')
    found = refusal(book)
    assert found.where == "the workbook"
    assert found.found == "Its sheets are: Results U+202Ex."
    assert found.expected == 'The layout asks for a sheet "Data".'


@pytest.mark.parametrize("character", ["&#10;", "&#13;", "&#9;", "&#133;", "&#8232;", "&#8238;"])
def test_names_cannot_add_lines_or_turn_the_text_around(character: str) -> None:
    book = parts(table([["LA-1", "S1", "see note"], ["LA-1", "S2", 24.2]]))
    name = f"Da{character}Next step: none"
    book["xl/workbook.xml"] = str(book["xl/workbook.xml"]).replace('name="Data"', f'name="{name}"')
    layout = CHECKED.replace(b'name = "Data"\n', b"")
    with pytest.raises(ExportRefusedError) as caught:
        read_export(zipped(book), name="x.xlsx", layout=parse_layout(layout, "l.toml"))
    lines = caught.value.five_lines()
    assert lines.count("\n") == 5
    assert all(line.isprintable() for line in lines.split("\n"))


def test_names_cannot_add_lines_to_notices() -> None:
    book = parts(table([["LA-1", "S1", "24.1"], ["LA-1", "S2", 24.2]]))
    book["xl/workbook.xml"] = str(book["xl/workbook.xml"]).replace('name="Data"', 'name="Da&#10;ta&#8238;"')
    layout = parse_layout(CHECKED.replace(b'name = "Data"\n', b""), "l.toml")
    (notice,) = read_export(zipped(book), name="x.xlsx", layout=layout).notices
    assert "U+000A" in notice.text
    assert notice.text.isprintable()
