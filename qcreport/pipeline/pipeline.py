"""One export through all stages, in an order that is safe to repeat after a kill at any instant.

archive → ledger (received, read) → number reserved with its context → computed and rendered in a worker →
ledger (compared) → sealed → published → ledger (sealed, with the measurements).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from datetime import datetime

from qcreport.analysis import require_answerable
from qcreport.analysis.left_out import without_cells
from qcreport.canonical import sha256_hex
from qcreport.errors import ExportRefusedError, LedgerError
from qcreport.measurements import MeasurementSet
from qcreport.pipeline.checkpoint import sign_head
from qcreport.pipeline.context import Moment
from qcreport.pipeline.history import spread_history
from qcreport.pipeline.issue import Issuer, Progress
from qcreport.pipeline.outcome import Outcome, Received, Reported
from qcreport.pipeline.provenance import gather
from qcreport.pipeline.templates import lab_templates
from qcreport.pipeline.wish import PLAIN_WISH, Wish, cells_to_leave_out
from qcreport.pipeline.workers import Workers
from qcreport.records.facade import Reading, Records
from qcreport.records.identity import content_digest
from qcreport.records.run import Run, RunInputs, run_key
from qcreport.records.store import Survey
from qcreport.report.templates import TemplateSet
from qcreport.settings.files import settings_files
from qcreport.settings.plans import PlanSettings
from qcreport.settings.site import Site
from qcreport.signing.keys import SigningKey
from qcreport.workbook.read_in_child import read_in_child


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
        self._templates = templates
        self._key = key
        self._clock = clock
        self._progress = progress
        self._issuer = Issuer(
            site=site,
            records=records,
            workers=workers,
            templates=templates,
            key=key,
            clock=clock,
            progress=progress,
        )

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

    def answer(self, received: Received, settings: PlanSettings, wish: Wish = PLAIN_WISH) -> Outcome:
        """Compare a received export by one plan and issue its report.

        Raises
        ------
        ExportRefusedError
            Where the export cannot be read or compared by this plan, or was read before under other settings
            and no reason is given for another run.
        UsageError
            Where what is wished for cannot be done: a cell without a value, a report that is none.
        """
        wish.require_reason()
        self.watch_settings(received.actor)
        inputs = self._inputs(received, settings, wish)
        if not wish.leave_out and (run := self._sealed_run(inputs)) is not None:
            return self._earlier(received, run)
        self._require_reason(received, settings, inputs, wish)
        self._progress("reading")
        measurements, survey = self._read(received, settings)
        if wish.leave_out:
            inputs = self._leave_out(received, settings, inputs, measurements, wish)
            if (run := self._sealed_run(inputs)) is not None:
                return self._earlier(received, run)
        elif (run := self._saved_anew(inputs, settings)) is not None:
            return self._earlier(received, run, same_measurements=True)
        others = self._require_reason(received, settings, inputs, wish)
        moment = Moment(
            site=self._site,
            settings=settings,
            templates=self._templates,
            inputs=inputs,
            export_name=received.name,
            reason=wish.reason.strip(),
            key=self._key,
            history=spread_history(self._records, measurements, settings.plan),
            provenance=gather(
                self._records,
                settings,
                inputs=inputs,
                others=others,
                measurements=measurements,
                survey=survey,
                wish=wish,
                actor=received.actor,
                limits=self._site.limits,
            ),
        )
        if not wish.report:
            return self._issuer.compute_only(received, moment, measurements)
        with self._records.issuing(run_key(inputs)):
            outcome = self._issuer.issue(received, moment, measurements)
        return self._earlier(received, outcome) if isinstance(outcome, Run) else outcome

    def watch_settings(self, actor: str) -> None:
        """Record what changed in the settings since they were seen last."""
        self._records.settings_seen(settings_files(self._site), actor=actor)

    def checkpoint(self) -> None:
        """Sign the ledger's head, where a key is loaded and anything was written since the last time."""
        sign_head(self._records, self._key, at=self._clock())

    # -- before a number is reserved ------------------------------------------------------------------

    def _inputs(self, received: Received, settings: PlanSettings, wish: Wish) -> RunInputs:
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
            replaces=wish.replaces,
        )

    def _sealed_run(self, inputs: RunInputs) -> Run | None:
        run = self._records.run_of_key(run_key(inputs))
        return run if run is not None and run.sealing is not None else None

    def _require_reason(
        self, received: Received, settings: PlanSettings, inputs: RunInputs, wish: Wish
    ) -> list[Run]:
        """Return the other runs over the same data; where one has a report, this one must be explained."""
        found = self._records.runs_over_data(received.sha256, settings.plan.name)
        others = [r for r in found if r.inputs != inputs]
        sealed = [r for r in others if r.sealing is not None]
        if sealed and not wish.reason.strip():
            raise _needs_reason(received, settings, sealed[-1])
        return others

    def _leave_out(
        self,
        received: Received,
        settings: PlanSettings,
        inputs: RunInputs,
        measurements: MeasurementSet,
        wish: Wish,
    ) -> RunInputs:
        """Return the inputs without the values that a person leaves out, once that is recorded."""
        values = cells_to_leave_out(wish.leave_out, measurements, settings.plan)
        inputs = replace(inputs, left_out=tuple(cell for cell, _ in values))
        require_answerable(without_cells(measurements, inputs.left_out), settings.plan)
        self._records.leave_out(
            received.claim,
            run_key=run_key(inputs),
            values=values,
            reason=wish.reason.strip(),
            actor=received.actor,
        )
        return inputs

    def _saved_anew(self, inputs: RunInputs, settings: PlanSettings) -> Run | None:
        """Return the report over other bytes that hold the same measurements under the same settings."""
        content = self._records.content_of(inputs.export_sha256, inputs.layout_sha256)
        if content is None or inputs.replaces:
            return None
        for run in self._records.runs_over_data(inputs.export_sha256, settings.plan.name):
            same = replace(run.inputs, export_sha256=inputs.export_sha256) == inputs
            held = self._records.content_of(run.inputs.export_sha256, run.inputs.layout_sha256)
            if same and held == content and run.sealing is not None:
                return run
        return None

    def _earlier(self, received: Received, run: Run, *, same_measurements: bool = False) -> Reported:
        """Return the report that answers this run key already; nothing new is written but the duplicate."""
        if run.sealing is None:
            raise LedgerError(f"{run.number} has no report.")
        sealing, standing = run.sealing, self._records.standings().get(run.number)
        self._records.duplicate(
            received.claim,
            export_sha256=received.sha256,
            name=received.name,
            run=run,
            actor=received.actor,
            same_measurements=same_measurements,
        )
        return Reported(
            plan_name=run.plan_name,
            number=run.number,
            path=self._site.folders.reports / sealing.report_name,
            result=self._records.archive.read(sealing.result_sha256),
            answers=run.answers,
            new=False,
            pages=0,
            same_measurements=same_measurements,
            since="" if standing is None else standing.words(),
        )

    def _read(self, received: Received, settings: PlanSettings) -> tuple[MeasurementSet, Survey]:
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
            content=content_digest(measurements),
        )
        self._records.read(
            received.claim,
            export_sha256=received.sha256,
            name=received.name,
            reading=reading,
            actor=received.actor,
        )
        return measurements, reading.survey


def _needs_reason(received: Received, settings: PlanSettings, run: Run) -> ExportRefusedError:
    return ExportRefusedError(
        "already_read",
        file=received.name,
        where=f"plan {settings.plan.name}",
        found=f"This export was compared before, as {run.number}, and plan, layout, rules or templates have "
        "changed since.",
        expected="A reason for comparing the same export again: every run must be explained.",
        next_step="Run with the file kept beside this note: qcreport compare FILE "
        f'--plan {settings.plan.name} --reason "…" --site SITE',
    )
