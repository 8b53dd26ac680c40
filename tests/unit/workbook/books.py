"""Making small workbooks for tests, part by part, so that they may be wrong on purpose."""

from __future__ import annotations

import io
import zipfile
from collections.abc import Mapping, Sequence
from xml.sax.saxutils import escape

MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
OFFICE = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
PACKAGE = "http://schemas.openxmlformats.org/package/2006"
SHEET_TYPE = "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet.main+xml"


def zipped(parts: Mapping[str, str | bytes]) -> bytes:
    """Return the parts as an archive."""
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, text in parts.items():
            archive.writestr(name, text)
    return out.getvalue()


def parts(sheet_data: str, *, after: str = "", before: str = "", styles: str = "") -> dict[str, str | bytes]:
    """Return the parts of a workbook with one sheet Data."""
    style_relation = f'<Relationship Id="s" Type="{OFFICE}/styles" Target="styles.xml"/>' if styles else ""
    found: dict[str, str | bytes] = {
        "[Content_Types].xml": f'<Types xmlns="{PACKAGE}/content-types">'
        f'<Override PartName="/xl/workbook.xml" ContentType="{SHEET_TYPE}"/></Types>',
        "_rels/.rels": f'<Relationships xmlns="{PACKAGE}/relationships"><Relationship Id="w" '
        f'Type="{OFFICE}/officeDocument" Target="xl/workbook.xml"/></Relationships>',
        "xl/workbook.xml": f'<workbook xmlns="{MAIN}" xmlns:r="{OFFICE}"><sheets>'
        '<sheet name="Data" sheetId="1" r:id="d"/></sheets></workbook>',
        "xl/_rels/workbook.xml.rels": f'<Relationships xmlns="{PACKAGE}/relationships"><Relationship Id="d" '
        f'Type="{OFFICE}/worksheet" Target="worksheets/sheet1.xml"/>{style_relation}</Relationships>',
        "xl/worksheets/sheet1.xml": f'<worksheet xmlns="{MAIN}">{before}<sheetData>{sheet_data}</sheetData>'
        f"{after}</worksheet>",
    }
    if styles:
        found["xl/styles.xml"] = f'<styleSheet xmlns="{MAIN}">{styles}</styleSheet>'
    return found


def styles_for(*codes: str) -> str:
    """Return styles 1, 2 … that show numbers in the given formats; style 0 has none."""
    formats = "".join(
        f'<numFmt numFmtId="{164 + i}" formatCode="{escape(c, {chr(34): "&quot;"})}"/>'
        for i, c in enumerate(codes)
    )
    cells = "".join(f'<xf numFmtId="{164 + i}" fontId="0"/>' for i in range(len(codes)))
    return f'<numFmts>{formats}</numFmts><cellXfs><xf numFmtId="0" fontId="0"/>{cells}</cellXfs>'


def row(number: int, *cells: str | float | tuple[float, int] | None, attributes: str = "") -> str:
    """Return a row: texts inline, numbers, (number, style), None for an empty cell; XML as it is."""
    xml = ""
    for column, cell in enumerate(cells):
        ref = f"{chr(65 + column)}{number}"
        if cell is None:
            continue
        if isinstance(cell, tuple):
            xml += f'<c r="{ref}" s="{cell[1]}"><v>{cell[0]!r}</v></c>'
        elif isinstance(cell, (int, float)):
            xml += f'<c r="{ref}"><v>{cell!r}</v></c>'
        elif cell.startswith("<c"):
            xml += cell
        else:
            xml += f'<c r="{ref}" t="inlineStr"><is><t xml:space="preserve">{escape(cell)}</t></is></c>'
    return f'<row r="{number}"{attributes}>{xml}</row>'


def table(
    rows: Sequence[Sequence[str | float | tuple[float, int] | None]],
    *,
    heading: Sequence[str] = ("Batch", "Sample", "Shear [MPa]"),
) -> str:
    """Return a heading in row 1 and rows from row 2."""
    return row(1, *heading) + "".join(row(i, *cells) for i, cells in enumerate(rows, start=2))


LAYOUT = b"""
name = "test"
[sheet]
name = "Data"
[[table]]
shape = "long"
header_rows = [1]
first_row = 2
end = "blank:2"
group = { col = "A" }
sample = { col = "B" }
[[table.value]]
characteristic = "shear"
col = "C"
header = "Shear [MPa]"
unit = "MPa"
"""


def layout_with(extra: str = "") -> bytes:
    """Return the layout of `table` with more behind it."""
    return LAYOUT + extra.encode()
