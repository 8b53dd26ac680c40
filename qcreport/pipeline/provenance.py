"""What the records add to one report, gathered before its number is reserved."""

from __future__ import annotations

import base64
from collections.abc import Iterator, Sequence

from qcreport.analysis.provenance import Approval, LeftOut, OtherRun, Provenance, Replaces
from qcreport.canonical import sha256_hex
from qcreport.measurements import MeasurementSet
from qcreport.pipeline.differences import changes_against
from qcreport.pipeline.wish import Wish
from qcreport.records.facade import Records
from qcreport.records.run import Run, RunInputs, run_key
from qcreport.records.store import Survey
from qcreport.settings.plans import PlanSettings
from qcreport.signing.detached import signer_of
from qcreport.signing.keys import common_name, fingerprint
from qcreport.workbook.limits import Limits

APPROVAL_SCHEMA = "qcreport/approval/1"


def settings_digests(settings: PlanSettings) -> dict[str, str]:
    """Return the digests that an approval is about."""
    return {
        "plan_sha256": sha256_hex(settings.plan_file.data),
        "layout_sha256": sha256_hex(settings.layout_file.data),
        "rules_sha256": sha256_hex(settings.rules_file.data),
    }


def gather(
    records: Records,
    settings: PlanSettings,
    *,
    inputs: RunInputs,
    others: Sequence[Run],
    measurements: MeasurementSet,
    survey: Survey,
    wish: Wish,
    actor: str,
    limits: Limits,
) -> Provenance:
    """Return what the records add.

    Raises
    ------
    UsageError
        Where the report to be replaced is none, or was replaced already.
    """

    def against(run: Run) -> OtherRun:
        standing = states.get(run.number)
        state = "reserved" if run.sealing is None else "sealed" if standing is None else str(standing.state)
        changes = changes_against(run, inputs, measurements, records=records, limits=limits)
        return OtherRun(
            number=run.number,
            k=run.k,
            made_at=run.made_at,
            reason=run.reason,
            state=state,
            answers=run.answers,
            changes=changes,
        )

    states, total = records.standings(), len(measurements.measurements)
    told = tuple(against(run) for run in others)
    replaces = None
    if wish.replaces:
        run = records.require_replaceable(wish.replaces, by_key=run_key(inputs))
        changes = next((o.changes for o in told if o.number == run.number), None)
        if changes is None:
            changes = changes_against(run, inputs, measurements, records=records, limits=limits)
        changes = tuple(c for c in changes if c.what != "replaces")
        replaces = Replaces(number=run.number, reason=wish.reason.strip(), changes=changes)
    return Provenance(
        others=told,
        without_report=records.trials_over_data(inputs, settings.plan.name),
        left_out=(
            LeftOut(cells=inputs.left_out, reason=wish.reason.strip(), by=actor) if inputs.left_out else None
        ),
        replaces=replaces,
        new=survey.first_seen,
        known=total - survey.first_seen - sum(c.when == "now" for c in survey.history),
        not_joined=survey.not_joined,
        changed=survey.history,
        retests=survey.retests,
        approvals=tuple(_approvals(records, settings)),
    )


def _approvals(records: Records, settings: PlanSettings) -> Iterator[Approval]:
    """Yield the approvals of exactly these settings whose signature holds."""
    for entry in records.approvals(settings_digests(settings)):
        facts = entry.facts_object()
        certificate = signer_of(
            str(facts.get("statement")).encode("utf-8"),
            base64.b64decode(str(facts.get("signature"))),
            str(facts.get("certificate")).encode("ascii"),
        )
        if certificate is not None and fingerprint(certificate) == facts.get("fingerprint_sha256"):
            yield Approval(
                by=common_name(certificate),
                fingerprint_sha256=fingerprint(certificate),
                at=entry.at,
                sequence=entry.sequence,
            )
