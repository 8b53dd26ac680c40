"""What is the same measurement, what is new of it, and what changed."""

from __future__ import annotations

from pathlib import Path

import pytest
from sqlalchemy import select

from qcreport.measurements import CellRef, Censoring, Measurement
from qcreport.records.facade import Records
from qcreport.records.identity import identified
from qcreport.records.store import ChangedValue, Survey
from qcreport.records.tables import MEASUREMENT

from .example import Handling, measured, measurement


@pytest.fixture
def reports(tmp_path: Path) -> Path:
    return tmp_path / "reports"


def sealed(records: Records, reports: Path, data: bytes, *values: Measurement) -> Survey:
    return Handling(records, claim=data.decode(), data=data, values=values).whole(reports)


def versions(records: Records) -> list[tuple[str, int, str]]:
    c = MEASUREMENT.c
    with records.database.read() as connection:
        rows = connection.execute(select(c.text, c.version, c.number).order_by(c.id))
        return [(row.text, row.version, row.number) for row in rows]


def counts(survey: Survey) -> tuple[int, int, int]:
    return survey.new, survey.known, len(survey.changed)


def test_a_cumulative_export_brings_only_its_new_values(records: Records, reports: Path) -> None:
    one, two = measurement(2, "24.83"), measurement(3, "25.10")
    assert counts(sealed(records, reports, b"first", one)) == (1, 0, 0)
    moved = measurement(2, "24.83", cell=CellRef(sheet="Other", row=99, column=1))
    assert counts(sealed(records, reports, b"second", moved, two)) == (1, 1, 0)
    assert versions(records) == [("24.83", 1, "2026-0001"), ("25.10", 1, "2026-0002")]


def test_a_changed_value_is_a_new_version_and_the_old_one_stays(records: Records, reports: Path) -> None:
    sealed(records, reports, b"first", measurement(2, "24.83"))
    survey = sealed(records, reports, b"second", measurement(2, "24.93"))
    assert survey.changed == (
        ChangedValue(cell="Results!C2", old_text="24.83 MPa", new_text="24.93 MPa", old_number="2026-0001"),
    )
    assert versions(records) == [("24.83", 1, "2026-0001"), ("24.93", 2, "2026-0002")]
    assert counts(records.survey(measured(b"third", measurement(2, "24.93")))) == (0, 1, 0)
    assert counts(records.survey(measured(b"third", measurement(2, "24.83")))) == (0, 0, 1)


def test_another_unit_is_another_value(records: Records, reports: Path) -> None:
    sealed(records, reports, b"first", measurement(2, "24.83"))
    assert counts(records.survey(measured(b"x", measurement(2, "24.83", unit="psi")))) == (0, 0, 1)


def test_an_old_export_run_again_does_not_bring_its_old_values_back(records: Records, reports: Path) -> None:
    sealed(records, reports, b"first", measurement(2, "24.83"))
    sealed(records, reports, b"second", measurement(2, "24.93"))
    again = Handling(records, claim="again", data=b"first", plan=b"other", values=(measurement(2, "24.83"),))
    assert counts(again.whole(reports)) == (0, 1, 0)
    assert len(versions(records)) == 2


def test_an_export_with_nothing_new_is_recognised(records: Records, reports: Path) -> None:
    sealed(records, reports, b"first", measurement(2, "24.83"))
    assert records.survey(measured(b"x", measurement(2, "24.83"))).nothing_new
    assert not records.survey(measured(b"x", measurement(2, "24.9"))).nothing_new
    assert not records.survey(measured(b"x", measurement(2, "24.83"), measurement(3, "1"))).nothing_new
    assert not records.survey(measured(b"x")).nothing_new


@pytest.mark.parametrize(
    "change",
    [{"batch": "B"}, {"line": "L"}, {"sample": "t"}, {"reading": "2"}, {"characteristic": "peel"}],
)
def test_each_part_of_the_identity_counts(change: dict[str, str]) -> None:
    plain, other = identified(measured(b"x", measurement(2, "1"), measurement(2, "1", **change)))
    assert plain.identity != other.identity


def test_the_layout_and_rank_count_and_the_cell_does_not() -> None:
    moved = measurement(2, "1", cell=CellRef(sheet=None, row=1, column=1))
    (one,), (other,) = (
        identified(measured(b"x", measurement(2, "1"))),
        identified(measured(b"y", moved)),
    )
    assert one.identity == other.identity
    twice = identified(measured(b"x", measurement(2, "1"), measurement(2, "2")))
    assert twice[0].identity == one.identity
    assert twice[1].identity != one.identity


def test_without_samples_exports_are_not_joined(records: Records, reports: Path) -> None:
    nameless = measurement(2, "24.83", sample=None)
    sealed(records, reports, b"first", nameless)
    assert counts(records.survey(measured(b"second", nameless))) == (1, 0, 0)
    assert counts(records.survey(measured(b"first", nameless))) == (0, 1, 0)


def test_everything_about_a_value_is_kept(records: Records, reports: Path) -> None:
    value = measurement(
        2,
        "1",
        value=float("nan"),
        text="<0.05\udcff",
        censored=Censoring.BELOW,
        line="L1",
        status="ok",
        time="2026-11-01T08:00:00",
        marks=("struck",),
        factors=(("day", "1"),),
    )
    sealed(records, reports, b"first", value)
    with records.database.read() as connection:
        row = connection.execute(select(MEASUREMENT)).mappings().one()
    assert row["value"] is None
    assert (row["text"], row["censored"], row["line"]) == (r"<0.05\udcff", "<", "L1")
    assert (row["status"], row["time"], row["cell"]) == ("ok", "2026-11-01T08:00:00", "Results!C2")
    assert (row["marks"], row["factors"]) == ('["struck"]', '[["day","1"]]')
    assert counts(records.survey(measured(b"second", value))) == (0, 1, 0)


def test_many_values_go_in_pieces(records: Records, reports: Path) -> None:
    values = [measurement(row, "1") for row in range(1, 1202)]
    assert counts(sealed(records, reports, b"first", *values)) == (1201, 0, 0)
    assert counts(records.survey(measured(b"second", *values, measurement(9999, "2")))) == (1, 1201, 0)
