"""The facts of the moment under which a report is made."""

from __future__ import annotations

from dataclasses import dataclass

import qcreport
from qcreport.analysis.context import Context, Signer
from qcreport.analysis.provenance import Provenance
from qcreport.records.run import RunInputs, Slot
from qcreport.report.templates import TemplateSet
from qcreport.rules.history import SpreadHistory
from qcreport.settings.people import load_people
from qcreport.settings.plans import PlanSettings
from qcreport.settings.site import Site
from qcreport.signing.keys import SigningKey

PADES_LEVEL = "B-B"


@dataclass(frozen=True, slots=True, kw_only=True)
class Moment:
    """What the context is built from besides the reservation."""

    site: Site
    """The site."""
    settings: PlanSettings
    """Plan, layout and rules."""
    templates: TemplateSet
    """Templates in use."""
    inputs: RunInputs
    """Digests of everything that decides the report."""
    export_name: str
    """File name as dropped."""
    reason: str
    """Why it is run; empty where no reason was needed."""
    key: SigningKey | None
    """The sealing key; None where nothing will be sealed."""
    provenance: Provenance
    """What the records add."""
    history: tuple[SpreadHistory, ...] = ()
    """Spread of earlier exports."""


def build_context(moment: Moment, slot: Slot) -> Context:
    """Return the context of one report."""
    site, inputs = moment.site, moment.inputs
    return Context(
        report_number=slot.number,
        revision=1,
        made_at=slot.made_at,
        time_zone=site.time_zone,
        language=site.language,
        page_size=site.page_size,
        laboratory=site.laboratory,
        statements=site.statements,
        export_name=moment.export_name,
        export_sha256=inputs.export_sha256,
        received_at=slot.received_at,
        plan_name=moment.settings.plan.name,
        plan_sha256=inputs.plan_sha256,
        layout_sha256=inputs.layout_sha256,
        rules_sha256=inputs.rules_sha256,
        templates=moment.templates.digests,
        templates_changed=moment.templates.changed,
        run_k=slot.k,
        run_n=slot.n,
        run_reason=moment.reason if moment.provenance.others else "",
        ledger_sequence=slot.ledger_head.sequence,
        ledger_hash=slot.ledger_head.entry_hash,
        seal_subject="" if moment.key is None else moment.key.subject,
        seal_fingerprint_sha256="" if moment.key is None else moment.key.fingerprint_sha256,
        pades_level=PADES_LEVEL,
        demonstration=site.demonstration,
        software_version=qcreport.__version__,
        history=moment.history,
        signers=tuple(
            Signer(name=p.name, certificate_sha256=p.certificate_sha256, may=p.may)
            for p in load_people(site.root).persons
        ),
        provenance=moment.provenance,
    )
