"""One export through all stages, in an order that is safe to repeat after a kill at any instant.

archive → ledger (received, read) → number reserved with its context → computed and rendered in a worker →
ledger (compared) → sealed → published → ledger (sealed, with the measurements).
"""

from __future__ import annotations

from collections.abc import Callable
from datetime import datetime
from pathlib import Path
from zoneinfo import ZoneInfo

from qcreport.analysis import require_answerable
from qcreport.canonical import sha256_hex, to_readable_json_bytes
from qcreport.errors import EnvironmentFailedError, ExportRefusedError
from qcreport.issuing.publish import already_published, publish, report_name
from qcreport.measurements import MeasurementSet
from qcreport.pipeline.check_seal import SealToCheck, check_seal
from qcreport.pipeline.compute import compute
from qcreport.pipeline.context import Moment, build_context
from qcreport.pipeline.job import Done, Job
from qcreport.pipeline.outcome import ComputedOnly, Outcome, Received, Reported
from qcreport.pipeline.templates import lab_templates
from qcreport.pipeline.workers import Workers
from qcreport.records.chain import Kind
from qcreport.records.facade import Reading, Records
from qcreport.records.run import Reservation, Run, RunInputs, Sealing, Slot, run_key
from qcreport.report.templates import TemplateSet
from qcreport.settings.plans import PlanSettings
from qcreport.settings.site import Site
from qcreport.signing.keys import SigningKey
from qcreport.signing.seal import seal
from qcreport.workbook.read_in_child import read_in_child

SEAL_REASON = "Sealed by the laboratory's service: origin and integrity, no review and no release"

Progress = Callable[[str], None]


