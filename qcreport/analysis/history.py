"""Spread of earlier exports: from recorded measurements to the numbers that `context.json` carries.

Where samples or readings are compared, what counts is the scatter inside batches, pooled for a line; where
lines are compared by their batches, it is the scatter of the batch means.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence

from qcreport.analysis.comparable import Comparable, all_equal
from qcreport.analysis.result import UnitValue
from qcreport.analysis.screen import group_from
from qcreport.measurements import Measurement
from qcreport.plan.model import CharacteristicPlan, ComparisonPlan, Groups, Scale, Unit
from qcreport.rules.history import BatchHistory, LineHistory, SpreadHistory
from qcreport.rules.spread_checks import Pooled, pooled
from qcreport.stats.summary import summarize


def spread_histories(past: Sequence[Measurement], plan: ComparisonPlan) -> tuple[SpreadHistory, ...]:
    """Return the earlier spread of every characteristic of the plan that has any.

    Parameters
    ----------
    past
        Recorded measurements by the same layout, oldest first, of batches that are not in this export.
    plan
        What is compared, on which unit and scale.

    Notes
    -----
    A batch counts whole or not at all: one with a result that is known only by a limit, comes in another unit
    or has no logarithm on the log scale is passed over.
    """
    found = (_history(past, plan, c) for c in plan.characteristics)
    return tuple(h for h in found if h.lines or h.batches)


def within_batches(ready: Comparable, plan: ComparisonPlan) -> tuple[Pooled, ...]:
    """Return each compared group's part of what is pooled with its line's history."""
    if plan.independent_unit is Unit.BATCH:
        return tuple(Pooled(df=s.n - 1.0, variance=s.variance) for s in ready.summaries)
    parts = []
    for group, values in zip(ready.groups, ready.values, strict=True):
        by_batch: dict[str, list[float]] = {}
        for unit, value in zip(group.units, values, strict=True):
            by_batch.setdefault(unit.batch, []).append(value)
        parts.append(pooled([_spread_of(v) for v in by_batch.values()]))
    return tuple(parts)


def _history(
    past: Sequence[Measurement], plan: ComparisonPlan, characteristic: CharacteristicPlan
) -> SpreadHistory:
    batches = _batches(past, plan, characteristic)
    if plan.groups is Groups.BATCH:
        return SpreadHistory(
            characteristic=characteristic.name,
            batches=tuple(
                _batch(key[1], units, plan.scale) for key, units in batches.items() if len(units) > 1
            ),
        )
    by_line: dict[str, list[Sequence[UnitValue]]] = {}
    for (line, _), units in batches.items():
        if line is not None:
            by_line.setdefault(line, []).append(units)
    lines = (_line(label, members, plan) for label, members in by_line.items())
    return SpreadHistory(
        characteristic=characteristic.name, lines=tuple(line for line in lines if line is not None)
    )


def _batches(
    past: Sequence[Measurement], plan: ComparisonPlan, characteristic: CharacteristicPlan
) -> Mapping[tuple[str | None, str], Sequence[UnitValue]]:
    """Return the independent units of each usable batch; lines are told apart where they are compared."""
    members: dict[tuple[str | None, str], list[Measurement]] = {}
    for m in past:
        if m.characteristic == characteristic.name:
            line = m.line if plan.groups is Groups.LINE else None
            members.setdefault((line, m.batch), []).append(m)
    found = {}
    for key, measured in members.items():
        units = group_from(key[1], measured, plan.independent_unit).units
        if units and all(m.unit == characteristic.unit for m in measured) and _usable(units, plan.scale):
            found[key] = units
    return found


def _usable(units: Sequence[UnitValue], scale: Scale) -> bool:
    return all(u.censored is None and (u.value > 0.0 or scale is Scale.AS_MEASURED) for u in units)


def _line(label: str, batches: Sequence[Sequence[UnitValue]], plan: ComparisonPlan) -> LineHistory | None:
    if plan.independent_unit is Unit.BATCH:
        spread = _spread_of([v for units in batches for v in _scaled(units, plan.scale)])
    else:
        spread = pooled([_spread_of(_scaled(units, plan.scale)) for units in batches])
    if spread.df == 0.0:
        return None
    return LineHistory(
        label=label,
        batches=len(batches),
        n=sum(len(units) for units in batches),
        df=spread.df,
        variance=spread.variance,
    )


def _batch(label: str, units: Sequence[UnitValue], scale: Scale) -> BatchHistory:
    """Return one batch; where all its values are equal, its variance is that of rounding, step**2 / 12."""
    values = _scaled(units, scale)
    spread = _spread_of(values)
    variance = spread.variance
    if all_equal(values):
        step = 10.0 ** -max(u.decimals for u in units)
        resolution = step / abs(units[0].value) if scale is Scale.LOG else step
        variance = resolution * resolution / 12.0
    return BatchHistory(label=label, n=len(values), df=spread.df, variance=variance)


def _scaled(units: Sequence[UnitValue], scale: Scale) -> list[float]:
    return [math.log(u.value) if scale is Scale.LOG else u.value for u in units]


def _spread_of(values: Sequence[float]) -> Pooled:
    if len(values) < 2:
        return Pooled(df=0.0, variance=0.0)
    return Pooled(df=len(values) - 1.0, variance=summarize("history", values).variance)
