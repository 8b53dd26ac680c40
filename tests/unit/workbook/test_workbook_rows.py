"""Rows, names, units, marks and tables: what is read, told and refused."""

from __future__ import annotations

from collections.abc import Sequence

import pytest

from qcreport.errors import ExportRefusedError
from qcreport.measurements import MeasurementSet
from qcreport.workbook.layout import parse_layout
from qcreport.workbook.limits import Limits
from qcreport.workbook.lookalikes import is_unusual, skeleton
from qcreport.workbook.reading import read_export
from workbook.books import layout_with, parts, row, styles_for, table, zipped

Cells = Sequence[str | float | tuple[float, int] | None]
HEADING = ("Batch", "Sample", "Shear [MPa]")


def read(
    data: str,
    *,
    extra: str = "",
    layout: str | None = None,
    after: str = "",
    before: str = "",
    styles: str = "",
    name: str = "x.xlsx",
    limits: Limits | None = None,
) -> MeasurementSet:
    text = layout if layout is not None else layout_with(extra).decode()
    book = zipped(parts(data, after=after, before=before, styles=styles))
    return read_export(book, name=name, layout=parse_layout(text.encode(), "l.toml"), limits=limits)


def refused(data: str, **options: str | Limits) -> ExportRefusedError:
    with pytest.raises(ExportRefusedError) as caught:
        read(data, **options)  # type: ignore[arg-type]
    return caught.value


def changed(old: str, new: str) -> str:
    text = layout_with().decode()
    assert old in text
    return text.replace(old, new)


def codes(result: MeasurementSet) -> dict[str, tuple[str, ...]]:
    return {notice.code: notice.cells for notice in result.notices}


def batches(result: MeasurementSet) -> list[str]:
    return [m.batch for m in result.measurements]


GOOD: list[Cells] = [["LA-1", "S1", 24.1], ["LA-1", "S2", 24.2], ["LB-1", "S3", 24.3]]


def test_plain_table_needs_no_notice() -> None:
    result = read(table(GOOD))
    assert batches(result) == ["LA-1", "LA-1", "LB-1"]
    assert [m.sample for m in result.measurements] == ["S1", "S2", "S3"]
    assert result.notices == ()


def test_moved_column_refuses() -> None:
    found = refused(table([["LA-1", "S1", "x", 24.1]], heading=("Batch", "Sample", "No.", "Shear [MPa]")))
    assert found.code == "layout_mismatch"
    assert "column D" in found.found


def test_second_column_of_the_same_heading_refuses() -> None:
    data = table([["LA-1", "S1", 24.1, 24.9]], heading=(*HEADING, "Shear [MPa]"))
    found = refused(data)
    assert (found.code, found.cells) == ("ambiguous_column", ("Data!C1", "Data!D1"))


def test_columns_found_by_heading() -> None:
    layout = changed('col = "C"\n', "").replace('{ col = "A" }', '{ header = "Batch" }')
    data = table([[1, 24.1, "LA-1", "S"]], heading=("No.", "Shear [MPa]", "Batch", "Sample"))
    assert str(
        read(data, layout=layout.replace('{ col = "B" }', '{ header = "Sample" }')).measurements[0].cell
    ) == ("Data!B2")


def test_value_without_batch_refuses() -> None:
    found = refused(table([["LA-1", "S1", 24.1], [None, "S2", 24.2]]))
    assert (found.code, found.cells) == ("group_missing", ("Data!C3",))


def test_batch_that_stands_once_fills_the_rows_below_where_the_layout_says_so() -> None:
    layout = changed('{ col = "A" }', '{ col = "A", repeats_below = true }')
    data = table([["LA-1", "S1", 24.1], [None, "S2", 24.2], ["LB-1", "S3", 24.3], [None, "S4", 24.4]])
    result = read(data, layout=layout)
    assert batches(result) == ["LA-1", "LA-1", "LB-1", "LB-1"]
    assert codes(result) == {"merged_group_filled": ("Data!A3", "Data!A5")}


def test_merged_batch_cell_fills_its_rows_and_no_more() -> None:
    layout = changed('{ col = "A" }', '{ col = "A", repeats_below = true }')
    data = table([["LA-1", "S1", 24.1], [None, "S2", 24.2], [None, "S3", 24.3]])
    after = '<mergeCells><mergeCell ref="A2:A3"/></mergeCells>'
    found = refused(data, layout=layout, after=after)
    assert (found.code, found.cells) == ("group_missing", ("Data!C4",))
    assert batches(read(table([["LA-1", "S1", 24.1], [None, "S2", 24.2]]), after=after)) == ["LA-1", "LA-1"]


