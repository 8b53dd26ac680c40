"""The check of everything recorded finds each thing that was touched."""

from __future__ import annotations

import sqlite3
from collections.abc import Callable
from pathlib import Path

import pytest

from qcreport.canonical import sha256_hex
from qcreport.errors import LedgerError
from qcreport.records.chain import Head
from qcreport.records.check import CheckOptions, check
from qcreport.records.facade import Records
from qcreport.records.listing import ReportState


@pytest.fixture
def reports(tmp_path: Path) -> Path:
    return tmp_path / "site/reports"


def tamper(records: Records, *statements: str) -> None:
    """Change the file as somebody would who knows the form: triggers away, change."""
    raw = sqlite3.connect(records.database.path)
    for (name,) in raw.execute("SELECT name FROM sqlite_master WHERE type = 'trigger'").fetchall():
        raw.execute(f"DROP TRIGGER {name}")
    for statement in statements:
        raw.execute(statement)
    raw.commit()
    raw.close()


def test_untouched_records_hold(site: Records, reports: Path) -> None:
    status = check(site, reports)
    assert status.ok
    assert (status.n_entries, status.n_reports) == (9, 2)
    assert status.n_archived == 3 + 4 + 3 + 1
    assert status.head == site.head()
    assert [row.state for row in site.reports()] == [
        ReportState.SEALED,
        ReportState.SEALED,
        ReportState.RESERVED,
    ]


@pytest.mark.parametrize(
    ("statement", "told"),
    [
        ("UPDATE ledger SET facts = '{}' WHERE sequence = 3", "Entry 3 no longer matches"),
        ("DELETE FROM ledger WHERE sequence = 2", "Entry 2 missing"),
        ("DELETE FROM ledger WHERE sequence >= 8", "The ledger ends at entry 7; entry 9 is known"),
        ("UPDATE run SET sealed_at = NULL WHERE serial = 1", "The ledger has 2026-0001 as sealed"),
        ("UPDATE run SET report_sha256 = 'x' WHERE serial = 1", "The report_sha256 of 2026-0001 differs"),
        ("UPDATE run SET answers = '[]' WHERE serial = 2", "The answers of 2026-0002 differs"),
        ("UPDATE run SET plan_name = 'other' WHERE serial = 2", "The plan of 2026-0002 differs"),
        ("UPDATE run SET run_key = 'x' WHERE serial = 3", "The inputs of 2026-0003 no longer match"),
        ("UPDATE run SET sealed_at = 'x' WHERE serial = 3", "has 2026-0003 as sealed; the ledger has not"),
        ("UPDATE measurement SET value = 30 WHERE id = 1", "Measurements recorded by 2026-0001"),
        ("DELETE FROM measurement WHERE id = 2", "Measurements recorded by 2026-0001"),
        ("DELETE FROM run WHERE serial = 1", "The ledger has 2026-0001 as sealed"),
    ],
)
def test_a_change_of_the_database_is_found(site: Records, reports: Path, statement: str, told: str) -> None:
    tamper(site, statement)
    problems = check(site, reports).problems
    assert any(told in problem for problem in problems), problems


@pytest.mark.parametrize(("column", "ask"), [("inputs", "run"), ("answers", "run"), ("answers", "list")])
def test_a_damaged_row_is_told(site: Records, column: str, ask: str) -> None:
    tamper(site, f"UPDATE run SET {column} = '{{' WHERE serial = 1")  # noqa: S608  a column of our own
    with pytest.raises(LedgerError, match="The record of run 2026-0001 is damaged"):
        site.run_of_number("2026-0001") if ask == "run" else site.reports()


def _changed(path: Path) -> None:
    path.chmod(0o644)
    path.write_bytes(b"other")


@pytest.mark.parametrize(("touch", "told"), [(_changed, "no longer matches"), (Path.unlink, "lacks")])
@pytest.mark.parametrize("data", [b"export", b"plan", b"page", b'{"schema":"qcreport/result/1"}'])
def test_a_file_of_the_archive_that_was_touched_is_found(
    site: Records, reports: Path, touch: Callable[[Path], None], told: str, data: bytes
) -> None:
    touch(site.archive.path_of(sha256_hex(data)))
    (problem,) = check(site, reports).problems
    assert told in problem


def test_a_report_that_was_touched_is_found(site: Records, reports: Path) -> None:
    (reports / "2026-0001.pdf").write_bytes(b"%PDF other")
    (reports / "2026-0002.pdf").unlink()
    problems = check(site, reports).problems
    assert problems == (
        "The report 2026-0001 (2026-0001.pdf) is not the one that was sealed.",
        "The report 2026-0002 (2026-0002.pdf) cannot be read: No such file or directory.",
    )


def test_a_head_kept_elsewhere_is_held_against(site: Records, reports: Path) -> None:
    known = Head(sequence=20, entry_hash="f" * 64)
    assert "entry 20 is known" in check(site, reports, CheckOptions(known=(known,))).problems[0]