class Pipeline:
    """Everything of one site that answering an export needs."""

    def __init__(
        self,
        *,
        site: Site,
        records: Records,
        workers: Workers,
        templates: TemplateSet,
        key: SigningKey | None,
        clock: Callable[[], datetime],
        progress: Progress = lambda _: None,
    ) -> None:
        self._site = site
        self._records = records
        self._workers = workers
        self._templates = templates
        self._key = key
        self._clock = clock
        self._progress = progress

    def receive(self, received: Received) -> None:
        """Archive the bytes and record that they came in."""
        self._records.archive.store(received.data)
        self._records.receive(
            received.claim,
            export_sha256=received.sha256,
            name=received.name,
            size=len(received.data),
            actor=received.actor,
        )

    def answer(
        self, received: Received, settings: PlanSettings, *, reason: str = "", report: bool = True
    ) -> Outcome:
        """Compare a received export by one plan and issue its report.

        Raises
        ------
        ExportRefusedError
            Where the export cannot be read or compared by this plan, or was read before under other settings
            and no reason is given for another run.
        """
        inputs = self._inputs(received, settings)
        earlier = self._records.run_of_key(run_key(inputs))
        if earlier is not None and earlier.sealing is not None:
            return self._earlier(received, earlier, earlier.sealing)
        others = self._others(received, settings, inputs)
        if others and not reason:
            raise _needs_reason(received, settings, others[-1])
        self._progress("reading")
        measurements = self._read(received, settings)
        moment = Moment(
            site=self._site,
            settings=settings,
            templates=self._templates,
            inputs=inputs,
            export_name=received.name,
            reason=reason,
            key=self._key,
        )
        if not report:
            return self._compute_only(received, moment, measurements, run_number=len(others) + 1)
        with self._records.issuing(run_key(inputs)):
            return self._issue(received, moment, measurements)

    # -- before a number is reserved ------------------------------------------------------------------

    def _inputs(self, received: Received, settings: PlanSettings) -> RunInputs:
        """Archive the settings and return the digests of everything that decides the report."""
        for file in (settings.plan_file, settings.layout_file, settings.rules_file):
            self._records.archive.store(file.data)
        lab_files = lab_templates(self._templates)
        for _, data in lab_files:
            self._records.archive.store(data)
        return RunInputs(
            export_sha256=received.sha256,
            plan_sha256=sha256_hex(settings.plan_file.data),
            layout_sha256=sha256_hex(settings.layout_file.data),
            rules_sha256=sha256_hex(settings.rules_file.data),
            templates=tuple((name, sha256_hex(data)) for name, data in lab_files),
        )

    def _others(self, received: Received, settings: PlanSettings, inputs: RunInputs) -> list[Run]:
        """Return the reports of the same export by the same plan under other settings."""
        runs = self._records.runs_of_export(received.sha256, settings.plan.name)
        return [r for r in runs if r.inputs != inputs and r.sealing is not None]

    def _earlier(self, received: Received, run: Run, sealing: Sealing) -> Reported:
        """Return the report that answers this run key already; nothing new is written but the duplicate."""
        self._records.duplicate(
            received.claim, export_sha256=received.sha256, name=received.name, run=run, actor=received.actor
        )
        return Reported(
            plan_name=run.plan_name,
            number=run.number,
            path=self._site.folders.reports / sealing.report_name,
            result=self._records.archive.read(sealing.result_sha256),
            answers=run.answers,
            new=False,
            pages=0,
        )

    def _read(self, received: Received, settings: PlanSettings) -> MeasurementSet:
        """Read the export in a child, ask whether the plan can be answered, and record the reading."""
        measurements = read_in_child(
            received.data,
            name=received.name,
            layout_bytes=settings.layout_file.data,
            layout_file=settings.layout_file.name,
            limits=self._site.limits,
            second_look=self._site.intake.second_look,
        )
        require_answerable(measurements, settings.plan)
        reading = Reading(
            plan_name=settings.plan.name,
            layout_name=settings.layout.name,
            layout_sha256=sha256_hex(settings.layout_file.data),
            n_measurements=len(measurements.measurements),
            notices=tuple(dict.fromkeys(n.code for n in measurements.notices)),
            survey=self._records.survey(measurements),
        )
        self._records.read(
            received.claim,
            export_sha256=received.sha256,
            name=received.name,
            reading=reading,
            actor=received.actor,
        )
        return measurements

    # -- computing, sealing, publishing ---------------------------------------------------------------

    def _compute_only(
        self, received: Received, moment: Moment, measurements: MeasurementSet, *, run_number: int
    ) -> ComputedOnly:
        """Compute without a report: no number is used; the ledger keeps the digest of what was found."""
        slot = Slot(
            number="",
            k=run_number,
            n=run_number,
            made_at="",
            received_at="",
            ledger_head=self._records.head(),
        )
        context = to_readable_json_bytes(build_context(moment, slot).to_json())
        done = self._work(received, moment, measurements, context, render=False)
        self._records.archive.store(done.result)
        facts = {
            "claim": received.claim,
            "export_sha256": received.sha256,
            "plan": moment.settings.plan.name,
            "result_sha256": sha256_hex(done.result),
            "answers": done.answers,
            "report": "none asked for",
        }
        self._records.note(Kind.COMPARED, facts, actor=received.actor)
        return ComputedOnly(plan_name=moment.settings.plan.name, result=done.result, answers=done.answers)

    def _issue(self, received: Received, moment: Moment, measurements: MeasurementSet) -> Reported:
        reservation = self._reserve(moment)
        if reservation.already is not None:
            return self._earlier(received, reservation.run, reservation.already)
        self._progress(f"computing and rendering {reservation.number}")
        done = self._work(received, moment, measurements, reservation.context, render=True)
        self._records.compared(
            received.claim,
            number=reservation.number,
            result=done.result,
            answers=done.answers,
            actor=received.actor,
        )
        self._progress(f"sealing {reservation.number}")
        path, report = self._publish(reservation, done, received.name)
        self._records.sealed(
            received.claim,
            number=reservation.number,
            report_name=path.name,
            report_sha256=sha256_hex(report),
            measurements=measurements,
            actor=received.actor,
        )
        return Reported(
            plan_name=moment.settings.plan.name,
            number=reservation.number,
            path=path,
            result=done.result,
            answers=done.answers,
            new=True,
            pages=done.pages,
        )

    def _reserve(self, moment: Moment) -> Reservation:
        year = self._clock().astimezone(ZoneInfo(self._site.time_zone)).year

        def context(slot: Slot) -> bytes:
            return to_readable_json_bytes(build_context(moment, slot).to_json())

        return self._records.reserve(
            moment.inputs,
            export_name=moment.export_name,
            plan_name=moment.settings.plan.name,
            year=year,
            build_context=context,
            reason=moment.reason,
        )

    def _work(
        self,
        received: Received,
        moment: Moment,
        measurements: MeasurementSet,
        context: bytes,
        *,
        render: bool,
    ) -> Done:
        job = Job(
            measurements=measurements,
            export=received.data,
            plan=moment.settings.plan_file,
            layout=moment.settings.layout_file,
            rules=moment.settings.rules_file,
            context=context,
            templates=lab_templates(self._templates),
            render=render,
        )
        return self._workers.run(compute, job)

    def _publish(self, reservation: Reservation, done: Done, export_name: str) -> tuple[Path, bytes]:
        """Seal and publish, or take up what an interrupted try of the same run published."""
        folder = self._site.folders.reports
        name = report_name(reservation.number, export_name)
        found = already_published(folder, name, dict(done.attachments))
        if found is not None:
            return folder / name, found
        if self._key is None:
            raise EnvironmentFailedError("No key is loaded, so nothing can be sealed.")
        report = seal(
            done.pdf,
            self._key,
            at=self._clock(),
            reason=SEAL_REASON,
            location=self._site.seal.location,
        )
        self._workers.run(check_seal, SealToCheck(report, self._key.certificate_pem(), self._clock()))
        return publish(folder, name, report), report


def _needs_reason(received: Received, settings: PlanSettings, run: Run) -> ExportRefusedError:
    return ExportRefusedError(
        "already_read",
        file=received.name,
        where=f"plan {settings.plan.name}",
        found=f"This export was compared before, as {run.number}, and plan, layout, rules or templates have "
        "changed since.",
        expected="A reason for comparing the same export again: every run must be explained.",
        next_step=f'Run: qcreport compare {received.name} --plan {settings.plan.name} --reason "…"',
    )
