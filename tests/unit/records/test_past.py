"""What the store gives of earlier batches: newest versions, by the same layout, none of this export."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

from qcreport.measurements import CellRef, Measurement
from qcreport.records import past
from qcreport.records.facade import Records

from .example import Handling, measured, measurement


@pytest.fixture
def reports(tmp_path: Path) -> Path:
    return tmp_path / "reports"


def sealed(records: Records, reports: Path, data: bytes, *values: Measurement) -> None:
    Handling(records, claim=data.decode(), data=data, values=values).whole(reports)


def asked(
    records: Records, *tonight: Measurement, by_line: bool = False
) -> list[tuple[str | None, str, str]]:
    found = records.past(measured(b"tonight", *tonight), ["lap_shear"], by_line=by_line)
    return [(m.line, m.batch, m.text) for m in found]


def test_newest_versions_of_earlier_batches_oldest_first(records: Records, reports: Path) -> None:
    sealed(records, reports, b"first", measurement(2, "24.83"), measurement(3, "25.10"))
    sealed(records, reports, b"second", measurement(2, "24.93"), measurement(4, "26.00", batch="LA-2"))
    assert asked(records, measurement(9, "20.00", batch="LA-9")) == [
        (None, "LA-1", "25.10"),
        (None, "LA-1", "24.93"),
        (None, "LA-2", "26.00"),
    ]


def test_no_batch_of_this_export(records: Records, reports: Path) -> None:
    sealed(records, reports, b"first", measurement(2, "24.83"), measurement(3, "25.10", batch="LA-2"))
    assert asked(records, measurement(9, "20.00", batch="LA-2")) == [(None, "LA-1", "24.83")]


def test_only_the_lines_of_this_export_and_a_batch_is_one_of_its_line(
    records: Records, reports: Path
) -> None:
    values = [
        measurement(row, "24.83", line=line, batch=batch)
        for row, (line, batch) in enumerate([("A", "1"), ("A", "2"), ("B", "1"), ("C", "1")], start=2)
    ]
    sealed(records, reports, b"first", *values)
    tonight = (measurement(9, "1.00", line="A", batch="2"), measurement(10, "1.00", line="B", batch="9"))
    assert asked(records, *tonight, by_line=True) == [("A", "1", "24.83"), ("B", "1", "24.83")]


def test_another_layout_or_characteristic_is_another_method(records: Records, reports: Path) -> None:
    sealed(records, reports, b"first", measurement(2, "24.83", characteristic="peel"))
    assert asked(records, measurement(9, "20.00", batch="LA-9")) == []
    other = measured(b"tonight", measurement(9, "20.00", batch="LA-9"))
    assert records.past(other, ["peel"], by_line=False) != ()
    renamed = replace(other, layout_name="other-rig")
    assert records.past(renamed, ["peel"], by_line=False) == ()


def test_a_list_without_sample_ids_does_not_count_twice(records: Records, reports: Path) -> None:
    def without_id(row: int, number: str) -> Measurement:
        return measurement(row, number, sample=None, cell=CellRef(sheet="Results", row=row, column=3))

    sealed(records, reports, b"first", without_id(2, "24.83"))
    sealed(records, reports, b"second", without_id(2, "24.83"), without_id(3, "25.10"))
    assert asked(records, measurement(9, "20.00", batch="LA-9")) == [
        (None, "LA-1", "24.83"),
        (None, "LA-1", "25.10"),
    ]


def test_the_newest_batches_where_there_are_very_many(
    records: Records, reports: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(past, "MOST_BATCHES", 2)
    values = [measurement(row, "24.83", batch=f"LA-{row}") for row in range(2, 6)]
    sealed(records, reports, b"first", *values)
    found = asked(records, measurement(9, "20.00", batch="LA-9"))
    assert [batch for _, batch, _ in found] == ["LA-4", "LA-5"]
