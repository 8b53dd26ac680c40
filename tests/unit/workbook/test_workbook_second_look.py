"""The second look: an independent reader compares every cell that counts, without false alarms."""

from __future__ import annotations

import datetime as dt
import subprocess
import sys
from collections.abc import Callable
from typing import Any

import pytest

from qcreport.errors import ExportRefusedError
from qcreport.measurements import MeasurementSet
from qcreport.workbook import second_reader
from qcreport.workbook.cell_agreement import Agreement
from qcreport.workbook.cells import Cell, Kind
from qcreport.workbook.layout import parse_layout
from qcreport.workbook.read_in_child import read_in_child
from qcreport.workbook.reading import read_export
from workbook.books import layout_with, parts, row, styles_for, table, zipped
from workbook.corpus import BY_NAME, export, layout_bytes

ROWS = [["LA-1", "S1", 24.1], ["LA-1", "S2", 24.2], ["LB-1", "S3", 24.3]]
TEXT_LAYOUT = layout_with().replace(b'name = "Data"', b'text = { delimiter = ";", encoding = "utf-8" }')


def read(data: bytes, *, layout: bytes = layout_with(), name: str = "x.xlsx") -> MeasurementSet:
    return read_export(data, name=name, layout=parse_layout(layout, "l.toml"), second_look=True)


def limited(result: MeasurementSet) -> str:
    return next((n.text for n in result.notices if n.code == "limited_checks"), "")


def changing(change: Callable[[list[list[Any]]], None]) -> Callable[[bytes], second_reader.SecondReader]:
    """Return a second reader that misreads the rows it was given."""
    real = second_reader.read_workbook

    def misread(data: bytes) -> second_reader.SecondReader:
        def records(name: str | None) -> second_reader.Records:
            reader = real(data)
            assert reader is not None
            found = reader(name)
            assert found is not None
            pairs = [(shift, list(record)) for shift, record in found]
            change([record for _, record in pairs])
            return iter(pairs)

        return records

    return misread


@pytest.mark.parametrize("name", [name for name in BY_NAME if not name.startswith("~")])
def test_no_false_alarm_in_the_corpus(name: str) -> None:
    layout = parse_layout(layout_bytes(name), "l.toml")
    outcomes: list[Any] = []
    for second_look in (False, True):
        try:
            result = read_export(export(name), name=name, layout=layout, second_look=second_look)
            outcomes.append((result.measurements, [n.code for n in result.notices]))
        except ExportRefusedError as refusal:
            outcomes.append(refusal.text)
    assert outcomes[0] == outcomes[1]


@pytest.mark.parametrize(
    ("row_index", "column", "value", "cell"),
    [
        (1, 2, 24.7, "Data!C2"),
        (2, 2, "", "Data!C3"),
        (3, 0, "LC-1", "Data!A4"),
        (1, 1, "S9", "Data!B2"),
        (2, 2, "24.2", "Data!C3"),
        (0, 2, "Peel [N]", "Data!C1"),
    ],
)
def test_a_different_cell_refuses(
    monkeypatch: pytest.MonkeyPatch, row_index: int, column: int, value: object, cell: str
) -> None:
    def change(records: list[list[Any]]) -> None:
        records[row_index][column] = value

    monkeypatch.setattr(second_reader, "read_workbook", changing(change))
    with pytest.raises(ExportRefusedError) as caught:
        read(zipped(parts(table(ROWS))))
    assert caught.value.code == "readers_disagree"
    assert caught.value.cells == (cell,)
    assert (f'"{value}"' if value else "nothing") in caught.value.found
    assert caught.value.file == "x.xlsx"


def test_rows_that_one_reader_lost_refuse(monkeypatch: pytest.MonkeyPatch) -> None:
    def more(records: list[list[Any]]) -> None:
        records[3][:] = ["", "", ""]

    monkeypatch.setattr(second_reader, "read_workbook", changing(more))
    with pytest.raises(ExportRefusedError) as caught:
        read(zipped(parts(table(ROWS))))
    assert caught.value.cells == ("Data!A4", "Data!B4", "Data!C4")


def test_rows_that_the_first_reader_lost_refuse(monkeypatch: pytest.MonkeyPatch) -> None:
    real = second_reader.read_workbook
    longer = zipped(parts(table([*ROWS, ["LB-1", "S4", 24.4]])))
    monkeypatch.setattr(second_reader, "read_workbook", lambda _data: real(longer))
    with pytest.raises(ExportRefusedError) as caught:
        read(zipped(parts(table(ROWS))))
    assert caught.value.cells == ("Data!A5", "Data!B5", "Data!C5")
    assert 'nothing and "24.4"' in caught.value.found


def test_many_differences_are_counted(monkeypatch: pytest.MonkeyPatch) -> None:
    def change(records: list[list[Any]]) -> None:
        for record in records[1:]:
            record[2] += 1

    monkeypatch.setattr(second_reader, "read_workbook", changing(change))
    many = [["LA-1", f"S{i}", float(i)] for i in range(20)]
    with pytest.raises(ExportRefusedError) as caught:
        read(zipped(parts(table(many))))
    assert "and 15 more" in caught.value.found
    assert len(caught.value.cells) == 20


