"""The analysis: a pure function of export, plan, layout, rules and context."""

from __future__ import annotations

import datetime as dt
from typing import Final

import numpy
import scipy

import qcreport
from qcreport.analysis.characteristic import characteristic_result
from qcreport.analysis.context import Context
from qcreport.analysis.left_out import without_cells
from qcreport.analysis.outcome import Question
from qcreport.analysis.provenance import NO_PROVENANCE
from qcreport.analysis.provenance_notices import provenance_notices
from qcreport.analysis.result import Result
from qcreport.analysis.screen import groups_of
from qcreport.errors import ExportRefusedError
from qcreport.measurements import MeasurementSet, Notice
from qcreport.plan.model import CharacteristicPlan, ComparisonPlan, Direction, Family
from qcreport.rules import RulesTable

VERSIONS: Final = (
    ("numpy", numpy.__version__),
    ("qcreport", qcreport.__version__),
    ("scipy", scipy.__version__),
)
"""(package, version) of what decides the numbers."""


def analyse(
    measurements: MeasurementSet,
    plan: ComparisonPlan,
    rules: RulesTable,
    context: Context,
) -> Result:
    """Compare the groups of every characteristic in the plan.

    Parameters
    ----------
    measurements
        All that was read from the export.
    plan, rules
        What is compared, and the decision table that chooses how.
    context
        Facts of the moment; the export's name, the plan's digest and run k of n enter the result.

    Raises
    ------
    ExportRefusedError
        `reference_missing`, `unit_conflict`, `group_missing`, `no_data_rows`.
    """
    records = context.provenance
    left_out = left_out_cells(context)
    require_answerable(without_cells(measurements, left_out), plan)
    alpha = plan.alpha
    if plan.family is Family.EXPORT:
        alpha /= len(plan.characteristics)
    earliest = earliest_date(measurements)
    results, notices = [], list(measurements.notices)
    for characteristic in plan.characteristics:
        question = Question(
            plan=plan,
            characteristic=characteristic,
            rules=rules,
            alpha=alpha,
            earliest=earliest,
            left_out=left_out,
            history=next((h for h in context.history if h.characteristic == characteristic.name), None),
        )
        result, added = characteristic_result(measurements, question)
        results.append(result)
        notices.extend(added)
    notices.extend(_late_approval(plan, earliest))
    notices.extend(_late_rules(rules, earliest))
    notices.extend(_unused_directions(plan))
    if records is not None:
        notices.extend(provenance_notices(records, context, results, earliest))
    return Result(
        export_name=context.export_name,
        export_sha256=context.export_sha256,
        plan_name=plan.name,
        plan_sha256=context.plan_sha256,
        run_k=context.run_k,
        run_n=context.run_n,
        notices=tuple(notices),
        characteristics=tuple(results),
        versions=VERSIONS,
        run_reason=context.run_reason,
        provenance=NO_PROVENANCE if records is None else records,
    )


def left_out_cells(context: Context) -> frozenset[str]:
    """Return the cells that a person left out."""
    records = context.provenance
    return frozenset() if records is None or records.left_out is None else frozenset(records.left_out.cells)


def require_answerable(measurements: MeasurementSet, plan: ComparisonPlan) -> None:
    """Raise ExportRefusedError where the export cannot be compared by the plan at all.

    Asked before a report number is reserved, so that a refusal uses none up.
    """
    if not measurements.measurements:
        raise _no_values(measurements, plan)
    for characteristic in plan.characteristics:
        groups = groups_of(measurements, plan, characteristic)
        _require_reference(measurements, plan, characteristic, [g.label for g in groups])


def earliest_date(measurements: MeasurementSet) -> dt.date | None:
    """Return the date of the earliest measurement, or None where the export has no times."""
    dates = [m.time[:10] for m in measurements.measurements if m.time]
    return min((dt.date.fromisoformat(d) for d in dates), default=None)


def _require_reference(
    measurements: MeasurementSet, plan: ComparisonPlan, characteristic: CharacteristicPlan, labels: list[str]
) -> None:
    if plan.reference is None or plan.reference in labels or not labels:
        return
    raise ExportRefusedError(
        "reference_missing",
        file=measurements.export_name,
        where=f"{characteristic.name}, {plan.groups} names",
        found=f"{', '.join(labels[:8])}{' and others' if len(labels) > 8 else ''}.",
        expected=f"The plan compares each with the reference {plan.reference}.",
        next_step="Export the reference's results too, or correct the reference in the plan.",
    )


def _late_approval(plan: ComparisonPlan, earliest: dt.date | None) -> list[Notice]:
    if plan.approved is None or earliest is None or plan.approved.on <= earliest:
        return []
    text = (
        f"Set after the data: the plan was approved on {plan.approved.on.isoformat()}, "
        f"the first measurement is of {earliest.isoformat()}."
    )
    return [Notice(code="plan_set_after_data", cells=(), text=text)]


def _late_rules(rules: RulesTable, earliest: dt.date | None) -> list[Notice]:
    if rules.approved is None or earliest is None or rules.approved.on <= earliest:
        return []
    text = (
        f"Set after the data: the decision table {rules.name} was approved on "
        f"{rules.approved.on.isoformat()}, the first measurement is of {earliest.isoformat()}."
    )
    return [Notice(code="rules_set_after_data", cells=(), text=text)]


def _unused_directions(plan: ComparisonPlan) -> list[Notice]:
    """Say where a one-sided direction cannot count: of every pair one member is lower anyway."""
    sided = [c.name for c in plan.characteristics if c.direction is not Direction.BOTH]
    if not sided or plan.reference is not None:
        return []
    text = (
        f"The plan gives {', '.join(sided)} a one-sided direction, which needs a reference; every pair is "
        "compared here, so the intervals are two-sided."
    )
    return [Notice(code="direction_not_used", cells=(), text=text)]


def _no_values(measurements: MeasurementSet, plan: ComparisonPlan) -> ExportRefusedError:
    names = ", ".join(c.name for c in plan.characteristics)
    return ExportRefusedError(
        "no_data_rows",
        file=measurements.export_name,
        where=f"layout {measurements.layout_name}",
        found="No value was found.",
        expected=f"Values of {names}.",
        next_step="Check that the export is complete and that first_row in the layout fits.",
    )
