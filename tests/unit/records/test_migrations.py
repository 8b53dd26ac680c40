"""Records in each earlier form are brought to the present one, and nothing in them changes."""

from __future__ import annotations

import datetime as dt
import shutil
import sqlite3
from pathlib import Path

import pytest
from sqlalchemy import select

from qcreport.records.check import check
from qcreport.records.database import Database
from qcreport.records.facade import Records
from qcreport.records.migrations import MIGRATIONS
from qcreport.records.tables import MEASUREMENT, RUN_GROUP

from .conftest import SetClock
from .example import Handling, measurement

_OLD_ROWS = """
    INSERT INTO measurement
    SELECT id, identity, version, layout, line, batch, sample, reading, characteristic, value, text, decimals,
        unit, censored, status, time, cell, marks, factors, export_sha256, number, recorded_at
    FROM present.measurement WHERE number IS NOT NULL
"""
_COPIED = ("ledger", "once", "export", "refusal", "run")


@pytest.fixture
def in_form_1(finished_folder: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Return a site's records as the first version wrote them: its form with the rows of a finished site."""
    shutil.copytree(finished_folder, tmp_path / "site")
    (tmp_path / "site/records/records.sqlite3").rename(tmp_path / "present.sqlite3")
    with monkeypatch.context() as patch:
        patch.setattr("qcreport.records.database.MIGRATIONS", MIGRATIONS[:1])
        Database.open(tmp_path / "site/records", lambda: dt.datetime(2026, 11, 1, tzinfo=dt.UTC))
    raw = sqlite3.connect(tmp_path / "site/records/records.sqlite3", isolation_level=None)
    raw.execute("ATTACH ? AS present", (str(tmp_path / "present.sqlite3"),))
    for table in _COPIED:
        raw.execute(f"INSERT INTO {table} SELECT * FROM present.{table}")  # noqa: S608  names of our own
    raw.execute(_OLD_ROWS)
    assert raw.execute("SELECT max(number) FROM schema_version").fetchone() == (1,)
    assert not raw.execute("SELECT 1 FROM sqlite_master WHERE name = 'content'").fetchall()
    raw.close()
    return tmp_path / "site"


def test_records_in_form_1_hold_after_the_change(
    in_form_1: Path, clock: SetClock, site_rows: list[object]
) -> None:
    records = Records.open(in_form_1 / "records", clock)
    assert records.database.schema_version() == MIGRATIONS[-1].number
    assert check(records, in_form_1 / "reports").problems == ()
    with records.database.read() as connection:
        rows = [tuple(row) for row in connection.execute(select(MEASUREMENT).order_by(MEASUREMENT.c.id))]
        groups = [tuple(row) for row in connection.execute(select(RUN_GROUP))]
    assert rows == site_rows
    assert ("2026-0001", "lap_shear", "", "LA-1") in groups


@pytest.fixture
def site_rows(finished_folder: Path, clock: SetClock) -> list[object]:
    records = Records.open(finished_folder / "records", clock)
    with records.database.read() as connection:
        return [tuple(row) for row in connection.execute(select(MEASUREMENT).order_by(MEASUREMENT.c.id))]


def test_records_in_form_1_go_on_as_before(in_form_1: Path, clock: SetClock) -> None:
    records = Records.open(in_form_1 / "records", clock)
    later = Handling(records, claim="later", data=b"later", values=(measurement(2, "25.00"),))
    survey = later.whole(in_form_1 / "reports")
    assert len(survey.changed) == 1
    assert check(records, in_form_1 / "reports").problems == ()
    numbers = [row.number for row in records.reports()]
    assert numbers == sorted(numbers)
    assert len(numbers) == 4