def test_cells_beside_the_table_do_not_refuse(monkeypatch: pytest.MonkeyPatch) -> None:
    def change(records: list[list[Any]]) -> None:
        records[1].append("remark")

    monkeypatch.setattr(second_reader, "read_workbook", changing(change))
    assert len(read(zipped(parts(table(ROWS)))).measurements) == 3


def test_addresses_do_not_shift_where_the_first_rows_and_columns_are_empty() -> None:
    data = row(6, None, None, "Batch", "Sample", "Shear [MPa]") + row(7, None, None, "LA-1", "S1", 24.1)
    layout = (
        layout_with()
        .replace(b"[1]", b"[6]")
        .replace(b"first_row = 2", b"first_row = 7")
        .replace(b'col = "C"', b'col = "E"')
        .replace(b'col = "B"', b'col = "D"')
        .replace(b'col = "A"', b'col = "C"')
    )
    result = read(zipped(parts(data)), layout=layout)
    assert [str(m.cell) for m in result.measurements] == ["Data!E7"]
    assert not limited(result)


def test_errors_and_uncalculated_formulas_beside_the_values_are_no_difference() -> None:
    layout = layout_with('[numbers]\nerrors = "missing"\n')
    data = table([*ROWS, ["LB-1", "S4", '<c r="C5" t="e"><f>1/0</f><v>#DIV/0!</v></c>']])
    result = read(zipped(parts(data)), layout=layout)
    assert [m.value for m in result.measurements] == [24.1, 24.2, 24.3, None]


@pytest.mark.parametrize("code", ["yyyy-mm-dd hh:mm", "[h]:mm", "hh:mm:ss"])
@pytest.mark.parametrize("serial", [0.25, 59.5, 46034.330555555556])
def test_moments_agree_with_their_numbers(code: str, serial: float) -> None:
    layout = layout_with().replace(b'sample = { col = "B" }', b'time = { col = "B" }')
    data = zipped(parts(table([["LA-1", (serial, 1), 24.1]]), styles=styles_for(code)))
    assert len(read(data, layout=layout).measurements) == 1


def test_far_empty_text_does_not_exhaust_the_memory() -> None:
    far = '<row r="1048576"><c r="XFD1048576" t="inlineStr"><is><t></t></is></c></row>'
    result = read(zipped(parts(table(ROWS) + far)))
    assert len(result.measurements) == 3
    assert "so far apart" in limited(result)


def test_far_cell_is_told_through_the_child() -> None:
    far = '<row r="1048576"><c r="XFD1048576"><v>1</v></c></row>'
    data = zipped(parts(table(ROWS) + far))
    result = read_in_child(
        data, name="x.xlsx", layout_bytes=layout_with(), layout_file="l.toml", second_look=True
    )
    assert {n.code for n in result.notices} == {"limited_checks", "stray_cells"}


