"""The steps by which the database came to its present form; a step that was released is never edited."""

from __future__ import annotations

from dataclasses import dataclass

_LEDGER = (
    """
    CREATE TABLE ledger (
        sequence INTEGER NOT NULL PRIMARY KEY,
        at TEXT NOT NULL,
        actor TEXT NOT NULL,
        kind TEXT NOT NULL,
        facts TEXT NOT NULL,
        previous_hash TEXT NOT NULL,
        entry_hash TEXT NOT NULL UNIQUE
    )
    """,
    """
    CREATE TRIGGER ledger_no_update BEFORE UPDATE ON ledger
    BEGIN SELECT RAISE(ABORT, 'the ledger is append-only'); END
    """,
    """
    CREATE TRIGGER ledger_no_delete BEFORE DELETE ON ledger
    BEGIN SELECT RAISE(ABORT, 'the ledger is append-only'); END
    """,
    # Also stops INSERT OR REPLACE, which removes the old row without the DELETE trigger.
    """
    CREATE TRIGGER ledger_only_append BEFORE INSERT ON ledger
    WHEN NEW.sequence IS NOT (SELECT coalesce(max(sequence), 0) + 1 FROM ledger)
    BEGIN SELECT RAISE(ABORT, 'a ledger entry must follow the newest one'); END
    """,
    """
    CREATE TABLE once (
        claim TEXT NOT NULL,
        kind TEXT NOT NULL,
        subject TEXT NOT NULL,
        sequence INTEGER NOT NULL REFERENCES ledger (sequence),
        PRIMARY KEY (claim, kind, subject)
    )
    """,
)

_EXPORTS = (
    """
    CREATE TABLE export (
        sha256 TEXT NOT NULL PRIMARY KEY,
        name TEXT NOT NULL,
        size INTEGER NOT NULL,
        received_at TEXT NOT NULL
    )
    """,
    """
    CREATE TABLE refusal (
        sequence INTEGER NOT NULL PRIMARY KEY REFERENCES ledger (sequence),
        export_sha256 TEXT,
        name TEXT NOT NULL,
        plan TEXT NOT NULL,
        code TEXT NOT NULL,
        text TEXT NOT NULL,
        folder TEXT NOT NULL,
        refused_at TEXT NOT NULL
    )
    """,
)

_RUNS = (
    """
    CREATE TABLE run (
        number TEXT NOT NULL PRIMARY KEY,
        year INTEGER NOT NULL,
        serial INTEGER NOT NULL,
        run_key TEXT NOT NULL UNIQUE,
        export_sha256 TEXT NOT NULL REFERENCES export (sha256),
        export_name TEXT NOT NULL,
        plan_name TEXT NOT NULL,
        inputs TEXT NOT NULL,
        k INTEGER NOT NULL,
        reason TEXT NOT NULL,
        made_at TEXT NOT NULL,
        ledger_sequence INTEGER NOT NULL,
        ledger_hash TEXT NOT NULL,
        context_sha256 TEXT NOT NULL,
        result_sha256 TEXT,
        answers TEXT,
        report_name TEXT,
        report_sha256 TEXT,
        sealed_at TEXT,
        UNIQUE (year, serial),
        UNIQUE (export_sha256, plan_name, k)
    )
    """,
    "CREATE INDEX run_by_report ON run (report_sha256)",
    """
    CREATE TRIGGER run_no_delete BEFORE DELETE ON run
    BEGIN SELECT RAISE(ABORT, 'a report number is never given back'); END
    """,
    """
    CREATE TRIGGER run_sealed_stays BEFORE UPDATE ON run WHEN OLD.sealed_at IS NOT NULL
    BEGIN SELECT RAISE(ABORT, 'a sealed run never changes'); END
    """,
)

_MEASUREMENTS = (
    """
    CREATE TABLE measurement (
        id INTEGER NOT NULL PRIMARY KEY,
        identity TEXT NOT NULL,
        version INTEGER NOT NULL,
        layout TEXT NOT NULL,
        line TEXT,
        batch TEXT NOT NULL,
        sample TEXT,
        reading TEXT,
        characteristic TEXT NOT NULL,
        value REAL,
        text TEXT NOT NULL,
        decimals INTEGER NOT NULL,
        unit TEXT NOT NULL,
        censored TEXT,
        status TEXT,
        time TEXT,
        cell TEXT NOT NULL,
        marks TEXT NOT NULL,
        factors TEXT NOT NULL,
        export_sha256 TEXT NOT NULL REFERENCES export (sha256),
        number TEXT NOT NULL REFERENCES run (number),
        recorded_at TEXT NOT NULL,
        UNIQUE (identity, version)
    )
    """,
    "CREATE INDEX measurement_by_batch ON measurement (characteristic, line, batch)",
    "CREATE INDEX measurement_by_run ON measurement (number)",
    """
    CREATE TRIGGER measurement_no_update BEFORE UPDATE ON measurement
    BEGIN SELECT RAISE(ABORT, 'a measurement is never changed; a new version is added'); END
    """,
    """
    CREATE TRIGGER measurement_no_delete BEFORE DELETE ON measurement
    BEGIN SELECT RAISE(ABORT, 'a measurement is never removed'); END
    """,
)


