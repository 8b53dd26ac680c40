"""Rows and names held in little memory give back what was put in; measurements leave as they are made."""

from __future__ import annotations

import json

import pytest
from hypothesis import given
from hypothesis import strategies as st

from qcreport.errors import ExportRefusedError
from qcreport.workbook import readings
from qcreport.workbook import rows as rows_module
from qcreport.workbook.cells import Cell, Kind
from qcreport.workbook.layout import parse_layout
from qcreport.workbook.limits import Limits
from qcreport.workbook.reader_child import read
from qcreport.workbook.reading import ExportReading, read_export
from qcreport.workbook.rows import Rows
from qcreport.workbook.wire import Decoder, limits_as_json
from workbook.books import layout_with, parts, table, zipped

CELLS = st.builds(Cell, st.sampled_from(Kind), st.text(max_size=3))
PUT = st.lists(st.tuples(st.integers(1, 9), st.dictionaries(st.integers(1, 6), CELLS, min_size=1)))


@given(PUT)
def test_rows_give_back_what_was_put_in(put: list[tuple[int, dict[int, Cell]]]) -> None:
    rows, plain = Rows(), {}
    for row, cells in put:
        rows.put(row, cells)
        plain[row] = cells
    rows = rows.in_order()
    assert list(rows) == sorted(plain)
    assert len(rows) == len(plain)
    assert {row: dict(cells) for row, cells in rows.items()} == plain
    assert all(list(cells) == sorted(cells) for cells in rows.values())
    assert rows.n_cells() == sum(map(len, plain.values()))
    assert rows.columns >= {column for cells in plain.values() for column in cells}
    for row in range(11):
        assert (row in rows) == (row in plain)
        assert rows.filled(row) == plain.get(row, {})
        assert all(rows.cell(row, c) == plain.get(row, {}).get(c) for c in range(8))


def test_rows_of_more_shapes_than_are_kept(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(rows_module, "_MAX_KEPT_SHAPES", 2)
    plain = {row: {row: Cell(Kind.TEXT, str(row)), row + 1: Cell(Kind.TEXT, "x")} for row in range(1, 6)}
    assert dict(Rows(plain)) == plain


def test_names_are_forgotten_and_found_again(monkeypatch: pytest.MonkeyPatch) -> None:
    rows: list[list[object]] = [[f"LA-{i % 3}", f"S{i}", 20 + i] for i in range(40)]
    data = zipped(parts(table(rows)))
    layout = parse_layout(layout_with(), "l.toml")
    before = read_export(data, name="x.xlsx", layout=layout)
    monkeypatch.setattr(readings, "_MAX_KEPT_LABELS", 1)
    assert read_export(data, name="x.xlsx", layout=layout) == before
    assert [m.sample for m in before.measurements] == [f"S{i}" for i in range(40)]


def test_names_that_differ_in_capitals_are_counted_in_all_their_cells() -> None:
    names = ["la-1", "LA-1", "LA-1", " LA-1", "LB-1"]
    data = zipped(parts(table([[name, f"S{i}", 20 + i] for i, name in enumerate(names)])))
    result = read_export(data, name="x.xlsx", layout=parse_layout(layout_with(), "l.toml"))
    assert [m.batch for m in result.measurements] == ["LA-1"] * 4 + ["LB-1"]
    cells = {notice.code: len(notice.cells) for notice in result.notices}
    assert cells["group_case_merged"] == 1
    assert cells["group_name_trimmed"] == 1


def _header() -> dict[str, object]:
    return {
        "name": "x.xlsx",
        "layout_file": "l.toml",
        "layout_text": layout_with().decode(),
        "limits": limits_as_json(Limits()),
        "second_look": True,
    }


def test_child_answers_each_measurement_before_the_last_check() -> None:
    data = zipped(parts(table([["LA-1", "S1", 24.1], ["LA-1", "S2", 24.2]])))
    lines = list(read(_header(), data))
    assert [json.loads(line)[0] for line in lines] == ["measurement", "measurement", "end"]


def test_refusal_after_measurements_takes_them_all_back(monkeypatch: pytest.MonkeyPatch) -> None:
    data = zipped(parts(table([["LA-1", "S1", 24.1], ["LA-1", "S2", 24.2]])))
    monkeypatch.setattr("qcreport.workbook.cell_agreement.Agreement.agrees", lambda *_: False)
    lines = list(read(_header(), data))
    assert [json.loads(line)[0] for line in lines] == ["measurement", "measurement", "refused"]
    reading = ExportReading(
        data, name="x.xlsx", layout=parse_layout(layout_with(), "l.toml"), second_look=True
    )
    with pytest.raises(ExportRefusedError) as caught:
        tuple(reading.measurements())
    assert (caught.value.code, caught.value.file) == ("readers_disagree", "x.xlsx")
    decoder = Decoder(name="x.xlsx", sha256="f" * 64, limits=Limits())
    for line in lines[:-1]:
        decoder.take(line)
    with pytest.raises(ExportRefusedError) as told:
        decoder.take(lines[-1])
    assert told.value.code == "readers_disagree"
