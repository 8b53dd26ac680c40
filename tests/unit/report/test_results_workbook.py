"""results.xlsx holds the numbers of result.json as numbers, and no text of an export as a formula."""

from __future__ import annotations

import dataclasses
import json
import zipfile
from io import BytesIO

import pytest
from openpyxl import load_workbook
from openpyxl.workbook import Workbook

from qcreport.canonical import to_readable_json_bytes
from qcreport.report.results_workbook import results_workbook

from .samples import LAP_SHEAR, characteristic, result_of

NASTY = '=HYPERLINK("http://127.0.0.1:9/","x")'


@pytest.fixture(scope="module")
def document() -> bytes:
    data = {NASTY if k == "LA-2403" else k: v for k, v in LAP_SHEAR.items()}
    found = characteristic(data, flagged=True)
    groups = (dataclasses.replace(found.groups[0], sd=None), *found.groups[1:])
    return to_readable_json_bytes(
        result_of(dataclasses.replace(found, groups=groups), export="+a\x07.xlsx").to_json()
    )


@pytest.fixture(scope="module")
def book(document: bytes) -> Workbook:
    return load_workbook(BytesIO(results_workbook(document)))


def test_numbers_are_the_numbers_of_the_result_at_full_precision(document: bytes, book: Workbook) -> None:
    (characteristics,) = json.loads(document)["characteristics"]
    rows = list(book["Pairs"].iter_rows(values_only=True))
    heads = rows[0]
    assert len(rows) == 1 + len(characteristics["pairs"])
    for row, pair in zip(rows[1:], characteristics["pairs"], strict=True):
        found = dict(zip(heads, row, strict=True))
        for key in ("difference", "lower", "upper", "p", "se"):
            assert found[key] == pytest.approx(pair[key], rel=1e-15)
            assert isinstance(found[key], float)
        assert found["needed_n"] == pair["needed_n"]


def test_no_text_is_a_formula(document: bytes, book: Workbook) -> None:
    cells = [c for sheet in book for row in sheet.iter_rows() for c in row if c.value is not None]
    assert any(c.value == NASTY for c in cells)
    assert {c.data_type for c in cells} <= {"s", "n", "b"}
    assert all(c.quotePrefix for c in cells if c.data_type == "s")
    with zipfile.ZipFile(BytesIO(results_workbook(document))) as parts:
        sheets = [parts.read(n) for n in parts.namelist() if n.startswith("xl/worksheets/")]
    assert sheets
    assert not any(b"<f>" in s or b"<f " in s for s in sheets)


def test_nothing_is_lost_what_is_not_there_is_blank_and_control_characters_have_numbers(
    book: Workbook,
) -> None:
    assert [s.title for s in book] == [
        "Origin",
        "Answers",
        "Pairs",
        "Groups",
        "Not compared",
        "Checks",
        "Flagged",
        "Notices",
    ]
    groups = list(book["Groups"].iter_rows(values_only=True))
    assert groups[1][groups[0].index("sd")] is None
    assert book["Origin"]["B2"].value == "+a[U+0007].xlsx"
    assert book["Flagged"].max_row == 2
