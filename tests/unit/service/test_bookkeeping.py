"""Which events enter the ledger."""

from __future__ import annotations

import datetime as dt
from pathlib import Path

import pytest

from qcreport.errors import ExportRefusedError
from qcreport.intake.exports import ClaimedExport
from qcreport.records.facade import Records
from qcreport.service.bookkeeping import record_event
from qcreport.service.model import Event, EventKind, Outcome

from .world import World


@pytest.fixture
def world(tmp_path: Path) -> World:
    return World(tmp_path)


@pytest.fixture
def records(tmp_path: Path) -> Records:
    return Records.open(tmp_path / "records", lambda: dt.datetime(2026, 11, 2, 12, tzinfo=dt.UTC))


def kinds(records: Records) -> list[str]:
    return [entry.kind for entry in records.entries()]


def test_a_refused_export_is_received_then_refused_and_its_bytes_are_kept(
    world: World, records: Records
) -> None:
    world.tell = lambda event: [record_event(records, event) for _ in range(2)]  # type: ignore[assignment]
    world.drop("empty.xlsx", b"")
    world.run(once=True)
    assert kinds(records) == [
        "service started",
        "service started",
        "received",
        "refused",
        "service stopped",
        "service stopped",
    ]
    (refusal,) = records.open_refusals()
    assert (refusal.name, refusal.code) == ("empty.xlsx", "empty_file")
    assert (world.refused / refusal.folder / "why.txt").exists()


def test_an_export_too_large_to_read_is_refused_without_a_digest(world: World, records: Records) -> None:
    world.tell = lambda event: record_event(records, event)  # type: ignore[method-assign]
    world.drop("large.xlsx", b"x" * 1001)
    world.run(once=True)
    assert kinds(records) == ["service started", "refused", "service stopped"]
    assert records.entries()[1].facts_object()["export_sha256"] is None


def test_a_fault_of_the_program_is_recorded_once(world: World, records: Records) -> None:
    def fault(_export: ClaimedExport) -> Outcome:
        raise ValueError("broken\nlines")

    world.process = fault
    world.tell = lambda event: [record_event(records, event) for _ in range(2)]  # type: ignore[assignment]
    world.drop("a.xlsx")
    world.run(once=True)
    assert kinds(records).count("failed") == 1
    (entry,) = [e for e in records.entries() if e.kind == "failed"]
    assert entry.facts_object()["text"] == r"a.xlsx met a fault of the program: broken\nlines"


@pytest.mark.parametrize("kind", [EventKind.SHARE_LOST, EventKind.SHARE_BACK])
def test_a_lost_share_is_recorded(records: Records, kind: EventKind) -> None:
    record_event(records, Event(kind=kind, text="The inbox."))
    assert kinds(records) == [kind.value]


@pytest.mark.parametrize("kind", [EventKind.HANDLED, EventKind.PAUSED, EventKind.RESUMED, EventKind.REFUSED])
def test_other_events_are_for_the_log_only(records: Records, kind: EventKind) -> None:
    error = ExportRefusedError("x", file="", where="", found="", expected="", next_step="")
    record_event(records, Event(kind=kind, text="…", refusal=error))
    assert kinds(records) == []
