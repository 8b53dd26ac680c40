"""One export through the records, once, twice, and with every step repeated."""

from __future__ import annotations

import re
from collections import Counter
from pathlib import Path

import pytest

from qcreport.canonical import sha256_hex
from qcreport.errors import EnvironmentFailedError, ExportRefusedError, LedgerError
from qcreport.records.chain import Kind, check_chain
from qcreport.records.check import check
from qcreport.records.facade import Records
from qcreport.records.ledger import Step
from qcreport.records.run import Slot, run_key

from .conftest import SetClock
from .example import Handling, context, measurement


def kinds(records: Records) -> list[str]:
    return [entry.kind for entry in records.entries()]


def test_one_export_leaves_its_entries_its_run_and_its_measurements(records: Records, tmp_path: Path) -> None:
    survey = Handling(records).whole(tmp_path / "reports")

    assert kinds(records) == ["received", "read", "compared", "sealed"]
    assert (survey.new, survey.known, survey.changed) == (2, 0, ())
    run = records.run_of_number("2026-0001")
    assert run is not None
    assert run.sealing is not None
    assert run.answers == (("lap_shear", "different"),)
    assert records.archive.read(run.sealing.result_sha256) == b'{"schema":"qcreport/result/1"}'
    assert records.run_of_report(run.sealing.report_sha256) == run
    assert records.run_of_key(run_key(Handling(records).inputs)) == run
    assert check_chain(records.entries(), [records.head(), run.ledger_head]) == ()
    sealed = records.entries(kind=Kind.SEALED)[0].facts_object()
    assert sealed["report_sha256"] == sha256_hex(b"%PDF sealed")
    assert sealed["inputs"]["templates"] == {"page.html": sha256_hex(b"page")}


def test_a_step_repeated_after_a_kill_changes_nothing(
    records: Records, tmp_path: Path, clock: SetClock
) -> None:
    handling, reports = Handling(records), tmp_path / "reports"
    steps = [handling.receive, handling.read, handling.reserve, handling.compared]
    steps.append(lambda: handling.sealed(reports))
    for reached in (*range(1, len(steps) + 1), len(steps)):
        for step in steps[:reached]:
            clock.advance(61)
            step()

    assert kinds(records) == ["received", "read", "compared", "sealed"]
    assert [row.number for row in records.reports()] == ["2026-0001"]
    assert check(records, reports).problems == ()


def test_a_run_taken_up_again_keeps_number_time_head_and_context(records: Records, clock: SetClock) -> None:
    handling = Handling(records)
    handling.receive()
    first = handling.reserve()
    clock.advance(3600)
    records.note(Kind.SERVICE_STARTED, {}, actor="service")
    again = Handling(records, claim="job-2").reserve()

    assert again == first
    assert again.run.made_at == "2026-11-02T06:12:00Z"
    assert again.run.ledger_head.sequence == 1
    assert again.already is None


def test_the_same_key_is_answered_already(records: Records, tmp_path: Path) -> None:
    handling = Handling(records)
    handling.whole(tmp_path / "reports")

    already = handling.reserve().already
    assert already is not None
    assert already.report_name == "2026-0001.pdf"


def test_other_settings_are_run_two_of_two(records: Records, tmp_path: Path) -> None:
    Handling(records).whole(tmp_path / "reports")
    other = Handling(records, claim="job-2", plan=b"plan, margin 2", reason="margin was agreed anew")
    other.whole(tmp_path / "reports")

    reservation = other.reserve()
    assert (reservation.number, reservation.k, reservation.n) == ("2026-0002", 2, 2)
    digest = sha256_hex(b"export")
    assert [run.k for run in records.runs_of_export(digest, "shear")] == [1, 2]
    assert [run.reason for run in records.runs_of_export(digest)] == ["", "margin was agreed anew"]
    assert [(row.k, row.n) for row in records.reports()] == [(1, 2), (2, 2)]


