"""Files made to do harm, or damaged: they refuse within the limits."""

from __future__ import annotations

import io
import struct
import warnings
import zipfile
import zlib

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from qcreport.errors import ExportRefusedError
from qcreport.measurements import MeasurementSet
from qcreport.workbook.complete import looks_complete
from qcreport.workbook.layout import parse_layout
from qcreport.workbook.limits import MEGABYTE, Limits
from qcreport.workbook.reading import read_export
from workbook.books import MAIN, layout_with, parts, row, table, zipped
from workbook.corpus import BY_NAME, CORPUS, export, layout_bytes

GOOD = table([["LA-1", "S1", 24.1], ["LA-1", "S2", 24.2], ["LB-1", "S3", 24.3]])
LAYOUT = parse_layout(layout_with(), "l.toml")
INCOMPLETE = ("damaged_or_incomplete", "empty_file", "not_a_workbook", "unsafe_content")
FUZZED = [
    name for name in BY_NAME if (CORPUS / "layouts" / f"{name}.toml").exists() and not name.endswith(".xls")
]


def refusal(data: bytes, *, name: str = "x.xlsx", limits: Limits | None = None) -> ExportRefusedError:
    with pytest.raises(ExportRefusedError) as caught:
        read_export(data, name=name, layout=LAYOUT, limits=limits)
    assert caught.value.file == name
    return caught.value


@pytest.mark.parametrize("encoding", ["utf-8", "utf-16", "utf-16-be", "iso-8859-1"])
@pytest.mark.parametrize("part", ["xl/worksheets/sheet1.xml", "xl/theme/theme1.xml", "docProps/core.xml"])
def test_document_type_definition_refuses_in_any_encoding_and_part(encoding: str, part: str) -> None:
    found = parts(GOOD)
    text = f'<?xml version="1.0" encoding="{encoding}"?><!DOCTYPE a [<!ENTITY b "c">]><a>&b;</a>'
    if encoding == "utf-16-be":
        found[part] = b"\xfe\xff" + text.replace("utf-16-be", "utf-16").encode("utf-16-be")
    else:
        found[part] = text.encode(encoding)
    assert refusal(zipped(found)).code == "unsafe_content"


def test_part_that_unpacks_to_too_much_refuses() -> None:
    blanks = " " * (3 * MEGABYTE)
    data = zipped(parts(GOOD + blanks))
    assert refusal(data, limits=Limits(max_part_bytes=2 * MEGABYTE)).code == "too_large_unpacked"
    assert refusal(data, limits=Limits(ratio_from_bytes=MEGABYTE)).code == "too_large_unpacked"
    assert refusal(data, limits=Limits(max_unpacked_bytes=2 * MEGABYTE)).code == "too_large_unpacked"


def test_forged_sizes_do_not_help_a_bomb() -> None:
    found = parts(GOOD + " " * (3 * MEGABYTE))
    real = len(found["xl/worksheets/sheet1.xml"])
    data = zipped(found).replace(struct.pack("<L", real), struct.pack("<L", 100))
    assert refusal(data, limits=Limits(max_part_bytes=2 * MEGABYTE)).code == "too_large_unpacked"
    assert refusal(data).code == "damaged_or_incomplete"


@pytest.mark.parametrize(
    "name", ["../../evil.txt", "/etc/cron.d/evil", "xl/..\\..\\evil", "C:\\evil", "..", "xl/../../evil"]
)
def test_entry_outside_refuses(name: str) -> None:
    assert refusal(zipped({**parts(GOOD), name: "x"})).code == "unsafe_content"


@pytest.mark.parametrize("name", ["xl/workbook.xml", "XL/Workbook.xml"])
def test_doubled_entry_refuses(name: str) -> None:
    out = io.BytesIO(zipped(parts(GOOD)))
    with warnings.catch_warnings(), zipfile.ZipFile(out, "a") as archive:
        warnings.simplefilter("ignore")
        archive.writestr(name, "<workbook/>")
    assert refusal(out.getvalue()).code == "unsafe_content"


