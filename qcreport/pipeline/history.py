"""The spread of earlier exports, asked of the records for one export and plan."""

from __future__ import annotations

from qcreport.analysis.history import spread_histories
from qcreport.measurements import MeasurementSet
from qcreport.plan.model import ComparisonPlan, Groups
from qcreport.records.lookups import Lookups
from qcreport.rules.history import SpreadHistory


def spread_history(
    records: Lookups, measurements: MeasurementSet, plan: ComparisonPlan
) -> tuple[SpreadHistory, ...]:
    """Return what the records know of spread; no batch of this export is in it."""
    names = [c.name for c in plan.characteristics]
    past = records.past(measurements, names, by_line=plan.groups is Groups.LINE)
    return spread_histories(past, plan)