def test_numbers_begin_anew_with_the_year_and_outgrow_four_digits(records: Records) -> None:
    handling = Handling(records)
    handling.receive()
    assert handling.reserve().number == "2026-0001"
    with records.database.write() as connection:
        connection.exec_driver_sql("UPDATE run SET serial = 9999, number = '2026-9999'")
    other = Handling(records, plan=b"other")
    other.receive()
    assert other.reserve().number == "2026-10000"
    third = Handling(records, plan=b"third")
    third.receive()
    next_year = records.reserve(
        third.inputs, export_name="e.xlsx", plan_name="shear", year=2027, build_context=context
    )
    assert next_year.number == "2027-0001"


def test_a_context_that_fails_uses_no_number_up(records: Records) -> None:
    handling = Handling(records)
    handling.receive()

    def fails(_slot: Slot) -> bytes:
        raise ValueError("no certificate")

    with pytest.raises(ValueError, match="no certificate"):
        records.reserve(
            handling.inputs, export_name="e", plan_name="shear", year=2026, build_context=fails, reason=""
        )
    assert records.reports() == ()
    assert handling.reserve().number == "2026-0001"


def test_bytes_are_kept_before_they_are_recorded(records: Records) -> None:
    with pytest.raises(LedgerError, match="not in the archive"):
        records.receive("job", export_sha256="ab" * 32, name="x", size=1, actor="service")
    with pytest.raises(LedgerError, match="not in the archive"):
        Handling(records).reserve()
    for data in (b"export", b"plan", b"layout", b"rules", b"page"):
        records.archive.store(data)
    with pytest.raises(LedgerError, match="received"):
        Handling(records).reserve()
    assert kinds(records) == []


def test_a_report_is_sealed_after_its_comparison_and_only_once(records: Records, tmp_path: Path) -> None:
    handling = Handling(records)
    handling.receive()
    with pytest.raises(LedgerError, match="not compared"):
        handling.sealed(tmp_path / "reports")
    handling.compared()
    handling.sealed(tmp_path / "reports")
    handling.report = b"%PDF sealed by another process"
    with pytest.raises(LedgerError, match="sealed already"):
        handling.sealed(tmp_path / "reports")
    with pytest.raises(LedgerError, match="no run 2026-0099"):
        records.compared("job", number="2026-0099", result=b"{}", answers=(), actor="service")