def test_overlapping_entries_refuse() -> None:
    data = bytearray(zipped({**parts(GOOD), "a": b"x" * 100, "b": b"x" * 100}))
    first, second = data.rfind(b"PK\x01\x02", 0, data.rfind(b"PK\x01\x02")), data.rfind(b"PK\x01\x02")
    data[second + 42 : second + 46] = data[first + 42 : first + 46]
    assert refusal(bytes(data)).code in ("unsafe_content", "damaged_or_incomplete")


def test_wrong_checksum_refuses_even_in_a_part_that_is_not_read() -> None:
    data = zipped({**parts(GOOD), "docProps/thumb.bin": b"picture"})
    wrong = data.replace(struct.pack("<L", zlib.crc32(b"picture")), b"\0\0\0\0")
    assert refusal(wrong).code == "damaged_or_incomplete"
    assert looks_complete(data)
    assert not looks_complete(wrong)


def test_entries_sheets_rows_cells_and_bytes_are_limited() -> None:
    data = zipped(parts(GOOD))
    assert refusal(data, limits=Limits(max_entries=3)).code == "too_large_unpacked"
    assert refusal(data, limits=Limits(max_file_bytes=100)).code == "too_large"
    assert refusal(data, limits=Limits(max_rows=3)).code == "too_many_rows"
    assert refusal(data, limits=Limits(max_cells=5)).code == "too_many_cells"
    assert refusal(data, limits=Limits(max_sheets=0)).code == "too_large_unpacked"


def test_far_corner_and_wrong_dimension_cost_nothing() -> None:
    far = '<row r="1048576"><c r="XFD1048576"><v>1</v></c></row>'
    data = zipped(parts(GOOD + far, before='<dimension ref="A1:XFD1048576"/>'))
    result = read_export(data, name="x.xlsx", layout=LAYOUT)
    assert [m.value for m in result.measurements] == [24.1, 24.2, 24.3]
    assert [(n.code, n.cells) for n in result.notices] == [("stray_cells", ("Data!XFD1048576",))]


@pytest.mark.parametrize(
    "bad",
    [
        '<row r="9"><c r="A9" t="s"><v>5</v></c></row>',
        '<row r="9"><c r="A9" s="7"><v>5</v></c></row>',
        '<row r="9"><c r="A8"><v>5</v></c></row>',
        '<row r="9"><c r="XFE9"><v>5</v></c></row>',
        '<row r="0"><c r="A0"><v>5</v></c></row>',
        '<row r="1048577"/>',
        '<row r="9"><c r="A9"><v>5</v></c><c r="A9"><v>6</v></c></row>',
        '<row r="2"><c r="C2"><v>99</v></c></row>',
        '<row r="9"><c r="A9"><v>5</v><v>6</v></c></row>',
        '<row r="9"><c r="A9"><v>5<b>6</b></v></c></row>',
        '<row r="9"><c r="A9" t="moon"><v>5</v></c></row>',
        '<row r="9"><c r="A9" t="inlineStr"><is><t>' + "x" * 40_000 + "</t></is></c></row>",
        '<row r="9"><c r="A9"><c r="B9"/></c></row>',
        '<c r="A9"><v>5</v></c>',
        "<row",
    ],
)
def test_sheet_that_no_program_writes_refuses(bad: str) -> None:
    assert refusal(zipped(parts(GOOD + bad))).code == "damaged_or_incomplete"


@pytest.mark.parametrize(
    ("data", "name", "code"),
    [
        (b"", "x.xlsx", "empty_file"),
        (b" \r\n", "x.csv", "empty_file"),
        (bytes(70_000), "x.xlsx", "damaged_or_incomplete"),
        (b"Batch,Value\nA,1\n", "x.xlsx", "not_a_workbook"),
        (b"<html><table>", "x.xls", "not_a_workbook"),
        (b"%PDF-1.7", "x.xlsx", "not_a_workbook"),
        (b"PK\x05\x06" + bytes(18), "x.xlsx", "not_a_workbook"),
        (zipped({"a.txt": "x"}), "x.xlsx", "not_a_workbook"),
        (zipped(parts(GOOD)), "x.xls", "wrong_extension"),
        (zipped(parts(GOOD)), "x.csv", "wrong_extension"),
        (zipped(parts(GOOD))[:700], "x.xlsx", "damaged_or_incomplete"),
        (b"\x09\x04\x06\x00\x00\x00", "x.xls", "unsupported_format"),
    ],
)
def test_what_is_no_workbook(data: bytes, name: str, code: str) -> None:
    assert refusal(data, name=name).code == code


