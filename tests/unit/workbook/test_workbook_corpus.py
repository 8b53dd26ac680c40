"""Every export of the corpus: values, cells, notices and refusals as its manifest says."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Sequence
from pathlib import Path
from typing import Any

import jsonschema
import pytest

import qcreport
from qcreport.errors import ExportRefusedError
from qcreport.measurements import Measurement, MeasurementSet
from qcreport.workbook.layout import parse_layout
from qcreport.workbook.layout_try import Outcome, layout_try_json
from qcreport.workbook.names import is_ignored_name
from qcreport.workbook.read_in_child import read_in_child
from qcreport.workbook.reading import read_export
from workbook.corpus import BY_NAME, ENTRIES, SITE_ONLY, export, layout_bytes

SCHEMA = json.loads(
    (Path(qcreport.__file__).parent / "schemas" / "layout_try.schema.json").read_text("utf-8")
)
THROUGH_CHILD = (
    "o01_plain_long.xlsx", "o03_two_row_header.xlsx", "o13_censored_missing.xlsx",
    "o18_hidden_rows_sheet.xlsx", "o25_old_format.xls", "o26_semicolon_cp1252.csv", "o35_bomb.xlsx",
    "o36_entity_bomb.xlsx", "o40_unicode_names.xlsx", "o44_unreadable_values.xlsx",
)  # fmt: skip


def outcome_of(name: str, *, in_child: bool = False) -> Outcome:
    if is_ignored_name(name):
        return None
    try:
        if in_child:
            return read_in_child(
                export(name), name=name, layout_bytes=layout_bytes(name), layout_file=f"{name}.toml"
            )
        return read_export(export(name), name=name, layout=parse_layout(layout_bytes(name), f"{name}.toml"))
    except ExportRefusedError as refusal:
        return refusal


def by_group(result: MeasurementSet) -> dict[tuple[str, str], dict[str, list[Measurement]]]:
    found: dict[tuple[str, str], dict[str, list[Measurement]]] = {}
    for m in result.measurements:
        if not m.missing:
            found.setdefault((m.characteristic, m.unit), {}).setdefault(m.batch, []).append(m)
    return found


def flags(measurements: Sequence[Measurement]) -> list[str | None]:
    return [m.censored or (m.marks[0] if m.marks else None) for m in measurements]


def check_read(result: MeasurementSet, expected: dict[str, Any]) -> None:
    found = by_group(result)
    assert list(found) == [(s["characteristic"], s["unit"]) for s in expected["series"]]
    for series in expected["series"]:
        groups = found[series["characteristic"], series["unit"]]
        assert list(groups) == list(series["groups"])
        for label, group in series["groups"].items():
            measurements = groups[label]
            assert [m.value for m in measurements] == group["values"]
            assert [str(m.cell) for m in measurements] == [
                c.replace("line", "record") for c in group["cells"]
            ]
            if "times" in group:
                assert [m.time for m in measurements] == group["times"]
            if "flags" in group:
                assert flags(measurements) == group["flags"]


def check_notices(result: MeasurementSet, expected: Sequence[dict[str, Any]]) -> None:
    found = {notice.code: notice for notice in result.notices}
    assert set(found) == {notice["code"] for notice in expected}
    for notice in expected:
        cells = found[notice["code"]].cells
        assert list(cells) == notice.get("cells", list(cells))
        assert len(cells) == notice.get("count", len(cells))
        assert notice.get("sheet", "") in found[notice["code"]].text


def check(outcome: Outcome, expected: dict[str, Any]) -> None:
    if expected["outcome"] == "ignored":
        assert outcome is None
    elif expected["outcome"] == "refused":
        assert isinstance(outcome, ExportRefusedError)
        assert outcome.code == expected["refuse"]["code"]
        assert list(outcome.cells) == expected["refuse"].get("cells", list(outcome.cells))
        assert outcome.where
        assert outcome.found
        assert outcome.expected
        assert outcome.next_step
    else:
        assert isinstance(outcome, MeasurementSet), outcome
        check_read(outcome, expected)
        check_notices(outcome, expected.get("notices", []))


def test_corpus_is_whole() -> None:
    assert len(ENTRIES) == 45
    for name, entry in BY_NAME.items():
        assert hashlib.sha256(export(name)).hexdigest() == entry["sha256"], name


@pytest.mark.parametrize("name", [name for name in BY_NAME if name not in SITE_ONLY])
def test_export_comes_out_as_the_manifest_says(name: str) -> None:
    outcome = outcome_of(name)
    check(outcome, BY_NAME[name]["expect"])
    jsonschema.validate(layout_try_json(outcome), SCHEMA)


@pytest.mark.parametrize("name", THROUGH_CHILD)
def test_child_gives_the_same(name: str) -> None:
    outcome, expected = outcome_of(name, in_child=True), outcome_of(name)
    if isinstance(expected, MeasurementSet):
        assert outcome == expected
    else:
        assert isinstance(outcome, ExportRefusedError)
        assert isinstance(expected, ExportRefusedError)
        assert outcome.five_lines() == expected.five_lines()
        assert outcome.cells == expected.cells


def test_same_bytes_are_read_the_same_without_a_site() -> None:
    first, again = outcome_of("o01_plain_long.xlsx"), outcome_of("o24_same_bytes_again.xlsx")
    assert isinstance(first, MeasurementSet)
    assert isinstance(again, MeasurementSet)
    assert again.measurements == first.measurements
    assert again.export_sha256 == first.export_sha256


def test_layout_try_lists_values_with_cells_and_stored_texts() -> None:
    printed = layout_try_json(outcome_of("o13_censored_missing.xlsx"))
    assert printed["outcome"] == "read_with_notices"
    (characteristic,) = printed["characteristics"]
    assert characteristic["unit"] == "mg/kg"
    values = [value for group in characteristic["groups"].values() for value in group]
    censored = {value["raw"]: (value["value"], value["censored"]) for value in values if value["censored"]}
    assert censored["<0.05"] == (0.05, "<")
    assert censored[">100"] == (100.0, ">")
    assert censored["n.d."] == (None, "nd")
    assert [notice["code"] for notice in printed["notices"]] == ["censored_values", "missing_values"]


def test_layout_try_of_a_refusal_names_file_cells_and_code() -> None:
    printed = layout_try_json(outcome_of("o44_unreadable_values.xlsx"))
    assert printed["outcome"] == "refused"
    assert printed["code"] == "unreadable_values"
    assert printed["cells"] == ["Data!B5", "Data!B10"]
    assert "o44_unreadable_values.xlsx" in printed["text"]
    assert "see note" in printed["text"]
