"""Cells as people and formulas name them, and what a measurement says of itself."""

from __future__ import annotations

import dataclasses
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from openpyxl.utils import column_index_from_string, get_column_letter

from qcreport.measurements import (
    CellRef,
    Censoring,
    Measurement,
    MeasurementSet,
    column_letters,
    quoted_sheet,
)

CELL = CellRef(sheet="Results", row=12, column=3)


def measurement(**more: Any) -> Measurement:
    fields: dict[str, Any] = {
        "characteristic": "strength", "batch": "A", "line": None, "sample": None, "reading": None,
        "value": 1.5, "text": "1.5", "decimals": 1, "unit": "MPa", "censored": None, "status": None,
        "time": None, "cell": CELL,
    }  # fmt: skip
    return Measurement(**(fields | more))


@pytest.mark.parametrize(
    ("cell", "text"),
    [
        (CELL, "Results!C12"),
        (CellRef(sheet="This month", row=6, column=3), "'This month'!C6"),
        (CellRef(sheet="LA-2403", row=1, column=1), "'LA-2403'!A1"),
        (CellRef(sheet="Bob's", row=1, column=28), "'Bob''s'!AB1"),
        (CellRef(sheet="2403", row=1, column=16384), "'2403'!XFD1"),
        (CellRef(sheet="Prüfung", row=2, column=2), "'Prüfung'!B2"),
        (CellRef(sheet="", row=2, column=2), "''!B2"),
        (CellRef(sheet="Sheet_1", row=1048576, column=26), "Sheet_1!Z1048576"),
        (CellRef(sheet=None, row=2, column=3), "record 2, column 3"),
    ],
)
def test_a_cell_is_named_as_a_formula_would(cell: CellRef, text: str) -> None:
    assert str(cell) == text


@settings(deadline=None)
@given(st.integers(min_value=1, max_value=18278))
def test_column_letters_agree_with_a_spreadsheet_library(column: int) -> None:
    assert column_letters(column) == get_column_letter(column)
    assert column_index_from_string(column_letters(column)) == column


@settings(deadline=None)
@given(st.text(alphabet=st.characters(codec="utf-8"), max_size=31), st.text(max_size=31))
def test_two_sheets_never_share_a_quoted_name(first: str, second: str) -> None:
    assert (quoted_sheet(first) == quoted_sheet(second)) == (first == second)


def test_cells_of_a_sheet_are_ordered_by_row_then_column() -> None:
    cells = [CellRef(sheet="S", row=r, column=c) for r, c in ((2, 1), (1, 9), (10, 1), (1, 10))]
    assert [(c.row, c.column) for c in sorted(cells)] == [(1, 9), (1, 10), (2, 1), (10, 1)]


@pytest.mark.parametrize(
    ("value", "censored", "missing"),
    [
        (1.5, None, False),
        (None, None, True),
        (None, Censoring.NOT_DETECTED, False),
        (0.5, Censoring.BELOW, False),
    ],
)
def test_what_is_missing(value: float | None, censored: Censoring | None, missing: bool) -> None:
    assert measurement(value=value, censored=censored).missing is missing


def test_characteristics_come_in_order_of_first_appearance() -> None:
    data = MeasurementSet(
        export_name="x.xlsx",
        export_sha256="0" * 64,
        layout_name="rig",
        measurements=tuple(measurement(characteristic=c) for c in ("b", "a", "b", "c")),
    )
    assert data.characteristics() == ("b", "a", "c")


def test_a_measurement_cannot_be_changed() -> None:
    with pytest.raises(dataclasses.FrozenInstanceError):
        measurement().value = 2.0  # type: ignore[misc]
    assert hash(measurement()) == hash(measurement())
