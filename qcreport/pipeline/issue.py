"""One report made: number reserved, computed and rendered, sealed, published, recorded."""

from __future__ import annotations

import json
from collections.abc import Callable
from datetime import datetime
from pathlib import Path
from zoneinfo import ZoneInfo

from qcreport.analysis import context_from_json
from qcreport.analysis.provenance import OtherRun
from qcreport.canonical import sha256_hex, to_readable_json_bytes
from qcreport.errors import EnvironmentFailedError
from qcreport.issuing.publish import already_published, publish, report_name
from qcreport.measurements import MeasurementSet
from qcreport.pipeline.check_seal import SealToCheck, check_seal
from qcreport.pipeline.checkpoint import sign_head
from qcreport.pipeline.compute import compute
from qcreport.pipeline.context import Moment, build_context
from qcreport.pipeline.job import Done, Job
from qcreport.pipeline.outcome import ComputedOnly, Received, Reported
from qcreport.pipeline.templates import lab_templates
from qcreport.pipeline.workers import Workers
from qcreport.records.facade import Records
from qcreport.records.run import Reservation, Run, Slot
from qcreport.report.templates import TemplateSet
from qcreport.settings.site import Site
from qcreport.signing.keys import SigningKey
from qcreport.signing.seal import seal

SEAL_REASON = "Sealed by the laboratory's service: origin and integrity, no review and no release"

Progress = Callable[[str], None]


class Issuer:
    """Makes reports of one site."""

    def __init__(
        self,
        *,
        site: Site,
        records: Records,
        workers: Workers,
        templates: TemplateSet,
        key: SigningKey | None,
        clock: Callable[[], datetime],
        progress: Progress,
    ) -> None:
        self._site = site
        self._records = records
        self._workers = workers
        self._templates = templates
        self._key = key
        self._clock = clock
        self._progress = progress

    def compute_only(self, received: Received, moment: Moment, measurements: MeasurementSet) -> ComputedOnly:
        """Compute without a report: no number is used; the ledger keeps the digest of what was found."""
        k = max((other.k for other in moment.provenance.others), default=0) + 1
        slot = Slot(number="", k=k, n=k, made_at="", received_at="", ledger_head=self._records.head())
        context = to_readable_json_bytes(build_context(moment, slot).to_json())
        done = self._work(received, moment, measurements, context, render=False)
        for data in (context, done.result):
            self._records.archive.store(data)
        plan_name = moment.settings.plan.name
        facts = {
            "claim": received.claim,
            "export_sha256": received.sha256,
            "plan": plan_name,
            "inputs": moment.inputs.to_json(),
            "context_sha256": sha256_hex(context),
            "result_sha256": sha256_hex(done.result),
            "answers": done.answers,
            "report": "none asked for",
        }
        self._records.computed_only(
            received.claim, moment.inputs, plan_name=plan_name, facts=facts, actor=received.actor
        )
        return ComputedOnly(plan_name=plan_name, result=done.result, answers=done.answers)

    def issue(self, received: Received, moment: Moment, measurements: MeasurementSet) -> Reported | Run:
        """Reserve, compute, seal, publish and record; the run where another process was first."""
        reservation = self._reserve(moment)
        if reservation.already is not None:
            return reservation.run
        self._progress(f"computing and rendering {reservation.number}")
        done = self._work(received, moment, measurements, reservation.context, render=True)
        self._records.compared(
            received.claim,
            number=reservation.number,
            result=done.result,
            answers=done.answers,
            actor=received.actor,
            others=_others_in(reservation.context),
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
        sign_head(self._records, self._key, at=self._clock())
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
            if slot.k != max((other.k for other in moment.provenance.others), default=0) + 1:
                raise EnvironmentFailedError("Another process answered the same data just now. Try again.")
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


def _others_in(context: bytes) -> tuple[OtherRun, ...]:
    """Return the other runs as the context tells them, which a run taken up after a kill keeps."""
    records = context_from_json(json.loads(context)).provenance
    return () if records is None else records.others