@pytest.mark.parametrize("word", ["Mean", "Std dev:", "AVERAGE", "Total"])
def test_summary_row_that_the_layout_does_not_name_refuses(word: str) -> None:
    found = refused(table([*GOOD, [word, None, 24.2]]))
    assert (found.code, found.cells) == ("layout_mismatch", ("Data!A5",))


def test_summary_rows_that_the_layout_names_are_left_out() -> None:
    extra = '[leave_out_rows]\ngroup_matches = ["mean*"]\nsample_matches = ["Range"]\n'
    result = read(table([*GOOD, ["Mean of all", None, 24.2], ["LB-1", "Range", 0.2]]), extra=extra)
    assert len(result.measurements) == 3
    assert codes(result) == {"summary_rows_skipped": ("Data!C5", "Data!C6")}


def test_rows_below_a_gap_are_told_or_refused() -> None:
    below = row(8, "see lab book")
    assert codes(read(table(GOOD) + below)) == {"stray_cells": ("Data!A8",)}
    found = refused(table(GOOD) + row(8, "LA-1", "S9", 24.9))
    assert (found.code, found.cells) == ("layout_mismatch", ("Data!C8",))


def test_cell_beside_the_table_is_told() -> None:
    result = read(table([["LA-1", "S1", 24.1, None, "remark"], ["LA-1", "S2", 24.2]]))
    assert codes(result) == {"stray_cells": ("Data!E2",)}


def test_line_of_text_inside_the_table_is_told() -> None:
    result = read(table([*GOOD, ["End of report"]]))
    assert batches(result) == ["LA-1", "LA-1", "LB-1"]
    assert codes(result) == {"stray_cells": ("Data!A5",)}


def test_table_without_rows_refuses() -> None:
    data = table([]) + row(30, "x", 1.0, 2.0) + row(31, "y", 1.0, 2.0)
    assert refused(data).code == "no_data_rows"


def test_sheet_without_a_table_refuses_whatever_the_layout_says() -> None:
    assert refused(row(1, "Bench out of service")).code == "no_table_found"


def test_names_are_trimmed_and_capitals_merged() -> None:
    data = table(
        [["la-1", "S1", 24.1], ["LA-1 ", "S2", 24.2], ["LA-1", "S3", 24.3], ["\u200bLA-1\u00a0", "S4", 24.4]]
    )
    result = read(data)
    assert set(batches(result)) == {"LA-1"}
    assert codes(result) == {"group_name_trimmed": ("Data!A3", "Data!A5"), "group_case_merged": ("Data!A2",)}


@pytest.mark.parametrize(
    ("first", "second"),
    [
        ("00123", "123"),
        ("LA-2403", "LА-2403"),
        ("LA-2403", "LA-24O3"),
        ("LA-2403", "LA 2403"),
        ("LA-2403", "LA–2403"),
        ("LA-2403", "LA2403"),
        ("Lot 1", "Lot l"),
        ("LA-2403", "LA-\u200b2403"),
        ("LA-03", "LA-3"),
    ],
)
def test_names_that_look_alike_refuse(first: str, second: str) -> None:
    data = table([[first, "S1", 24.1], [second, "S2", 24.2]])
    found = refused(data)
    assert (found.code, found.cells) == ("lookalike_groups", ("Data!A2", "Data!A3"))
    extra = f'[groups]\ndifferent = ["{first}", "{second}"]\n'
    assert batches(read(data, extra=extra)) == [first, second]


@pytest.mark.parametrize(
    ("first", "second"), [("LA-2403", "LB-2403"), ("LA-240", "LA-24"), ("A-1-11", "A-11-1"), ("A-10", "A-1")]
)
def test_names_that_differ_to_the_eye_are_different(first: str, second: str) -> None:
    assert skeleton(first) != skeleton(second)
    assert batches(read(table([[first, "S1", 24.1], [second, "S2", 24.2]]))) == [first, second]


def test_unusual_names() -> None:
    assert [
        name for name in ("=1+1", "<b>", "a;b", "x" * 65, "a\u202eb", "a\nb") if not is_unusual(name)
    ] == []
    assert [name for name in ("LA-2403", "דفعة 1", "LB 🧪", "a/b (2)") if is_unusual(name)] == []


def test_codes_stored_as_numbers_are_read_as_shown() -> None:
    data = table(
        [[(123.0, 1), "S1", 24.1], ["00123", "S2", 24.2], [(45.0, 2), "S3", 24.3], [2403, "S4", 24.4]]
    )
    result = read(data, styles=styles_for("00000", '"LA-"000'))
    assert batches(result) == ["00123", "00123", "LA-045", "2403"]
    assert codes(result) == {"number_read_as_shown": ("Data!A2", "Data!A4", "Data!A5")}


