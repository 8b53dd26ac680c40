"""Leaving values out by a person's decision: the comparison without them, and beside it the one with them."""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import replace

from qcreport.analysis.left_out_result import LeftOutResult, LeftOutValue
from qcreport.analysis.outcome import Outcome, Question, changed_answers, decide
from qcreport.analysis.result import UnitValue
from qcreport.analysis.screen import Group, group_label, groups_of, unit_value
from qcreport.measurements import Measurement, MeasurementSet
from qcreport.plan.model import CharacteristicPlan, ComparisonPlan

LEFT_OUT_MARK = "left out"
"""The mark that a value left out carries in data and figure."""


def without_cells(measurements: MeasurementSet, cells: Collection[str]) -> MeasurementSet:
    """Return the measurements but for those that stand in these cells."""
    if not cells:
        return measurements
    kept = tuple(m for m in measurements.measurements if str(m.cell) not in cells)
    return replace(measurements, measurements=kept)


def marked_left_out(measurements: MeasurementSet, cells: Collection[str]) -> MeasurementSet:
    """Return all measurements; those that stand in these cells say that they are left out."""
    if not cells:
        return measurements
    return replace(
        measurements,
        measurements=tuple(
            replace(m, marks=(*m.marks, LEFT_OUT_MARK)) if str(m.cell) in cells else m
            for m in measurements.measurements
        ),
    )


def groups_without(
    measurements: MeasurementSet,
    plan: ComparisonPlan,
    characteristic: CharacteristicPlan,
    cells: Collection[str],
) -> tuple[Group, ...]:
    """Return the groups of one characteristic without these cells; a group of which nothing is left stays."""
    groups = groups_of(measurements, plan, characteristic)
    if not cells:
        return groups
    left = {g.label: g for g in groups_of(without_cells(measurements, cells), plan, characteristic)}
    return tuple(
        left.get(g.label, Group(label=g.label, units=(), n_readings=0, missing=g.missing)) for g in groups
    )


def with_left_out(outcome: Outcome, measurements: MeasurementSet, question: Question) -> LeftOutResult | None:
    """Return what was left out of one characteristic and the answers with it; None where nothing was.

    Parameters
    ----------
    outcome
        The comparison without the values.
    measurements
        All that was read, the values left out among it.
    question
        As it was asked without them; `left_out` has their cells.
    """
    mine = _left_out(measurements, question)
    if not mine:
        return None
    groups = groups_of(measurements, question.plan, question.characteristic)
    other = decide(groups, replace(question, beside=True))
    pairs = () if other.comparison is None else other.comparison.pairs
    here = () if outcome.comparison is None else outcome.comparison.pairs
    return LeftOutResult(
        values=tuple(
            LeftOutValue(
                cell=str(m.cell),
                group=group_label(measurements, m, question.plan.groups),
                sample=m.sample,
                value=m.value,
                text=m.text,
            )
            for m in mine
        ),
        procedure=other.procedure,
        answer=other.answer,
        pairs=pairs,
        changed=changed_answers(here, pairs),
    )


def units_left_out(measurements: MeasurementSet, question: Question, label: str) -> tuple[UnitValue, ...]:
    """Return the readings left out of one group, marked, for the figure."""
    return tuple(
        replace(unit_value(m), marks=(*m.marks, LEFT_OUT_MARK))
        for m in _left_out(measurements, question)
        if group_label(measurements, m, question.plan.groups) == label
    )


def _left_out(measurements: MeasurementSet, question: Question) -> Sequence[Measurement]:
    if not question.left_out:
        return []
    return [
        m
        for m in measurements.measurements
        if m.characteristic == question.characteristic.name and str(m.cell) in question.left_out
    ]
