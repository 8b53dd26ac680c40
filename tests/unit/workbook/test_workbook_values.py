"""Value cells: what is read as which number, and what refuses the export."""

from __future__ import annotations

import pytest

from qcreport.errors import ExportRefusedError
from qcreport.measurements import Censoring, MeasurementSet
from qcreport.workbook.layout import parse_layout
from qcreport.workbook.reading import read_export
from workbook.books import layout_with, parts, styles_for, table, zipped

Value = str | float | tuple[float, int] | None


def read(
    values: list[Value], *, extra: str = "", styles: str = "", unit: str = "MPa", recalculates: bool = False
) -> MeasurementSet:
    rows: list[list[Value]] = [[f"LA-{1 + i % 2}", f"S{i}", value] for i, value in enumerate(values)]
    layout = layout_with(extra).decode().replace("MPa", unit)
    found = parts(table(rows, heading=("Batch", "Sample", f"Shear [{unit}]")), styles=styles)
    if recalculates:
        book = str(found["xl/workbook.xml"])
        found["xl/workbook.xml"] = book.replace("</workbook>", '<calcPr fullCalcOnLoad="1"/></workbook>')
    return read_export(zipped(found), name="x.xlsx", layout=parse_layout(layout.encode(), "l.toml"))


def numbers(result: MeasurementSet) -> list[float | None]:
    return [m.value for m in result.measurements]


def codes(result: MeasurementSet) -> list[str]:
    return [notice.code for notice in result.notices]


def refusal(values: list[Value], **options: object) -> ExportRefusedError:
    with pytest.raises(ExportRefusedError) as caught:
        read(values, **options)  # type: ignore[arg-type]
    return caught.value


def test_stored_number_is_converted_once_and_keeps_its_text() -> None:
    cell = '<c r="C2"><v>24.829999999999998</v></c>'
    (m,) = read([cell]).measurements
    assert m.value == 24.829999999999998
    assert m.text == "24.829999999999998"
    assert m.decimals == 2


def test_decimals_are_those_of_the_number_format() -> None:
    result = read([(24.8, 1), (24.8, 2), 24.85], styles=styles_for("0.000", "#,##0"))
    assert [m.decimals for m in result.measurements] == [3, 0, 2]


@pytest.mark.parametrize(
    ("text", "number"),
    [("24.83", 24.83), ("-1.5", -1.5), ("−1.5", -1.5), (" 24.8 ", 24.8), ("1.2E+3", 1200.0), (".5", 0.5)],
)
def test_texts_that_are_numbers(text: str, number: float) -> None:
    result = read([text])
    assert numbers(result) == [number]
    assert codes(result) == ["text_numbers_converted"]


@pytest.mark.parametrize(
    "text",
    ["NaN", "inf", "-Infinity", "1_000", "1e999", "0x10", "12.4*", "2 4", "٢٤", "24.8.1", "24,8,1"],
)
def test_texts_that_are_no_numbers_refuse(text: str) -> None:
    found = refusal([24.0, text])
    assert found.code in ("unreadable_values", "mixed_number_formats")
    assert found.cells == ("Data!C3",)


@pytest.mark.parametrize("stored", ["NaN", "INF", "1e999", "abc", "1,5"])
def test_number_cells_without_a_number_refuse(stored: str) -> None:
    found = refusal([f'<c r="C2"><v>{stored}</v></c>'])
    assert (found.code, found.cells) == ("unreadable_values", ("Data!C2",))


@pytest.mark.parametrize("code", ["yyyy-mm-dd", "d.m", "[h]:mm", "h:mm AM/PM"])
def test_number_shown_as_a_date_refuses(code: str) -> None:
    found = refusal([24.8, (45000.0, 1)], styles=styles_for(code))
    assert (found.code, found.cells) == ("unreadable_values", ("Data!C3",))


def test_number_shown_in_thousands_refuses() -> None:
    assert refusal([(12450.0, 1)], styles=styles_for("0.0,")).code == "unreadable_values"


def test_truth_value_refuses() -> None:
    assert refusal(['<c r="C2" t="b"><v>1</v></c>']).code == "unreadable_values"


def test_error_cell_refuses_unless_the_layout_takes_it_as_missing() -> None:
    cell = '<c r="C3" t="e"><v>#N/A</v></c>'
    assert refusal([24.0, cell]).code == "error_cells"
    for stated in ('errors = "missing"', 'errors = ["#N/A"]'):
        result = read([24.0, cell], extra=f"[numbers]\n{stated}\n")
        assert numbers(result) == [24.0, None]
        assert codes(result) == ["missing_values"]
    assert refusal([24.0, cell], extra='[numbers]\nerrors = ["#DIV/0!"]\n').code == "error_cells"


@pytest.mark.parametrize("value", ["<v></v>", "<v/>", ""])
def test_formula_without_a_result_refuses(value: str) -> None:
    found = refusal([24.0, f'<c r="C3"><f>A1</f>{value}</c>'])
    assert (found.code, found.cells) == ("formulas_not_calculated", ("Data!C3",))