def test_entry_with_a_password_and_other_packing_refuse() -> None:
    flagged = bytearray(zipped(parts(GOOD)))
    flagged[flagged.rfind(b"PK\x01\x02") + 8] |= 1
    assert refusal(bytes(flagged)).code == "encrypted"
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_BZIP2) as archive:
        for name, text in parts(GOOD).items():
            archive.writestr(name, text)
    assert refusal(out.getvalue()).code == "unsupported_format"


def test_macro_workbook_under_the_plain_ending_refuses() -> None:
    found = parts(GOOD)
    types = str(found["[Content_Types].xml"])
    found["[Content_Types].xml"] = types.replace(
        "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet.main+xml",
        "application/vnd.ms-excel.sheet.macroEnabled.main+xml",
    )
    assert refusal(zipped(found)).code == "wrong_extension"
    assert len(read_export(zipped(found), name="x.xlsm", layout=LAYOUT).measurements) == 3


def test_deep_nesting_does_no_harm() -> None:
    nested = "<x>" * 50_000 + "</x>" * 50_000
    result = read_export(zipped(parts(GOOD, after=nested)), name="x.xlsx", layout=LAYOUT)
    assert len(result.measurements) == 3


def test_escapes_and_half_pairs_in_texts() -> None:
    cells = ["_x0041__x005F_x0041_", "S_xD83E__xDDEA_", "_xD83E_"]
    data = (
        row(1, "Batch", "Sample", "Shear [MPa]") + row(2, *cells[:2], 24.1) + row(3, "LA-9", cells[2], 24.2)
    )
    result = read_export(zipped(parts(data)), name="x.xlsx", layout=LAYOUT)
    assert [m.batch for m in result.measurements] == ["A_x0041_", "LA-9"]
    assert [m.sample for m in result.measurements] == ["S🧪", "\ufffd"]


def test_namespace_prefixes_make_no_difference() -> None:
    found = parts(GOOD)
    sheet = (
        str(found["xl/worksheets/sheet1.xml"])
        .replace("</", "</m:")
        .replace("<", "<m:")
        .replace("<m:/m:", "</m:")
    )
    found["xl/worksheets/sheet1.xml"] = sheet.replace(f'xmlns="{MAIN}"', f'xmlns:m="{MAIN}"')
    assert len(read_export(zipped(found), name="x.xlsx", layout=LAYOUT).measurements) == 3


def _damaged(data: bytes, kind: str, at: int, length: int) -> bytes:
    at %= max(len(data), 1)
    if kind == "flip":
        return data[:at] + bytes([data[at] ^ (1 << (length % 8))]) + data[at + 1 :]
    if kind == "cut":
        return data[:at] + data[at + length :]
    if kind == "double":
        return data[: at + length] + data[at:]
    return data[:at]


@settings(max_examples=60, deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(
    name=st.sampled_from(FUZZED),
    kind=st.sampled_from(["flip", "cut", "double", "end"]),
    at=st.integers(0, 1 << 24),
    length=st.integers(1, 60),
    inside=st.booleans(),
    which=st.integers(0, 1000),
)
def test_damaged_copies_are_read_or_refused(
    name: str, kind: str, at: int, length: int, inside: bool, which: int
) -> None:
    data = export(name)
    if inside and data.startswith(b"PK"):
        with zipfile.ZipFile(io.BytesIO(data)) as archive:
            contents = {entry: archive.read(entry) for entry in archive.namelist()}
        chosen = sorted(contents)[which % len(contents)]
        data = zipped({**contents, chosen: _damaged(contents[chosen], kind, at, length)})
    else:
        data = _damaged(data, kind, at, length)
    result: MeasurementSet | ExportRefusedError
    try:
        result = read_export(data, name=name, layout=parse_layout(layout_bytes(name), "l.toml"))
    except ExportRefusedError as refusal_found:
        result = refusal_found
    assert isinstance(result, (MeasurementSet, ExportRefusedError))
    assert looks_complete(data) or getattr(result, "code", "") in INCOMPLETE
