"""The records of one site, as the stages that handle an export use them.

Order for one export: `archive.store` the bytes, `receive`, `read`, `reserve`, `compared`, then render, seal
and publish, then `sealed`. Each call is one transaction with its ledger entry, and each may be repeated after
a kill: a step of one claim is written once.
"""

from __future__ import annotations

from collections.abc import Callable
from contextlib import AbstractContextManager
from pathlib import Path

from sqlalchemy import Connection, insert, select

from qcreport.analysis.provenance import OtherRun
from qcreport.canonical import sha256_hex
from qcreport.durable import make_folder
from qcreport.errors import ExportRefusedError, LedgerError
from qcreport.measurements import MeasurementSet
from qcreport.records import ledger, listing, runs, same_data, store
from qcreport.records.archive import Archive
from qcreport.records.chain import Entry, Kind
from qcreport.records.database import Database
from qcreport.records.decisions import Decisions, changes_facts
from qcreport.records.facts import Facts, clean_text
from qcreport.records.imports import Imports
from qcreport.records.ledger import Step
from qcreport.records.lock import exclusive
from qcreport.records.moments import Clock
from qcreport.records.reading import Reading, Receipt
from qcreport.records.run import Answers, Reservation, Run, RunInputs, Slot, run_key
from qcreport.records.same_data import note_content
from qcreport.records.signatures import Signatures
from qcreport.records.store import Survey
from qcreport.records.tables import EXPORT, REFUSAL, TRIAL

__all__ = ["Reading", "Receipt", "Records"]


