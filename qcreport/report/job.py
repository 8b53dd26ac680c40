"""What a worker does: measurements and result in, unsealed PDF out; no key, no database, no clock."""

from __future__ import annotations

from dataclasses import dataclass

from qcreport.analysis.context import Context
from qcreport.analysis.result import Result
from qcreport.measurements import MeasurementSet
from qcreport.plan.model import ComparisonPlan
from qcreport.report.attachment import Attachment
from qcreport.report.build import build_model
from qcreport.report.render import RenderedReport, lay_out, write
from qcreport.report.room import has_room
from qcreport.report.templates import TemplateSet


@dataclass(frozen=True, slots=True, kw_only=True)
class RenderJob:
    """Everything a worker needs to make one report; can be sent to another process."""

    result: Result
    measurements: MeasurementSet
    plan: ComparisonPlan
    context: Context
    attachments: tuple[Attachment, ...]
    templates: TemplateSet


def render_job(job: RenderJob) -> RenderedReport:
    """Return the unsealed report of a job.

    The signature boxes belong on page 1. Where the answer and the figure do not leave them room, the figure
    moves to page 2.

    Raises
    ------
    ConfigError, EnvironmentFailedError
        As `build_model` and `render_report` say.
    """
    from qcreport.report.page_checks import page_with_fields

    model = build_model(job.result, job.measurements, job.plan, job.context)
    if model.first.values is not None and not has_room(model.first, model.page_size):
        model = build_model(job.result, job.measurements, job.plan, job.context, figure_on_first_page=False)
    document = lay_out(model, job.templates)
    if page_with_fields(document) > 0 and model.first.values is not None:
        model = build_model(job.result, job.measurements, job.plan, job.context, figure_on_first_page=False)
        document = lay_out(model, job.templates)
    return write(document, model, job.attachments)
