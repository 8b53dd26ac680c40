"""The pure part of one report, run in a worker: from measurements to result.json and the unsealed pages."""

from __future__ import annotations

import json

from qcreport.analysis import analyse, context_from_json
from qcreport.analysis.analyse import left_out_cells
from qcreport.analysis.left_out import marked_left_out
from qcreport.canonical import to_readable_json_bytes
from qcreport.pipeline.job import Done, Job
from qcreport.plan import parse_plan
from qcreport.report.attachment import EXPORT_TYPES, Attachment, export_attachment_name
from qcreport.rules import parse_rules

_KINDS = {
    "plan.toml": ("Source", "The comparison plan", "application/toml"),
    "layout.toml": ("Source", "How the export is laid out", "application/toml"),
    "rules.toml": ("Source", "The decision table that chose the procedure", "application/toml"),
    "context.json": ("Supplement", "Facts of the moment at which the report was made", "application/json"),
    "result.json": ("Data", "The result at full precision", "application/json"),
}


def compute(job: Job) -> Done:
    """Return result.json and, where asked for, the unsealed report with its attachments.

    Raises
    ------
    QcReportError
        As `analyse` and the report room say.
    """
    plan = parse_plan(job.plan.data, job.plan.name)
    rules = parse_rules(job.rules.data, job.rules.name)
    context = context_from_json(json.loads(job.context))
    result = analyse(job.measurements, plan, rules, context)
    result_bytes = to_readable_json_bytes(result.to_json())
    answers = tuple((c.name, c.answer) for c in result.characteristics)
    if not job.render:
        return Done(result=result_bytes, answers=answers, pdf=b"", pages=0, attachments=())
    # Imported here: a run without a report must not need the text-layout libraries.
    from qcreport.report.job import RenderJob, render_job
    from qcreport.report.templates import load_templates

    files = attached_files(job, result_bytes)
    rendered = render_job(
        RenderJob(
            result=result,
            measurements=marked_left_out(job.measurements, left_out_cells(context)),
            plan=plan,
            context=context,
            attachments=tuple(_attachment(name, data) for name, data in files),
            templates=load_templates(dict(job.templates)),
        )
    )
    return Done(
        result=result_bytes, answers=answers, pdf=rendered.pdf, pages=rendered.pages, attachments=files
    )


def attached_files(job: Job, result: bytes) -> tuple[tuple[str, bytes], ...]:
    """Return (fixed name, bytes) of everything that travels inside the report, sorted by name."""
    files = {
        export_attachment_name(job.measurements.export_name): job.export,
        "plan.toml": job.plan.data,
        "layout.toml": job.layout.data,
        "rules.toml": job.rules.data,
        "context.json": job.context,
        "result.json": result,
    }
    return tuple(sorted(files.items()))


def _attachment(name: str, data: bytes) -> Attachment:
    if name.startswith("export."):
        mime = EXPORT_TYPES.get(name.rsplit(".", 1)[-1], "application/octet-stream")
        return Attachment(
            name=name, data=data, relationship="Source", description="The export as it was dropped", mime=mime
        )
    relationship, description, mime = _KINDS[name]
    return Attachment(name=name, data=data, relationship=relationship, description=description, mime=mime)
