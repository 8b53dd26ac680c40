"""Groups made ready for the statistics: on the scale of the comparison, with what may be compared."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

from qcreport.analysis.result import NotCompared
from qcreport.analysis.screen import Group
from qcreport.measurements import LIMITS_BELOW
from qcreport.plan.model import ComparisonPlan, Scale
from qcreport.stats.summary import GroupSummary, summarize

_LARGEST = 1e70
"""Beyond this, or with less scatter than its inverse, squares and their ratios leave double precision."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Comparable:
    """The groups that may be compared and the groups that may not."""

    groups: tuple[Group, ...]
    """Comparable groups, order of first appearance."""
    values: tuple[tuple[float, ...], ...]
    """Their values on the scale of the comparison (natural logarithms on the log scale)."""
    summaries: tuple[GroupSummary, ...]
    """Their summaries on that scale."""
    reference: int | None
    """Index of the reference among them; None for every pair."""
    not_compared: tuple[NotCompared, ...]
    """The other groups with the reason."""

    @property
    def varies(self) -> bool:
        """Whether any group holds two different values."""
        return not all(all_equal(v) for v in self.values)

    @property
    def censored(self) -> bool:
        """Whether any value is known only by a limit."""
        return any(g.censored for g in self.groups)


def all_equal(values: Sequence[float]) -> bool:
    """Return whether all values are one value, but for what averaging readings does to the last bits."""
    return max(values) - min(values) <= 4.0 * math.ulp(max(map(abs, values)))


def comparable(groups: Sequence[Group], plan: ComparisonPlan) -> Comparable:
    """Return which groups can be compared under the plan, and why the others cannot."""
    kept: list[Group] = []
    left: list[NotCompared] = []
    for group in groups:
        reason = _why_not(group, plan)
        if reason:
            left.append(NotCompared(label=group.label, n=group.n, reason=reason))
        else:
            kept.append(group)
    if _limits_on_both_sides(kept):
        reason = (
            "Some results are known only as below a limit and others only as above one: no order follows."
        )
        left.extend(NotCompared(label=g.label, n=g.n, reason=reason) for g in kept)
        kept = []
    labels = [g.label for g in kept]
    if plan.reference is not None and plan.reference not in labels:
        reason = f"The reference {plan.reference} cannot be compared, so nothing can be compared with it."
        left.extend(NotCompared(label=g.label, n=g.n, reason=reason) for g in kept)
        kept, labels = [], []
    values = tuple(tuple(_scaled(v, plan.scale) for v in g.values) for g in kept)
    return Comparable(
        groups=tuple(kept),
        values=values,
        summaries=tuple(summarize(g.label, v) for g, v in zip(kept, values, strict=True)),
        reference=labels.index(plan.reference) if kept and plan.reference is not None else None,
        not_compared=tuple(left),
    )


def without(groups: Sequence[Group], label: str, cell: str) -> tuple[Group, ...]:
    """Return the groups with one unit left out, found by the first cell of its readings."""
    return tuple(
        replace(g, units=tuple(u for u in g.units if u.cells[0] != cell)) if g.label == label else g
        for g in groups
    )


def _why_not(group: Group, plan: ComparisonPlan) -> str:
    unit = f"{plan.independent_unit}s" if not plan.independent_unit.endswith("ch") else "batches"
    if group.n < plan.smallest_group:
        had = "no value" if group.n == 0 else f"{group.n} of them" if group.n > 1 else "one"
        return f"The plan asks for at least {plan.smallest_group} {unit} in a group; this one has {had}."
    if not all(u.placed for u in group.units):
        return "It holds a mean of readings with limits on both sides, or of numbers and not detected ones."
    if 2 * group.censored > group.n:
        return f"{group.censored} of its {group.n} results, more than half, are known only by a limit."
    if plan.scale is Scale.LOG and any(u.censored is None and u.value <= 0.0 for u in group.units):
        return "It holds a value of 0 or below, which has no logarithm."
    values = group.values
    if max(map(abs, values)) > _LARGEST or 0.0 < max(values) - min(values) < 1.0 / _LARGEST:
        return "Its values are too large, or too close to each other, to compute with; use another unit."
    return ""


def _limits_on_both_sides(groups: Sequence[Group]) -> bool:
    sides = {u.censored in LIMITS_BELOW for g in groups for u in g.units if u.censored is not None}
    return len(sides) > 1


def _scaled(value: float, scale: Scale) -> float:
    """Return the value on the scale of the comparison; a limit that has no logarithm stays as it is."""
    return math.log(value) if scale is Scale.LOG and value > 0.0 else value