# SQLite cannot take NOT NULL from a column, so the table is made anew; every row and its id stay as they are.
_MEASUREMENTS_OF_IMPORTS = (
    """
    CREATE TABLE measurement_2 (
        id INTEGER NOT NULL PRIMARY KEY,
        identity TEXT NOT NULL,
        version INTEGER NOT NULL,
        layout TEXT NOT NULL,
        line TEXT,
        batch TEXT NOT NULL,
        sample TEXT,
        reading TEXT,
        characteristic TEXT NOT NULL,
        value REAL,
        text TEXT NOT NULL,
        decimals INTEGER NOT NULL,
        unit TEXT NOT NULL,
        censored TEXT,
        status TEXT,
        time TEXT,
        cell TEXT NOT NULL,
        marks TEXT NOT NULL,
        factors TEXT NOT NULL,
        export_sha256 TEXT NOT NULL REFERENCES export (sha256),
        number TEXT REFERENCES run (number),
        recorded_at TEXT NOT NULL,
        UNIQUE (identity, version)
    )
    """,
    "INSERT INTO measurement_2 SELECT * FROM measurement ORDER BY id",
    "DROP TABLE measurement",
    "ALTER TABLE measurement_2 RENAME TO measurement",
    "CREATE INDEX measurement_by_batch ON measurement (characteristic, line, batch)",
    "CREATE INDEX measurement_by_run ON measurement (number)",
    "CREATE INDEX measurement_by_sample ON measurement (layout, batch, sample)",
    "CREATE INDEX measurement_by_export ON measurement (export_sha256)",
    """
    CREATE TRIGGER measurement_no_update BEFORE UPDATE ON measurement
    BEGIN SELECT RAISE(ABORT, 'a measurement is never changed; a new version is added'); END
    """,
    """
    CREATE TRIGGER measurement_no_delete BEFORE DELETE ON measurement
    BEGIN SELECT RAISE(ABORT, 'a measurement is never removed'); END
    """,
)

_CONTENTS = (
    # What an export holds, read by a layout: the same digest in a re-saved workbook with the same values.
    """
    CREATE TABLE content (
        export_sha256 TEXT NOT NULL REFERENCES export (sha256),
        layout_sha256 TEXT NOT NULL,
        content_sha256 TEXT NOT NULL,
        PRIMARY KEY (export_sha256, layout_sha256)
    )
    """,
    "CREATE INDEX content_by_digest ON content (content_sha256)",
    """
    CREATE TRIGGER content_no_update BEFORE UPDATE ON content
    BEGIN SELECT RAISE(ABORT, 'what an export holds never changes'); END
    """,
    """
    CREATE TRIGGER content_no_delete BEFORE DELETE ON content
    BEGIN SELECT RAISE(ABORT, 'what an export holds never changes'); END
    """,
    # Which lines, batches and characteristics a report compares, for the list of reports.
    """
    CREATE TABLE run_group (
        number TEXT NOT NULL REFERENCES run (number),
        characteristic TEXT NOT NULL,
        line TEXT NOT NULL,
        batch TEXT NOT NULL,
        PRIMARY KEY (number, characteristic, line, batch)
    )
    """,
    """
    INSERT INTO run_group
    SELECT DISTINCT number, characteristic, coalesce(line, ''), batch FROM measurement
    WHERE number IS NOT NULL
    """,
    # Computations without a report.
    """
    CREATE TABLE trial (
        sequence INTEGER NOT NULL PRIMARY KEY REFERENCES ledger (sequence),
        export_sha256 TEXT NOT NULL REFERENCES export (sha256),
        plan_name TEXT NOT NULL,
        run_key TEXT NOT NULL
    )
    """,
    "CREATE INDEX trial_by_export ON trial (export_sha256)",
)

_SETTINGS = (
    """
    CREATE TABLE setting_file (
        name TEXT NOT NULL PRIMARY KEY,
        sha256 TEXT NOT NULL
    )
    """,
    "CREATE INDEX ledger_by_kind ON ledger (kind, sequence)",
    "CREATE INDEX ledger_by_time ON ledger (at)",
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Migration:
    """One numbered step."""

    number: int
    """001, 002, …"""
    name: str
    """What it brings."""
    statements: tuple[str, ...]
    """SQL, in order, all in one transaction."""


MIGRATIONS: tuple[Migration, ...] = (
    Migration(
        number=1,
        name="ledger, exports, runs and measurements",
        statements=(*_LEDGER, *_EXPORTS, *_RUNS, *_MEASUREMENTS),
    ),
    Migration(
        number=2,
        name="imports, contents, groups of reports, settings seen",
        statements=(*_MEASUREMENTS_OF_IMPORTS, *_CONTENTS, *_SETTINGS),
    ),
)