def test_file_that_only_the_first_reader_opens_is_told(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(second_reader, "read_workbook", lambda _data: None)
    assert "cannot open" in limited(read(zipped(parts(table(ROWS)))))
    monkeypatch.setattr(second_reader, "read_workbook", lambda _data: lambda _name: None)
    assert "cannot open" in limited(read(zipped(parts(table(ROWS)))))


def test_what_the_second_reader_cannot_open() -> None:
    assert second_reader.read_workbook(b"no workbook") is None
    reader = second_reader.read_workbook(zipped(parts(table(ROWS))))
    assert reader is not None
    assert reader("no such sheet") is None


def test_old_formats_have_no_second_reader() -> None:
    name = "o25_old_format.xls"
    result = read(export(name), layout=layout_bytes(name), name=name)
    assert "no second reader" in limited(result)


def test_text_export_is_compared_by_record() -> None:
    text = 'Batch;Sample;Shear [MPa]\n\nLA-1;"S;1";24.1\nLA-1;"S\n""2""";24.2;more\n'
    layout = TEXT_LAYOUT.replace(b"first_row = 2", b"first_row = 3")
    result = read(text.encode(), layout=layout, name="x.csv")
    assert [m.value for m in result.measurements] == [24.1, 24.2]
    assert "cannot open" not in limited(result)


def test_text_export_that_differs_refuses(monkeypatch: pytest.MonkeyPatch) -> None:
    real = second_reader.read_text
    other = b"Batch;Sample;Shear [MPa]\nLA-1;S1;24.7\n"
    monkeypatch.setattr(second_reader, "read_text", lambda _data, form: real(other, form))
    with pytest.raises(ExportRefusedError) as caught:
        read(b"Batch;Sample;Shear [MPa]\nLA-1;S1;24.1\n", layout=TEXT_LAYOUT, name="x.csv")
    assert caught.value.code == "readers_disagree"
    assert caught.value.where == "record 2, column 3"


def test_refusal_comes_through_the_child_with_its_cells() -> None:
    data = table([["LA-1", "S1", '<c r="C2"><v>24.1</v><x:v xmlns:x="urn:other">99</x:v></c>']])
    with pytest.raises(ExportRefusedError) as caught:
        read_in_child(
            zipped(parts(data)),
            name="x.xlsx",
            layout_bytes=layout_with(),
            layout_file="l.toml",
            second_look=True,
        )
    assert caught.value.code == "readers_disagree"
    assert caught.value.cells == ("Data!C2",)
    assert '"24.1" and "99' in caught.value.found


def test_it_can_be_left_out() -> None:
    data = table([["LA-1", "S1", '<c r="C2"><v>24.1</v><x:v xmlns:x="urn:other">99</x:v></c>']])
    result = read_in_child(
        zipped(parts(data)), name="x.xlsx", layout_bytes=layout_with(), layout_file="l.toml"
    )
    assert [m.value for m in result.measurements] == [24.1]


@pytest.mark.parametrize(
    ("cell", "other", "agrees"),
    [
        (None, "  ", True),
        (None, 0.0, False),
        (Cell(Kind.BOOLEAN, "1"), True, True),
        (Cell(Kind.BOOLEAN, "1"), 1.0, False),
        (Cell(Kind.ERROR, "#N/A"), "", True),
        (Cell(Kind.ERROR, "#N/A"), 1.0, False),
        (Cell(Kind.DATE, "2026-01-12"), dt.date(2026, 1, 12), True),
        (Cell(Kind.DATE, "2026-01-12"), 1.0, False),
        (Cell(Kind.NUMBER, "1e400"), 1.0, False),
        (Cell(Kind.NUMBER, "see note"), "see note", True),
        (Cell(Kind.NUMBER, "46034"), dt.date(2026, 1, 12), True),
        (Cell(Kind.NUMBER, "46034"), dt.date(2026, 1, 13), False),
        (Cell(Kind.NUMBER, "0.5"), dt.time(12), True),
        (Cell(Kind.NUMBER, "1.5"), dt.timedelta(days=1.5), True),
        (Cell(Kind.NUMBER, "3"), True, False),
        (Cell(Kind.NUMBER, "24.1"), " 24.1 ", True),
        (Cell(Kind.NUMBER, "24.1"), " 24.2 ", False),
        (Cell(Kind.NUMBER, "24.1"), "24.1", False),
        (Cell(Kind.NUMBER, "", 0, True, False), "", True),
        (Cell(Kind.NUMBER, "", 0, True, False), 7.0, False),
        (Cell(Kind.TEXT, "", 0, True, False), "x", False),
        (Cell(Kind.TEXT, "a b\r\nc"), "a_x0020_b\nc ", True),
        (Cell(Kind.TEXT, "a"), 1.0, False),
    ],
)
def test_what_agrees(cell: Cell | None, other: object, agrees: bool) -> None:
    assert Agreement(date_1904=False).agrees(cell, other) is agrees


def test_days_count_from_1904_where_the_workbook_says_so() -> None:
    moment = dt.datetime(1904, 1, 3, 12, tzinfo=dt.UTC)
    assert Agreement(date_1904=True).agrees(Cell(Kind.NUMBER, "2.5"), moment)
    assert not Agreement(date_1904=False).agrees(Cell(Kind.NUMBER, "2.5"), moment)


def test_first_look_does_not_wait_for_the_second_readers_library() -> None:
    code = (
        "import sys, qcreport.workbook.reading;"
        "print([m for m in ('python_calamine', 'pandas', 'numpy') if m in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-I", "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"


@pytest.mark.parametrize(
    "cells",
    [
        "<c t='str'><v>LA</v></c><c t='str'><v>S</v></c><c><v>24.1</v></c>",
        "<c r='C2'><v> 24.1 </v></c><c r='B2' t='str'><v>S</v></c><c r='A2' t='str'><v>LA</v></c>",
        "<c r='A2' t='str'><v>LA</v></c><c r='B2' t='b'><v>1</v></c><c r='C2'><v>2.41E+1</v></c>",
        "<c r='A2' t='str'><v>LA</v></c><c r='B2' t='e'><v>#N/A</v></c>"
        "<c r='C2'><v>24.100000000000001</v></c>",
        "<c r='A2' t='str'><v>LA_x000D_&#10;</v></c><c r='B2' t='str'><f>1</f><v/></c>"
        "<c r='C2'><v>24.1</v></c>",
        "<c r='A2' t='str'><v>_xD83E__xDDEA_</v></c><c r='B2'><v>12345678901234567</v></c>"
        "<c r='C2'><v>24.1</v></c>",
    ],
)
def test_rare_and_valid_ways_of_writing_are_no_difference(cells: str) -> None:
    result = read(zipped(parts(table([]) + f'<row r="2">{cells}</row>')))
    assert [m.value for m in result.measurements] == [24.1]
    assert not limited(result)
