"""Other formats, text exports, and agreement with another reader on plain tables."""

from __future__ import annotations

import datetime as dt
import io
import random

import openpyxl
import pytest
from openpyxl.comments import Comment
from openpyxl.styles import Font

from qcreport.errors import ExportRefusedError
from qcreport.measurements import MeasurementSet
from qcreport.workbook.complete import looks_complete
from qcreport.workbook.layout import parse_layout
from qcreport.workbook.limits import Limits
from qcreport.workbook.names import is_ignored_name
from qcreport.workbook.number_format import BUILT_IN, parse_number_format
from qcreport.workbook.opening import open_export
from qcreport.workbook.reading import read_export
from qcreport.workbook.times import serial_time
from qcreport.workbook.units import looks_like_unit, same_unit
from workbook.books import layout_with, parts, table, zipped
from workbook.corpus import export


def saved(book: openpyxl.Workbook) -> bytes:
    out = io.BytesIO()
    book.save(out)
    return out.getvalue()


def test_plain_tables_agree_with_openpyxl() -> None:
    random_numbers = random.Random(7)  # noqa: S311 - not for secrets
    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    for r in range(1, 60):
        for c in range(1, 9):
            value: object = random_numbers.choice(
                [None, random_numbers.gauss(0, 1e6), random_numbers.randrange(10**9), f"text {r}", True,
                 "  spaced  ", "Ü & <x>", dt.datetime(2026, 1, 2, 3, 4, 5), 1e-300, "=A1"]  # noqa: DTZ001 - cells hold local times
            )  # fmt: skip
            sheet.cell(r, c, value)  # type: ignore[arg-type]
    data = saved(book)
    again = openpyxl.load_workbook(io.BytesIO(data)).active
    assert again is not None
    ours = open_export(data, name="x.xlsx", text=None, limits=Limits())
    scanned = ours.sheet(ours.sheets[0])
    for r in range(1, 60):
        for c in range(1, 9):
            cell, other = scanned.rows.get(r, {}).get(c), again.cell(r, c).value
            if other is None:
                assert cell is None
                continue
            assert cell is not None
            if isinstance(other, bool):
                assert (cell.kind, cell.text) == ("b", "1")
            elif isinstance(other, dt.datetime):
                assert serial_time(float(cell.text), date_1904=False) == other
                assert ours.number_format(cell).date
            elif isinstance(other, (int, float)):
                assert float(cell.text) == other
            elif cell.formula:
                assert (other, cell.cached) == ("=A1", False)
            else:
                assert cell.text == other


def test_marks_written_by_another_program_are_seen() -> None:
    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    sheet.title = "Data"
    for cells in (
        ("Batch", "Sample", "Shear [MPa]"),
        ("LA-1", "S1", 24.1),
        ("LA-1", "S2", 24.2),
        ("LB-1", "S3", 24.3),
    ):
        sheet.append(cells)
    sheet["C2"].comment = Comment("bubble", "mo")
    sheet["C3"].font = Font(strike=True)
    sheet.row_dimensions[4].hidden = True
    result = read_export(saved(book), name="x.xlsx", layout=parse_layout(layout_with(), "l.toml"))
    assert [m.marks for m in result.measurements] == [("commented",), ("struck",), ("hidden",)]
    assert {n.code for n in result.notices} == {"commented_cells", "struck_cells", "hidden_rows_included"}


def text_export(
    data: bytes, *, extra: str = "", form: str = 'delimiter = ";"', name: str = "x.csv"
) -> MeasurementSet:
    layout = layout_with(extra).decode().replace('name = "Data"', f"text = {{ {form} }}")
    return read_export(data, name=name, layout=parse_layout(layout.encode(), "l.toml"))


def test_text_export() -> None:
    data = 'Batch;Sample;Shear [MPa]\r\nLA-1;S1;"24,5"\r\nLA-1;"S;2";25,5\r\n'.encode("utf-8-sig")
    result = text_export(data)
    assert [(m.sample, m.value, str(m.cell)) for m in result.measurements] == [
        ("S1", 24.5, "record 2, column 3"),
        ("S;2", 25.5, "record 3, column 3"),
    ]
    assert {n.code for n in result.notices} == {"limited_checks", "decimal_comma"}
    assert result.measurements[0].decimals == 1