@pytest.mark.parametrize("code", ["0.00E+00", "yyyy-mm-dd", "0%", "# ?/?", "0-00", "#,##0"])
def test_codes_that_became_something_else_refuse(code: str) -> None:
    found = refused(table([[(2403.0, 1), "S1", 24.1], [(2404.0, 1), "S2", 24.1]]), styles=styles_for(code))
    assert (found.code, found.cells) == ("group_cell_not_text", ("Data!A2", "Data!A3"))


def test_long_and_many_names_refuse() -> None:
    assert refused(table([["x" * 256, "S1", 24.1]])).code == "name_too_long"
    assert refused(table([["LA-1", "x" * 256, 24.1]])).code == "name_too_long"
    rows: list[Cells] = [[f"L{i}x{i}", f"S{i}", 24.1] for i in range(4)]
    assert refused(table(rows), limits=Limits(max_groups=3)).code == "too_many_groups"


def test_rows_pasted_twice_refuse_and_retests_are_told() -> None:
    found = refused(table([["LA-1", "S1", 24.1], ["LA-1", "S2", 24.2], ["LA-1", "S1", 24.1]]))
    assert (found.code, found.cells) == ("duplicate_rows", ("Data!C2", "Data!C4"))
    result = read(table([["LA-1", "S1", 24.1], ["LA-1", "S2", 24.2], ["LA-1", "S1", 24.4]]))
    assert codes(result) == {"duplicate_sample_ids": ("Data!B2", "Data!B4")}


def test_running_number_does_not_hide_a_pasted_row() -> None:
    rows: list[Cells] = [
        ["LA-1", "S1", 24.1, 1],
        ["LA-1", "S2", 24.2, 2],
        ["LA-1", "S1", 24.1, 3],
        ["LA-1", "S2", 24.2, 4],
    ]
    assert refused(table(rows, heading=(*HEADING, "No."))).code == "duplicate_rows"


def test_equal_readings_of_samples_with_several_readings_are_no_duplicates() -> None:
    rows: list[Cells] = [["LA-1", f"S{s}", 24.0 + 0.1 * (s * r)] for s in range(4) for r in range(2)]
    assert len(read(table(rows)).measurements) == 8


@pytest.mark.parametrize(
    ("heading", "code"),
    [("Shear [psi]", "unit_conflict"), ("Shear [N/mm2]", "unit_conflict"), ("Peel [MPa]", "layout_mismatch")],
)
def test_heading_with_another_unit_refuses(heading: str, code: str) -> None:
    assert refused(table(GOOD, heading=("Batch", "Sample", heading))).code == code


def test_unit_column() -> None:
    layout = changed('unit = "MPa"', 'unit_from = "column"\nunit_col = "D"')
    heading = (*HEADING, "Unit")
    result = read(
        table([["LA-1", "S1", 24.1, "MPa"], ["LA-1", "S2", 24.2, " MPa"]], heading=heading), layout=layout
    )
    assert {m.unit for m in result.measurements} == {"MPa"}
    for other in ("psi", "mPa", None):
        data = table([["LA-1", "S1", 24.1, "MPa"], ["LA-1", "S2", 24.2, other]], heading=heading)
        found = refused(data, layout=layout)
        assert (found.code, found.cells) == ("mixed_units", ("Data!D2", "Data!D3"))


@pytest.mark.parametrize(
    ("status", "code"), [("void", None), ("maybe", "layout_mismatch"), (None, "layout_mismatch")]
)
def test_status(status: str | None, code: str | None) -> None:
    layout = changed(
        'sample = { col = "B" }',
        'sample = { col = "B" }\nstatus = { col = "D", use = ["valid"], exclude = ["VOID"] }',
    )
    data = table(
        [["LA-1", "S1", 24.1, "Valid"], ["LA-1", "S2", "broken", status]], heading=(*HEADING, "Status")
    )
    if code is None:
        result = read(data, layout=layout)
        assert len(result.measurements) == 1
        assert codes(result) == {"status_excluded": ("Data!C3",)}
    else:
        found = refused(data, layout=layout)
        assert (found.code, found.cells) == (code, ("Data!D3",))


def test_hidden_rows_and_columns_are_read_and_told() -> None:
    data = row(1, *HEADING) + row(2, *GOOD[0], attributes=' hidden="1"') + row(3, *GOOD[1])
    result = read(data)
    assert codes(result) == {"hidden_rows_included": ("Data!C2",)}
    assert result.measurements[0].marks == ("hidden",)
    filtered = '<autoFilter ref="A1:C3"><filterColumn colId="0"/></autoFilter>'
    assert codes(read(data, after=filtered)) == {"filtered_rows_included": ("Data!C2",)}
    columns = '<cols><col min="3" max="3" hidden="1"/></cols>'
    assert codes(read(table(GOOD), before=columns)) == {"hidden_columns": ("Data!C2", "Data!C3", "Data!C4")}
    excluded = read(data, extra='[marks]\nhidden = "exclude"\n')
    assert [str(m.cell) for m in excluded.measurements] == ["Data!C3"]
    assert codes(excluded) == {"hidden_rows_included": ("Data!C2",)}