def test_placeholder_results_of_a_program_that_does_not_calculate_refuse() -> None:
    cells: list[Value] = [f'<c r="C{r}"><f>A{r}*2</f><v>0</v></c>' for r in (2, 3, 4)]
    assert refusal(cells, recalculates=True).code == "formulas_not_calculated"
    assert codes(read(cells)) == ["formula_results_used"]


def test_decimal_comma_is_found_where_one_text_decides_it() -> None:
    result = read(["24,83", "24,830"])
    assert numbers(result) == [24.83, 24.83]
    assert "decimal_comma" in codes(result)


def test_point_and_comma_in_one_column_refuse() -> None:
    found = refusal(["24,83", "24.31"])
    assert (found.code, found.cells) == ("mixed_number_formats", ("Data!C2", "Data!C3"))


def test_mark_against_the_layout_refuses() -> None:
    found = refusal(["24,83", "24.31"], extra='[numbers]\ndecimal = ","\n')
    assert found.code == "mixed_number_formats"
    assert "Data!C3" in found.cells


@pytest.mark.parametrize("text", ["12.450", "1,234", "-12.450"])
def test_number_that_can_be_read_in_two_ways_refuses(text: str) -> None:
    assert refusal([text, text]).code == "ambiguous_decimal_mark"


@pytest.mark.parametrize(
    ("decimal", "thousands", "text", "number"),
    [
        (".", ",", "12,450.5", 12450.5),
        (".", ",", "12,450", 12450.0),
        (",", ".", "12.450,5", 12450.5),
        (",", " ", "12\u202f450,5", 12450.5),
        (".", "'", "12’450.5", 12450.5),
    ],
)
def test_stated_marks(decimal: str, thousands: str, text: str, number: float) -> None:
    extra = f'[numbers]\ndecimal = "{decimal}"\nthousands = "{thousands}"\n'
    result = read([text], extra=extra)
    assert numbers(result) == [number]
    assert "thousands_separator_removed" in codes(result)


@pytest.mark.parametrize(
    ("text", "limit", "censored"),
    [
        ("<0.05", 0.05, Censoring.BELOW),
        ("> 100", 100.0, Censoring.ABOVE),
        ("<=0.05", 0.05, Censoring.AT_MOST),
        ("≥3", 3.0, Censoring.AT_LEAST),
        ("n.d.", None, Censoring.NOT_DETECTED),
    ],
)
def test_limits_never_become_numbers_in_silence(text: str, limit: float | None, censored: Censoring) -> None:
    result = read([text, 0.4], extra='[numbers]\nnot_detected = ["n.d."]\n')
    first = result.measurements[0]
    assert (first.value, first.censored) == (limit, censored)
    assert codes(result) == ["censored_values"]


def test_empty_cell_of_a_row_is_missing_and_told() -> None:
    result = read([24.0, None, 25.0])
    assert [m.missing for m in result.measurements] == [False, True, False]
    assert [(n.code, n.cells) for n in result.notices] == [("missing_values", ("Data!C3",))]


def test_stated_number_for_missing_counts_in_number_cells_too() -> None:
    assert numbers(read([24.0, -999.0, "-999"], extra='[numbers]\nmissing = ["-999"]\n')) == [
        24.0,
        None,
        None,
    ]


def test_percent_cells_under_percent_are_taken_as_shown() -> None:
    result = read([(0.0118, 1), (0.0102, 1)], styles=styles_for("0.00%"), unit="%")
    assert numbers(result) == [1.18, 1.02]
    assert [m.decimals for m in result.measurements] == [2, 2]
    assert codes(result) == ["percent_cells_scaled"]


def test_percent_cells_beside_plain_numbers_refuse() -> None:
    found = refusal([(0.0118, 1), 1.02], styles=styles_for("0.00%"), unit="%")
    assert (found.code, found.cells) == ("mixed_number_formats", ("Data!C2", "Data!C3"))


def test_percent_cells_under_another_unit_refuse() -> None:
    assert refusal([(0.0118, 1)], styles=styles_for("0.00%")).code == "unit_conflict"


def test_unit_behind_the_number_is_removed_or_refused() -> None:
    result = read(["24.8 MPa", "25.1MPa"])
    assert numbers(result) == [24.8, 25.1]
    assert "unit_text_removed" in codes(result)
    assert refusal(["24.8 MPa", "3512 psi"]).code == "mixed_units"
    assert refusal(["3500 psi", "3512 psi"]).code == "unit_conflict"


def test_unit_in_the_number_format_must_be_the_right_one() -> None:
    assert numbers(read([(24.8, 1)], styles=styles_for('0.0" MPa"'))) == [24.8]
    assert refusal([(3512.0, 1)], styles=styles_for('0" psi"')).code == "unit_conflict"


def test_missing_shared_text_refuses() -> None:
    assert refusal(['<c r="C2" t="s"><v>7</v></c>']).code == "damaged_or_incomplete"


def test_row_after_inline_texts_is_not_lost() -> None:
    data = table([["LA-1", "S1", "24.5"], ["LA-1", "S2", 25.5]])
    result = read_export(zipped(parts(data)), name="x.xlsx", layout=parse_layout(layout_with(), "l.toml"))
    assert numbers(result) == [24.5, 25.5]