@pytest.mark.parametrize(
    ("data", "code"),
    [
        (b"Batch;Sample;Shear [MPa]\nLA-1;S1;\xb5\n", "layout_mismatch"),
        (b"Batch,Sample,Shear [MPa]\nLA-1,S1,24.5\nLA-1,S2,24.5\n", "layout_mismatch"),
        (b'Batch;Sample;Shear [MPa]\nLA-1;S1;"24.5\n', "damaged_or_incomplete"),
        (b"Batch;Sample;Shear [MPa]\nLA-1;S1;2\x004\n", "damaged_or_incomplete"),
        (b"Batch;Sample;Shear [MPa]\nLA-1;S1;12.450\n", "ambiguous_decimal_mark"),
        (b"Batch;Sample;Shear [MPa]\n", "no_data_rows"),
        (zipped(parts(table([["LA-1", "S1", 24.1]]))), "wrong_extension"),
    ],
)
def test_text_exports_that_refuse(data: bytes, code: str) -> None:
    with pytest.raises(ExportRefusedError) as caught:
        text_export(data)
    assert caught.value.code == code


def test_text_under_a_workbook_name_is_no_workbook() -> None:
    with pytest.raises(ExportRefusedError) as caught:
        text_export(b"Batch;Sample;Shear [MPa]\nLA-1;S1;1\n", name="x.xlsx")
    assert caught.value.code == "not_a_workbook"


def test_old_workbook_under_another_ending_refuses() -> None:
    with pytest.raises(ExportRefusedError) as caught:
        read_export(export("o25_old_format.xls"), name="x.xlsx", layout=parse_layout(layout_with(), "l.toml"))
    assert caught.value.code == "wrong_extension"


@pytest.mark.parametrize(
    ("serial", "date_1904", "time"),
    [
        (0.0, True, "1904-01-01T00:00:00"),
        (1.0, False, "1900-01-01T00:00:00"),
        (59.0, False, "1900-02-28T00:00:00"),
        (61.0, False, "1900-03-01T00:00:00"),
        (46034.32430555556, False, "2026-01-12T07:47:00"),
    ],
)
def test_date_systems(serial: float, date_1904: bool, time: str) -> None:
    found = serial_time(serial, date_1904=date_1904)
    assert found is not None
    assert found.isoformat() == time


def test_numbers_that_are_no_dates() -> None:
    assert serial_time(-1.0, date_1904=False) is None
    assert serial_time(3e6, date_1904=False) is None


@pytest.mark.parametrize(
    ("code", "decimals", "percent", "date"),
    [
        ("General", None, False, False),
        ("0.00", 2, False, False),
        ("#,##0.0;[Red]-#,##0.0", 1, False, False),
        ("0.0#", None, False, False),
        ("0.00%", 2, True, False),
        ('0.00" MPa"', 2, False, False),
        ("[$-409]d\\-mmm\\-yy", None, False, True),
        ("[mm]:ss", None, False, True),
        ("0.00E+00", None, False, False),
        ('"d"0', 0, False, False),
        ("@", None, False, False),
    ],
)
def test_number_formats(code: str, decimals: int | None, percent: bool, date: bool) -> None:
    found = parse_number_format(code)
    assert (found.decimals, found.percent, found.date) == (decimals, percent, date)


def test_built_in_number_formats() -> None:
    dates = {number for number, code in BUILT_IN.items() if parse_number_format(code).date}
    assert dates == {*range(14, 23), *range(27, 37), *range(45, 48), *range(50, 59), *range(71, 82)}
    percents = {number for number, code in BUILT_IN.items() if parse_number_format(code).percent}
    assert percents == {9, 10, 67, 68}


def test_units() -> None:
    assert same_unit("mPa·s", "mPa.s")
    assert same_unit("N/mm²", "N/mm2")
    assert same_unit("µm", "μm")
    assert not same_unit("mPa", "MPa")
    assert [
        u for u in ("MPa", "psi", "mPa.s", "mg/kg", "%", "N/mm²", "°C", "g/m2") if not looks_like_unit(u)
    ] == []
    assert [u for u in ("mean", "n=5", "23 °C", "corrected", "") if looks_like_unit(u)] == []