def test_lines_from_the_file_name_a_cell_or_a_constant() -> None:
    data = table(GOOD) + row(9, None, None, None, None, "B")
    sources = {
        '{ from = "file_name", pattern = "line-([A-Z])" }': "A",
        '{ constant = "C" }': "C",
        '{ from = "sheet_name" }': "Data",
        '{ from = "cell", cell = "E9" }': "B",
    }
    for source, line in sources.items():
        layout = changed('sample = { col = "B" }', f'sample = {{ col = "B" }}\nline = {source}')
        result = read(data, layout=layout, name="shear line-A.xlsx")
        assert {m.line for m in result.measurements} == {line}
    layout = changed('sample = { col = "B" }', 'line = { from = "file_name", pattern = "line-([A-Z])" }')
    assert refused(data, layout=layout).code == "layout_mismatch"


def test_anchor_cells() -> None:
    assert len(read(table(GOOD), extra='[match]\ncells = { A1 = "Bat*" }\n').measurements) == 3
    assert refused(table(GOOD), extra='[match]\ncells = { A1 = "Rig 7" }\n').cells == ("Data!A1",)


WIDE = """
name = "wide"
[[table]]
shape = "wide"
header_rows = [1]
first_row = 2
group = { header_cells = "B:D" }
replicate = { col = "A" }
[[table.value]]
characteristic = "viscosity"
unit = "mPa.s"
"""


def test_wide_table() -> None:
    data = row(1, "Rep", "LA-1", "LB-1") + row(2, 1, 10, 20) + row(3, 2, None, 21) + row(4, 3, 12)
    result = read(data, layout=WIDE)
    found = [(m.batch, m.reading, m.value) for m in result.measurements]
    assert found == [
        ("LA-1", "1", 10.0), ("LB-1", "1", 20.0), ("LA-1", "2", None), ("LB-1", "2", 21.0),
        ("LA-1", "3", 12.0),
    ]  # fmt: skip
    assert codes(result) == {"missing_values": ("Data!B3",)}
    assert refused(row(1, "Rep", "LA-1") + row(2, 1, 10, 20), layout=WIDE).code == "group_missing"
    mean = row(1, "Rep", "LA-1") + row(2, 1, 10) + row(3, "Mean", 10)
    assert refused(mean, layout=WIDE).code == "layout_mismatch"


ACROSS = """
name = "across"
[[table]]
shape = "replicates_across"
header_rows = [1, 2]
first_row = 3
group = { col = "A" }
[[table.value]]
characteristic = "shear"
cols = "B:D"
header = "Shear"
unit = "MPa"
"""


def test_replicates_across() -> None:
    merged = '<mergeCells><mergeCell ref="B1:D1"/></mergeCells>'
    data = (
        row(1, "Batch", "Shear")
        + row(2, None, 1, 2, 3)
        + row(3, "LA-1", 10, None, 12)
        + row(4, "LB-1", 20, 21)
    )
    result = read(data, layout=ACROSS, after=merged)
    assert [(m.batch, m.reading, m.value) for m in result.measurements] == [
        ("LA-1", "1", 10.0), ("LA-1", "2", None), ("LA-1", "3", 12.0), ("LB-1", "1", 20.0),
        ("LB-1", "2", 21.0),
    ]  # fmt: skip
    wider = '<mergeCells><mergeCell ref="B1:E1"/></mergeCells>'
    found = refused(data, layout=ACROSS, after=wider)
    assert (found.code, found.cells) == ("layout_mismatch", ("Data!B1",))


@pytest.mark.parametrize(
    ("texts", "times"),
    [
        (["2026-01-12 07:47", "12.01.2026 7:47:05"], ["2026-01-12T07:47:00", "2026-01-12T07:47:05"]),
        (["13/01/2026", "02/01/2026 1:05 PM"], ["2026-01-13T00:00:00", "2026-01-02T13:05:00"]),
        (["02/13/2026", "02/01/2026"], ["2026-02-13T00:00:00", "2026-02-01T00:00:00"]),
        (["02/01/2026", "31.02.2026"], [None, None]),
    ],
)
def test_times_as_text(texts: list[str], times: list[str | None]) -> None:
    layout = changed('sample = { col = "B" }', 'sample = { col = "B" }\ntime = { col = "D" }')
    data = table([["LA-1", f"S{i}", 24.1, text] for i, text in enumerate(texts)], heading=(*HEADING, "At"))
    result = read(data, layout=layout)
    assert [m.time for m in result.measurements] == times
    ambiguous = tuple(f"Data!D{i}" for i, time in enumerate(times, start=2) if time is None)
    assert codes(result).get("time_ambiguous", ()) == ambiguous