def test_a_failed_seal_leaves_neither_measurements_nor_entry(
    records: Records, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    handling = Handling(records)
    handling.receive()
    handling.compared()

    def killed(*_: object, **__: object) -> None:
        raise KeyboardInterrupt

    with monkeypatch.context() as patch:
        patch.setattr("qcreport.records.ledger.append", killed)
        with pytest.raises(KeyboardInterrupt):
            handling.sealed(tmp_path / "reports")
    assert records.survey(handling.measurements).new == 2
    assert handling.sealed(tmp_path / "reports").new == 2
    assert kinds(records) == ["received", "compared", "sealed"]


def test_a_result_that_differs_on_the_second_try_is_a_second_entry(records: Records) -> None:
    handling = Handling(records)
    handling.receive()
    handling.compared()
    handling.result = b'{"versions": "upgraded"}'
    handling.compared()
    assert kinds(records) == ["received", "compared", "compared"]
    run = records.run_of_number("2026-0001")
    assert run is not None
    assert run.result_sha256 == sha256_hex(handling.result)


def test_refusals_are_recorded_once_and_leave_the_list_when_mended(records: Records, tmp_path: Path) -> None:
    handling = Handling(records, data=b"broken")
    handling.receive()
    error = ExportRefusedError(
        "error_cells",
        file="export.xlsx",
        where="Results!C5",
        found="#DIV/0!",
        expected="a number",
        next_step="…",
    )
    for _ in range(2):
        records.refuse(
            "job-1",
            error,
            export_sha256=sha256_hex(b"broken"),
            folder="20261102-ab",
            actor="service",
            plan_name="shear",
        )
    assert kinds(records) == ["received", "refused"]
    assert [(r.name, r.code, r.folder) for r in records.open_refusals()] == [
        ("export.xlsx", "error_cells", "20261102-ab")
    ]
    Handling(records, claim="job-2", plan_name="other plan").whole(tmp_path / "reports")
    assert len(records.open_refusals()) == 1
    Handling(records, claim="job-3", data=b"mended").whole(tmp_path / "reports")
    assert records.open_refusals() == ()


def test_a_refusal_without_digest_and_the_newest_of_a_name(records: Records) -> None:
    for claim, code in (("job-1", "too_large"), ("job-2", "empty_file")):
        error = ExportRefusedError(code, file="e.xlsx", where="", found="", expected="", next_step="")
        records.refuse(claim, error, export_sha256=None, folder="f", actor="service")
    assert [r.code for r in records.open_refusals()] == ["empty_file"]


def test_a_duplicate_names_the_number_that_answered(records: Records, tmp_path: Path) -> None:
    handling = Handling(records)
    handling.whole(tmp_path / "reports")
    run = records.run_of_number("2026-0001")
    assert run is not None
    for _ in range(2):
        records.duplicate(
            "job-2", export_sha256=sha256_hex(b"export"), name="copy.xlsx", run=run, actor="service"
        )
    facts = records.entries(kind=Kind.DUPLICATE)[0].facts_object()
    assert facts["number"] == "2026-0001"
    assert Counter(kinds(records))["duplicate"] == 1


def test_an_export_does_not_become_its_own_duplicate(records: Records, tmp_path: Path) -> None:
    handling = Handling(records)
    handling.whole(tmp_path / "reports")
    run = handling.reserve().run
    digest = sha256_hex(b"export")
    entry = records.duplicate(
        handling.claim, export_sha256=digest, name="export.xlsx", run=run, actor="service"
    )
    assert entry.kind == "sealed"
    assert "duplicate" not in kinds(records)


def test_received_again_tells_the_first_time_and_the_runs(
    records: Records, tmp_path: Path, clock: SetClock
) -> None:
    Handling(records).whole(tmp_path / "reports")
    clock.advance(86400)
    digest = sha256_hex(b"export")
    receipt = records.receive("job-2", export_sha256=digest, name="copy.xlsx", size=6, actor="service")
    assert receipt.received_at == "2026-11-02T06:12:00Z"
    assert receipt.first_name == "export.xlsx"
    assert [run.number for run in receipt.runs] == ["2026-0001"]


def test_names_that_are_no_utf8_are_kept_readable(records: Records, tmp_path: Path) -> None:
    Handling(records, name="caf\udce9.xlsx", values=(measurement(2, "1", batch="A\udcff"),)).whole(
        tmp_path / "reports"
    )
    assert records.reports()[0].export_name == r"caf\udce9.xlsx"
    assert check(records, tmp_path / "reports").problems == ()


def test_entries_by_time(records: Records, clock: SetClock) -> None:
    records.note(Kind.SERVICE_STARTED, {}, actor="service", step=Step(claim="start-1"))
    clock.advance(60)
    records.note(Kind.SERVICE_STOPPED, {}, actor="service")
    assert [e.kind for e in records.entries(since="2026-11-02T06:13:00Z")] == ["service stopped"]
    assert [e.kind for e in records.entries(until="2026-11-02T06:13:00Z")] == ["service started"]
    assert re.fullmatch(r"[0-9a-f]{64}", records.head().entry_hash)


def test_a_lock_that_cannot_be_opened_is_told(records: Records) -> None:
    (records.database.path.parent / "locks/ab.lock").mkdir(parents=True)
    with pytest.raises(EnvironmentFailedError, match="could not be opened"):
        records.issuing("ab" * 32).__enter__()


def test_one_process_holds_a_run_key(records: Records) -> None:
    key, pauses = "ab" * 32, []
    with records.issuing(key), pytest.raises(EnvironmentFailedError, match="Another process"):
        records.issuing(key, tries=3, pause=lambda: pauses.append(1)).__enter__()
    assert len(pauses) == 2
    with records.issuing(key):
        pass