class Records(Decisions, Imports, Signatures):
    """Archive, ledger, numbers and measurements of one site."""

    @classmethod
    def open(cls, folder: Path, clock: Clock, *, archive_folder: Path | None = None) -> Records:
        """Open the records in `folder` (a site's `records/`), making what is missing.

        Parameters
        ----------
        folder : Path
            Holds `records.sqlite3`; must be on a local disk.
        clock : callable
            Returns the aware current time.
        archive_folder : Path, optional
            Where originals are kept; `archive/` beside `folder` where not given.
        """
        database = Database.open(folder, clock)
        root = folder.parent / "archive" if archive_folder is None else archive_folder
        make_folder(root)
        return cls(database=database, archive=Archive(root), clock=clock)

    def receive(self, claim: str, *, export_sha256: str, name: str, size: int, actor: str) -> Receipt:
        """Record that an export came in; its bytes must be in the archive by now.

        Raises
        ------
        LedgerError
            Where the archive does not have them.
        """
        self._require_archived(export_sha256)
        with self._moment() as (connection, now):
            facts = {"claim": claim, "name": name, "export_sha256": export_sha256, "size": size}
            self._append(connection, now, Kind.RECEIVED, facts, actor, Step(claim=claim))
            query = select(EXPORT).where(EXPORT.c.sha256 == export_sha256)
            if connection.execute(query).first() is None:
                row = {"sha256": export_sha256, "name": clean_text(name), "size": size, "received_at": now}
                connection.execute(insert(EXPORT).values(row))
            export = connection.execute(query).one()
            return Receipt(
                received_at=export.received_at,
                first_name=export.name,
                runs=runs.of_export(connection, export_sha256),
            )

    def duplicate(
        self,
        claim: str,
        *,
        export_sha256: str,
        name: str,
        run: Run,
        actor: str,
        same_measurements: bool = False,
    ) -> Entry:
        """Record that an export was answered before and nothing new is written.

        Where it was this very claim that sealed the run, and only its end was lost in a kill, that entry is
        returned: an export does not become its own duplicate.
        """
        with self.database.read() as connection:
            own = ledger.entry_of(connection, Kind.SEALED, Step(claim=claim, subject=run.number))
        if own is not None:
            return own
        facts: dict[str, object] = {"claim": claim, "name": name, "export_sha256": export_sha256}
        facts |= {"plan": run.plan_name, "number": run.number}
        if same_measurements:  # other bytes, nothing else: the workbook was saved anew
            facts["same_measurements"] = True
        return self.note(Kind.DUPLICATE, facts, actor=actor, step=Step(claim=claim, subject=run.number))

    def refuse(
        self,
        claim: str,
        error: ExportRefusedError,
        *,
        export_sha256: str | None,
        folder: str,
        actor: str,
        plan_name: str = "",
    ) -> Entry:
        """Record that an export was refused and where it was put.

        `export_sha256` is None for a file too large to be read; `plan_name` is empty where no plan was asked.
        """
        with self._moment() as (connection, now):
            facts = {"claim": claim, "name": error.file or "", "export_sha256": export_sha256}
            facts |= {"plan": plan_name, "code": error.code, "text": error.text, "folder": folder}
            step = Step(claim=claim, subject=plan_name)
            before = ledger.head(connection)
            entry = self._append(connection, now, Kind.REFUSED, facts, actor, step)
            if entry.sequence > before.sequence:
                row = {"sequence": entry.sequence, "export_sha256": export_sha256, "refused_at": now}
                row |= {"name": clean_text(error.file or ""), "plan": clean_text(plan_name)}
                row |= {"code": error.code, "text": clean_text(error.text), "folder": clean_text(folder)}
                connection.execute(insert(REFUSAL).values(row))
            return entry

    def read(self, claim: str, *, export_sha256: str, name: str, reading: Reading, actor: str) -> Entry:
        """Record that an export was read by a plan's layout."""
        facts: dict[str, object] = {"claim": claim, "name": name, "export_sha256": export_sha256}
        facts |= {"plan": reading.plan_name, "layout": reading.layout_name}
        facts |= {"layout_sha256": reading.layout_sha256, "measurements": reading.n_measurements}
        facts |= {"notices": reading.notices, "new": reading.survey.new, "known": reading.survey.known}
        facts |= {"changed": len(reading.survey.changed)}
        facts |= {"retests": len(reading.survey.retests), "not_joined": reading.survey.not_joined}
        with self._moment() as (connection, now):
            note_content(connection, export_sha256, reading.layout_sha256, reading.content)
            step = Step(claim=claim, subject=reading.plan_name)
            return self._append(connection, now, Kind.READ, facts, actor, step)

    def reserve(
        self,
        inputs: RunInputs,
        *,
        export_name: str,
        plan_name: str,
        year: int,
        build_context: Callable[[Slot], bytes],
        reason: str = "",
    ) -> Reservation:
        """Hold one number for one run key; the same key again gets the same number and context.

        `build_context` is called once a key, inside the transaction; where it fails no number is used up. The
        context it returns, with its time and ledger head, is kept: a run taken up again after a kill is
        rendered from the same context and so says the same. No ledger entry is written, since the number
        stands in the entry of `compared`.

        Raises
        ------
        LedgerError
            Where an input is not in the archive, or the export was not received.
        """
        for digest in inputs.digests():
            self._require_archived(digest)
        key = run_key(inputs)
        with self._moment() as (connection, now):
            run = runs.by_key(connection, key)
            if run is None:
                serial, slot = self._slot(connection, inputs.export_sha256, plan_name, year, now)
                context = build_context(slot)
                self.archive.store(context)
                runs.insert_reserved(
                    connection,
                    inputs=inputs,
                    export_name=export_name,
                    plan_name=plan_name,
                    reason=reason,
                    year=year,
                    serial=serial,
                    number=slot.number,
                    k=slot.k,
                    made_at=now,
                    ledger_head=slot.ledger_head,
                    context_sha256=sha256_hex(context),
                )
                run = _required(connection, slot.number)
        return Reservation(run=run, context=self.archive.read(run.context_sha256))

    def compared(
        self,
        claim: str,
        *,
        number: str,
        result: bytes,
        answers: Answers,
        actor: str,
        others: tuple[OtherRun, ...] = (),
    ) -> Entry:
        """Record what a run found and what it changed against others; `result.json` goes into the archive."""
        self.archive.store(result)
        result_sha256 = sha256_hex(result)
        with self._moment() as (connection, now):
            run = _required(connection, number)
            facts = {**_run_facts(run), "claim": claim, "result_sha256": result_sha256, "answers": answers}
            facts["others"] = [
                {"number": o.number, "k": o.k, "changes": changes_facts(o.changes)} for o in others
            ]
            step = Step(claim=claim, subject=f"{number} {result_sha256}")
            entry = self._append(connection, now, Kind.COMPARED, facts, actor, step)
            if run.sealing is None:
                runs.set_compared(connection, number, result_sha256=result_sha256, answers=answers)
            return entry

    def computed_only(
        self, claim: str, inputs: RunInputs, *, plan_name: str, facts: Facts, actor: str
    ) -> Entry:
        """Record a computation without a report: it uses no number; other runs tell of it."""
        with self._moment() as (connection, now):
            before = ledger.head(connection)
            step = Step(claim=claim, subject=plan_name)
            entry = self._append(connection, now, Kind.COMPARED, facts, actor, step)
            if entry.sequence > before.sequence:
                row = {"sequence": entry.sequence, "export_sha256": inputs.export_sha256}
                row |= {"plan_name": clean_text(plan_name), "run_key": run_key(inputs)}
                connection.execute(insert(TRIAL).values(row))
            return entry

    def sealed(
        self,
        claim: str,
        *,
        number: str,
        report_name: str,
        report_sha256: str,
        measurements: MeasurementSet,
        actor: str,
    ) -> Survey:
        """Record that a report is sealed and published, with its measurements in the same transaction.

        Raises
        ------
        LedgerError
            Where the number is unknown, not yet compared, or sealed with another report.
        """
        with self._moment() as (connection, now):
            run = _required(connection, number)
            if run.sealing is not None and run.sealing.report_sha256 == report_sha256:
                return store.survey(connection, measurements)
            if run.sealing is not None:
                raise LedgerError(f"{number} is sealed already, with another report; nothing was recorded.")
            if run.result_sha256 is None:
                raise LedgerError(f"{number} was not compared yet, so no report of it can be sealed.")
            found = store.record(connection, measurements, number=number, at=now)
            runs.set_sealed(
                connection, number, report_name=report_name, report_sha256=report_sha256, sealed_at=now
            )
            facts = {**_run_facts(run), "claim": claim, "result_sha256": run.result_sha256}
            facts |= {"report_name": report_name, "report_sha256": report_sha256, "answers": run.answers}
            facts |= {"new": found.new, "known": found.known, "changed": len(found.changed)}
            facts |= {"measurements_sha256": store.digest_of_run(connection, number)}
            listing.note_groups(connection, number, measurements)
            self._append(connection, now, Kind.SEALED, facts, actor, Step(claim=claim, subject=number))
            if run.inputs.replaces:
                facts = {"number": run.inputs.replaces, "replaced_by": number, "reason": run.reason}
                self._append(connection, now, Kind.REPLACED, facts, actor, Step(claim=claim, subject=number))
            return found

    def issuing(
        self, key: str, *, tries: int = 1, pause: Callable[[], None] = lambda: None
    ) -> AbstractContextManager[None]:
        """Hold a run key from `reserve` to `sealed`, so that two processes never publish one number twice.

        Raises
        ------
        EnvironmentFailedError
            On entering, where another process still has it after `tries`.
        """
        folder = self.database.path.parent / "locks"
        make_folder(folder)
        busy = "Another process is answering this export at the moment. Try again when it is done."
        return exclusive(folder / f"{key[:2]}.lock", busy=busy, tries=tries, pause=pause)

    def _slot(
        self, connection: Connection, export_sha256: str, plan_name: str, year: int, now: str
    ) -> tuple[int, Slot]:
        query = select(EXPORT.c.received_at).where(EXPORT.c.sha256 == export_sha256)
        received_at = connection.execute(query).scalar_one_or_none()
        if received_at is None:
            raise LedgerError("A number is reserved only for an export that was received.")
        serial, number = runs.next_number(connection, year)
        k = same_data.next_k(connection, export_sha256, plan_name)
        head = ledger.head(connection)
        return serial, Slot(number=number, k=k, n=k, made_at=now, received_at=received_at, ledger_head=head)


def _required(connection: Connection, number: str) -> Run:
    run = runs.by_number(connection, number)
    if run is None:
        raise LedgerError(f"There is no run {number} in the records.")
    return run


def _run_facts(run: Run) -> dict[str, object]:
    return {
        "number": run.number,
        "run_key": run.key,
        "inputs": run.inputs.to_json(),
        "name": run.export_name,
        "export_sha256": run.inputs.export_sha256,
        "plan": run.plan_name,
        "k": run.k,
        "reason": run.reason,
        "context_sha256": run.context_sha256,
    }
