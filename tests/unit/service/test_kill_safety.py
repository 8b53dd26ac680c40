"""One export from inbox to records, killed before each effect: nothing is lost or doubled."""

from __future__ import annotations

import datetime as dt
from collections import Counter
from collections.abc import Callable
from pathlib import Path

import pytest

from qcreport.canonical import sha256_hex
from qcreport.durable import write_durably
from qcreport.errors import ExportRefusedError
from qcreport.intake.claim import Claims
from qcreport.intake.exports import ClaimedExport
from qcreport.measurements import CellRef, Measurement, MeasurementSet
from qcreport.records.check import check
from qcreport.records.facade import Reading, Records
from qcreport.records.run import RunInputs
from qcreport.service.bookkeeping import record_event
from qcreport.service.model import Event, Outcome, OutcomeKind

from .world import World

SETTINGS = (b"plan", b"layout", b"rules", b"page")
ANSWERED = {
    "work.begun",
    "archive.store",
    "records.receive",
    "records.read",
    "records.reserve",
    "records.compared",
    "publish",
    "records.sealed",
    "tell",
    "claim.finish",
}


class Killed(BaseException):
    """The process ends here."""


class Process:
    """One process of the service: the real records and claims, a stand-in for reading and rendering."""

    def __init__(self, world: World, kill_at: int | None) -> None:
        self.world = world
        self.left = kill_at
        self.names: set[str] = set()
        self.reports = world.root / "reports"
        self.reports.mkdir(exist_ok=True)
        self.records = Records.open(
            world.root / "records", lambda: dt.datetime(2026, 11, 2, 12, 0, 0, tzinfo=dt.UTC)
        )

    def before(self, name: str) -> None:
        self.names.add(name)
        if self.left is not None:
            self.left -= 1
            if self.left < 0:
                raise Killed

    def answer(self, export: ClaimedExport) -> Outcome:
        """Do what the pipeline does, in its order."""
        assert export.data is not None
        assert export.sha256 is not None
        records, claim, digest = self.records, export.claim.id, export.sha256
        self.before("work.begun")
        for data in (export.data, *SETTINGS):
            self.before("archive.store")
            records.archive.store(data)
        self.before("records.receive")
        records.receive(claim, export_sha256=digest, name=export.name, size=export.size, actor="service")
        if export.data == b"bad":
            raise ExportRefusedError(
                "error_cells", file=export.name, where="A1", found="#N/A", expected="1", next_step="mend"
            )
        measurements = _measurements(digest)
        self.before("records.read")
        reading = Reading(
            plan_name="shear",
            layout_name="rig",
            layout_sha256=sha256_hex(b"layout"),
            n_measurements=1,
            notices=(),
            survey=records.survey(measurements),
        )
        records.read(claim, export_sha256=digest, name=export.name, reading=reading, actor="service")
        self.before("records.reserve")
        reservation = records.reserve(
            RunInputs(
                export_sha256=digest,
                plan_sha256=sha256_hex(b"plan"),
                layout_sha256=sha256_hex(b"layout"),
                rules_sha256=sha256_hex(b"rules"),
                templates=(("page.html", sha256_hex(b"page")),),
            ),
            export_name=export.name,
            plan_name="shear",
            year=2026,
            build_context=lambda slot: f"{slot.number} {slot.ledger_head.entry_hash}".encode(),
        )
        if reservation.already is not None:
            records.duplicate(
                claim, export_sha256=digest, name=export.name, run=reservation.run, actor="service"
            )
            return Outcome(kind=OutcomeKind.RECORDED, text="answered before")
        self.before("records.compared")
        records.compared(
            claim, number=reservation.number, result=b"{}", answers=(("a", "different"),), actor="service"
        )
        report = b"%PDF " + reservation.context
        name = f"{reservation.number}.pdf"
        self.before("publish")
        write_durably(self.reports / name, report)
        self.before("records.sealed")
        records.sealed(
            claim,
            number=reservation.number,
            report_name=name,
            report_sha256=sha256_hex(report),
            measurements=measurements,
            actor="service",
        )
        return Outcome(kind=OutcomeKind.REPORTED, text=name)

    def tell(self, event: Event) -> None:
        if event.claim is not None:
            self.before("tell")
        record_event(self.records, event)

    def run(self) -> None:
        self.world.process = self.answer
        self.world.tell = self.tell  # type: ignore[method-assign]
        self.world.run(once=True)


def _measurements(digest: str) -> MeasurementSet:
    value = Measurement(
        characteristic="a",
        batch="B",
        line=None,
        sample="1",
        reading=None,
        value=1.0,
        text="1",
        decimals=0,
        unit="",
        censored=None,
        status=None,
        time=None,
        cell=CellRef(sheet="S", row=1, column=1),
    )
    return MeasurementSet(
        export_name="a.xlsx", export_sha256=digest, layout_name="rig", measurements=(value,)
    )


@pytest.fixture
def killing_finish(monkeypatch: pytest.MonkeyPatch) -> list[Process]:
    """Let the removal of a claim count as an effect of the process at hand."""
    real: Callable[..., object] = Claims.finish
    current: list[Process] = []

    def finish(self: Claims, claim: object) -> object:
        current[-1].before("claim.finish")
        return real(self, claim)

    monkeypatch.setattr(Claims, "finish", finish)
    return current


def killed_once(root: Path, data: bytes, step: int, current: list[Process]) -> tuple[Process, bool]:
    """Drop an export, kill the first process before its step-th effect, let a second one end the work."""
    world = World(root)
    world.drop("a.xlsx", data)
    current.append(Process(world, step))
    killed = False
    try:
        current[-1].run()
    except Killed:
        killed = True
    current.append(Process(World(root), None))
    current[-1].run()
    return current[-1], killed


@pytest.mark.parametrize("step", range(14))
def test_an_answered_export(tmp_path: Path, killing_finish: list[Process], step: int) -> None:
    process, killed = killed_once(tmp_path, b"data", step, killing_finish)
    assert killed
    kinds = Counter(entry.kind for entry in process.records.entries())
    assert {kind: n for kind, n in kinds.items() if not kind.startswith("service")} == {
        "received": 1,
        "read": 1,
        "compared": 1,
        "sealed": 1,
    }
    assert [row.number for row in process.records.reports()] == ["2026-0001"]
    assert check(process.records, process.reports).problems == ()
    assert list((tmp_path / "work/claims").iterdir()) == []
    assert list((tmp_path / "inbox").iterdir()) == []
    assert len(list(process.reports.iterdir())) == 1


def test_the_steps_above_are_all_there_are(tmp_path: Path, killing_finish: list[Process]) -> None:
    process, killed = killed_once(tmp_path, b"data", 14, killing_finish)
    assert not killed
    assert killing_finish[0].names == ANSWERED
    assert process.names == set()


@pytest.mark.parametrize("step", range(9))
def test_a_refused_export(tmp_path: Path, killing_finish: list[Process], step: int) -> None:
    process, killed = killed_once(tmp_path, b"bad", step, killing_finish)
    assert killed
    kinds = Counter(entry.kind for entry in process.records.entries())
    assert {kind: n for kind, n in kinds.items() if not kind.startswith("service")} == {
        "received": 1,
        "refused": 1,
    }
    (folder,) = (tmp_path / "refused").iterdir()
    assert sorted(path.name for path in folder.iterdir()) == ["a.xlsx", "why.txt"]
    assert list((tmp_path / "work/claims").iterdir()) == []
    assert list((tmp_path / "inbox").iterdir()) == []
