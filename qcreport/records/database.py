"""One SQLite file, opened so that several processes may use it and a committed fact survives a power cut.

The journal is SQLite's own rollback journal (DELETE), not the write-ahead log: an export writes a handful of
transactions, so the log's speed buys nothing, while the rollback journal leaves one file at rest that a
backup copies whole, needs no shared memory (which some container volumes lack) and lets an auditor open a
read-only copy. `synchronous=EXTRA` is FULL plus the sync of the folder that this journal needs for a commit
to last.
"""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

from sqlalchemy import URL, Connection, Engine, create_engine, event, func, insert, inspect, select
from sqlalchemy.exc import DatabaseError, OperationalError
from sqlalchemy.pool import ConnectionPoolEntry, NullPool

from qcreport.durable import make_folder
from qcreport.errors import EnvironmentFailedError, LedgerError, QcReportError
from qcreport.records.migrations import MIGRATIONS
from qcreport.records.moments import Clock, utc_text
from qcreport.records.tables import SCHEMA_VERSION

FILE_NAME = "records.sqlite3"

_BUSY_TIMEOUT_S = 30
_PRAGMAS = (
    f"PRAGMA busy_timeout = {_BUSY_TIMEOUT_S * 1000}",
    "PRAGMA journal_mode = DELETE",
    "PRAGMA synchronous = EXTRA",
    "PRAGMA foreign_keys = ON",
    "PRAGMA recursive_triggers = ON",
    "PRAGMA trusted_schema = OFF",
)
_WRITES = "qcreport_writes"


class Database:
    """The database of one site. Every transaction opens its own connection, so no state outlives it."""

    def __init__(self, path: Path) -> None:
        self.path = path
        self._engine = _engine(path)

    @classmethod
    def open(cls, folder: Path, clock: Clock) -> Database:
        """Open the database in `folder`, making and migrating it as needed.

        Raises
        ------
        EnvironmentFailedError
            Where the folder or file cannot be used, or a newer version wrote it.
        LedgerError
            Where the file is no database or is damaged.
        """
        make_folder(folder)
        database = cls(folder / FILE_NAME)
        if database.schema_version() != MIGRATIONS[-1].number:
            database._migrate(utc_text(clock()))
        return database

    def schema_version(self) -> int:
        """Return the number of the newest migration applied, 0 for a new file."""
        with self.read() as connection:
            return _schema_version(connection)

    def _migrate(self, now: str) -> None:
        with self.write() as connection:
            present = _schema_version(connection)
            if present > MIGRATIONS[-1].number:
                raise EnvironmentFailedError(
                    f"{self.path} has form {present}; this version knows up to {MIGRATIONS[-1].number}. "
                    "A newer qcreport wrote it: use that one."
                )
            if present == 0:
                SCHEMA_VERSION.create(connection, checkfirst=True)
            for migration in MIGRATIONS:
                if migration.number > present:
                    for statement in migration.statements:
                        connection.exec_driver_sql(statement)
                    row = {"number": migration.number, "name": migration.name, "applied_at": now}
                    connection.execute(insert(SCHEMA_VERSION).values(row))

    @contextmanager
    def write(self) -> Iterator[Connection]:
        """Give a connection inside BEGIN IMMEDIATE, so one writer at a time; commit at the end, else undo."""
        with self._transaction(writes=True) as connection:
            yield connection

    @contextmanager
    def read(self) -> Iterator[Connection]:
        """Give a connection that sees one unchanging state."""
        with self._transaction(writes=False) as connection:
            yield connection

    @contextmanager
    def _transaction(self, *, writes: bool) -> Iterator[Connection]:
        try:
            engine = self._engine.execution_options(**{_WRITES: writes})
            with engine.connect() as connection, connection.begin():
                yield connection
        except DatabaseError as error:
            raise _own_error(self.path, error) from error


def _engine(path: Path) -> Engine:
    url = URL.create("sqlite+pysqlite", database=str(path))
    engine = create_engine(url, poolclass=NullPool, connect_args={"timeout": _BUSY_TIMEOUT_S})
    event.listen(engine, "connect", _on_connect)
    event.listen(engine, "begin", _on_begin)
    return engine


def _on_connect(connection: Any, _entry: ConnectionPoolEntry) -> None:
    connection.isolation_level = None  # sqlite3 must not begin transactions of its own; _on_begin does
    for pragma in _PRAGMAS:
        connection.execute(pragma)


def _on_begin(connection: Connection) -> None:
    writes = connection.get_execution_options().get(_WRITES, False)
    connection.exec_driver_sql("BEGIN IMMEDIATE" if writes else "BEGIN")


def _schema_version(connection: Connection) -> int:
    if not inspect(connection).has_table(SCHEMA_VERSION.name):
        return 0
    return int(connection.execute(select(func.coalesce(func.max(SCHEMA_VERSION.c.number), 0))).scalar_one())


def _own_error(path: Path, error: DatabaseError) -> QcReportError:
    """Tell a machine that failed (disk, lock, permission) from records that do not hold."""
    text = str(error.orig)
    undecodable = "decode" in text
    if isinstance(error, OperationalError) and isinstance(error.orig, sqlite3.Error) and not undecodable:
        return EnvironmentFailedError(f"{path} could not be used: {text}. Mend that and try again.")
    return LedgerError(f"{path} does not hold together: {text}. Keep it as evidence; ask for its backup.")