def test_ignored_names() -> None:
    assert [n for n in ("~$a.xlsx", ".a.xlsx", ".~lock.a.ods#", "") if not is_ignored_name(n)] == []
    assert not is_ignored_name("a.xlsx")


@pytest.mark.parametrize(
    ("data", "complete"),
    [
        (b"", False),
        (zipped({"a": "x" * 5000}), True),
        (zipped({"a": "x" * 5000})[:-1], False),
        (bytes(5000), False),
        (b"Batch;Value\n", True),
        (b"Batch;Value\n" + bytes(5000), False),
        (zipped({"../a": "x"}), True),
    ],
)
def test_completeness(data: bytes, complete: bool) -> None:
    assert looks_complete(data) is complete


def test_cut_copies_are_never_complete() -> None:
    data = export("o01_plain_long.xlsx")
    assert looks_complete(data)
    assert not any(looks_complete(data[:length]) for length in range(0, len(data), 37))


def ods(rows: str, *, extra: dict[str, str] | None = None) -> bytes:
    office = "urn:oasis:names:tc:opendocument:xmlns"
    content = (
        f'<office:document-content xmlns:office="{office}:office:1.0" xmlns:table="{office}:table:1.0" '
        f'xmlns:text="{office}:text:1.0"><office:body><office:spreadsheet><table:table table:name="Data">'
        f"{rows}</table:table></office:spreadsheet></office:body></office:document-content>"
    )
    manifest = f'<manifest:manifest xmlns:manifest="{office}:manifest:1.0"/>'
    return zipped(
        {
            "mimetype": "application/vnd.oasis.opendocument.spreadsheet",
            "META-INF/manifest.xml": manifest,
            "content.xml": content,
            **(extra or {}),
        }
    )


def ods_row(*cells: str | float) -> str:
    xml = ""
    for cell in cells:
        if isinstance(cell, float):
            xml += f'<table:table-cell office:value-type="float" office:value="{cell}"/>'
        else:
            xml += f'<table:table-cell office:value-type="string"><text:p>{cell}</text:p></table:table-cell>'
    return f"<table:table-row>{xml}</table:table-row>"


def test_open_document_sheets_are_read_with_their_limits_told() -> None:
    rows = (
        ods_row("Batch", "Sample", "Shear [MPa]") + ods_row("LA-1", "S1", 24.1) + ods_row("LA-1", "S2", 24.25)
    )
    result = read_export(ods(rows), name="x.ods", layout=parse_layout(layout_with(), "l.toml"))
    assert [(m.value, m.text, str(m.cell)) for m in result.measurements] == [
        (24.1, "24.1", "Data!C2"),
        (24.25, "24.25", "Data!C3"),
    ]
    assert [n.code for n in result.notices] == ["limited_checks"]


def test_fractions_under_percent_refuse_in_open_document_sheets() -> None:
    rows = (
        ods_row("Batch", "Sample", "Shear [%]") + ods_row("LA-1", "S1", 0.0118) + ods_row("LA-1", "S2", 0.01)
    )
    layout = layout_with().replace(b"MPa", b"%")
    with pytest.raises(ExportRefusedError) as caught:
        read_export(ods(rows), name="x.ods", layout=parse_layout(layout, "l.toml"))
    assert caught.value.code == "unsupported_format"


@pytest.mark.parametrize(
    ("extra", "code"),
    [
        ({"META-INF/manifest.xml": "<a><manifest:encryption-data/></a>"}, "encrypted"),
        ({"styles.xml": "<!DOCTYPE a><a/>"}, "unsafe_content"),
        ({"content.xml": "<broken"}, "damaged_or_incomplete"),
    ],
)
def test_open_document_sheets_that_refuse(extra: dict[str, str], code: str) -> None:
    with pytest.raises(ExportRefusedError) as caught:
        read_export(ods("", extra=extra), name="x.ods", layout=parse_layout(layout_with(), "l.toml"))
    assert caught.value.code == code
