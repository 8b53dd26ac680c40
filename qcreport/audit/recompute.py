"""The result computed anew from what a report carries, along the same stages as the first time."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from qcreport.audit.evidence import Evidence
from qcreport.errors import NotOurReportError

if TYPE_CHECKING:
    from qcreport.analysis.result import Result
    from qcreport.measurements import MeasurementSet
    from qcreport.plan import ComparisonPlan


@dataclass(frozen=True, slots=True, kw_only=True)
class Anew:
    """A result computed anew, with what it was computed from."""

    result: Result
    """As this installation computes it."""
    measurements: MeasurementSet
    """As the reader child reads the attached export."""
    plan: ComparisonPlan
    """The attached plan."""


def recompute_result(evidence: Evidence) -> Anew:
    """Return the result as this installation computes it from the attachments.

    The export is read in the reader child, as a dropped one is.

    Raises
    ------
    QcReportError
        An attachment cannot be read, or the analysis cannot answer.
    """
    from qcreport.analysis import analyse
    from qcreport.plan import parse_plan
    from qcreport.rules import parse_rules
    from qcreport.workbook.read_in_child import read_in_child

    export, context = evidence.export_name, evidence.context
    if export is None or context is None:
        raise NotOurReportError("The report does not carry what its result was computed from.")
    files = evidence.files
    plan = parse_plan(files["plan.toml"], "plan.toml")
    rules = parse_rules(files["rules.toml"], "rules.toml")
    measurements = read_in_child(
        files[export],
        name=context.export_name,
        layout_bytes=files["layout.toml"],
        layout_file="layout.toml",
    )
    return Anew(result=analyse(measurements, plan, rules, context), measurements=measurements, plan=plan)
