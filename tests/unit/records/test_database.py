"""The database file: its form, its safety, and what its failures are called."""

from __future__ import annotations

import datetime as dt
import sqlite3
import threading
from pathlib import Path

import pytest
from sqlalchemy import inspect

from qcreport.errors import EnvironmentFailedError, LedgerError
from qcreport.records import ledger
from qcreport.records.chain import Kind, check_chain
from qcreport.records.database import Database
from qcreport.records.facade import Records
from qcreport.records.migrations import MIGRATIONS, Migration
from qcreport.records.tables import METADATA

from .conftest import SetClock


@pytest.fixture
def database(tmp_path: Path, clock: SetClock) -> Database:
    return Database.open(tmp_path / "odd name?#%41", clock)


def test_a_new_file_is_migrated_and_opening_it_again_changes_nothing(
    database: Database, clock: SetClock
) -> None:
    assert database.schema_version() == MIGRATIONS[-1].number
    before = database.path.read_bytes()
    Database.open(database.path.parent, clock)
    assert database.path.read_bytes() == before
    assert [path.name for path in database.path.parent.iterdir()] == ["records.sqlite3"]


def test_migrations_are_numbered_without_gaps() -> None:
    assert [m.number for m in MIGRATIONS] == list(range(1, len(MIGRATIONS) + 1))


def test_the_tables_that_queries_see_are_those_that_migrations_make(database: Database) -> None:
    with database.read() as connection:
        found = inspect(connection)
        assert sorted(found.get_table_names()) == sorted(METADATA.tables)
        for name, table in METADATA.tables.items():
            columns = {column["name"]: column["nullable"] for column in found.get_columns(name)}
            assert columns == {column.name: column.nullable for column in table.columns}


def test_settings_that_make_a_commit_last(database: Database) -> None:
    with database.read() as connection:
        pragma = {
            name: connection.exec_driver_sql(f"PRAGMA {name}").scalar_one()
            for name in ("journal_mode", "synchronous", "foreign_keys", "busy_timeout")
        }
    assert pragma == {"journal_mode": "delete", "synchronous": 3, "foreign_keys": 1, "busy_timeout": 30000}


def test_an_older_form_is_brought_up_once(
    database: Database, clock: SetClock, monkeypatch: pytest.MonkeyPatch
) -> None:
    statement = "CREATE TABLE later (n INTEGER)"
    later = Migration(number=len(MIGRATIONS) + 1, name="later", statements=(statement,))
    monkeypatch.setattr("qcreport.records.database.MIGRATIONS", (*MIGRATIONS, later))
    for _ in range(2):
        opened = Database.open(database.path.parent, clock)
        assert opened.schema_version() == later.number
    with opened.read() as connection:
        assert "later" in inspect(connection).get_table_names()


def test_a_form_written_by_a_newer_version_is_left_alone(database: Database, clock: SetClock) -> None:
    with database.write() as connection:
        connection.exec_driver_sql("INSERT INTO schema_version VALUES (99, 'new', '2030')")
    with pytest.raises(EnvironmentFailedError, match="newer qcreport"):
        Database.open(database.path.parent, clock)


def test_a_file_that_is_no_database_is_told(tmp_path: Path, clock: SetClock) -> None:
    (tmp_path / "records.sqlite3").write_bytes(b"no database" * 1000)
    with pytest.raises(LedgerError, match="does not hold together"):
        Database.open(tmp_path, clock)


def test_a_folder_that_cannot_be_used_is_told(tmp_path: Path, clock: SetClock) -> None:
    (tmp_path / "records.sqlite3").mkdir()
    with pytest.raises(EnvironmentFailedError, match="could not be used"):
        Database.open(tmp_path, clock)


def test_text_that_is_no_utf8_was_not_written_by_us(records: Records) -> None:
    records.note(Kind.VERIFIED, {}, actor="a")
    with sqlite3.connect(records.database.path) as raw:
        raw.execute("DROP TRIGGER ledger_no_update")
        raw.execute("UPDATE ledger SET actor = CAST(x'ff' AS TEXT)")
    raw.close()
    with pytest.raises(LedgerError, match="does not hold together"):
        records.entries()


@pytest.mark.parametrize(
    "statement",
    [
        "UPDATE ledger SET actor = 'someone'",
        "DELETE FROM ledger",
        "INSERT OR REPLACE INTO ledger SELECT sequence, at, 'x', kind, facts, previous_hash, '1' FROM ledger",
        "INSERT INTO ledger SELECT 99, at, actor, kind, facts, previous_hash, 'x' FROM ledger LIMIT 1",
        "INSERT INTO ledger SELECT NULL, at, actor, kind, facts, previous_hash, 'x' FROM ledger LIMIT 1",
        "DELETE FROM run",
        "UPDATE run SET report_sha256 = 'x'",
        "UPDATE measurement SET value = 1",
        "DELETE FROM measurement",
        "INSERT OR REPLACE INTO run SELECT * FROM run",
        "UPDATE run SET run_key = 'x'",
    ],
)
def test_the_file_itself_refuses_to_be_rewritten(site: Records, statement: str) -> None:
    before = site.entries(), site.reports()
    with pytest.raises(LedgerError), site.database.write() as connection:
        connection.exec_driver_sql(statement)
    assert (site.entries(), site.reports()) == before


def test_writers_in_several_threads_keep_one_chain(database: Database) -> None:
    """Each transaction has its own connection, so threads here stand for processes."""

    def write(actor: str) -> None:
        for _ in range(10):
            with database.write() as connection:
                ledger.append(connection, at="2026", actor=actor, kind=Kind.VERIFIED, facts={})

    threads = [threading.Thread(target=write, args=(str(i),)) for i in range(4)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    with database.read() as connection:
        entries = list(ledger.entries(connection))
    assert len(entries) == 40
    assert check_chain(entries) == ()


def test_a_reader_sees_one_state_while_others_write(records: Records) -> None:
    with records.database.read() as connection:
        before = ledger.head(connection)
        assert ledger.head(connection) == before


def test_times_are_kept_in_utc(tmp_path: Path) -> None:
    east = dt.timezone(dt.timedelta(hours=9))
    records = Records.open(tmp_path / "records", lambda: dt.datetime(2027, 1, 1, 3, 0, 0, 999, east))
    assert records.note(Kind.VERIFIED, {}, actor="a").at == "2026-12-31T18:00:00Z"


def test_another_archive_folder_may_be_given(tmp_path: Path, clock: SetClock) -> None:
    records = Records.open(tmp_path / "records", clock, archive_folder=tmp_path / "elsewhere")
    assert records.archive.store(b"data").is_relative_to(tmp_path / "elsewhere")
