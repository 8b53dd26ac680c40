"""Outlying values: flagged, never dropped, with what the answer would be without them."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace

from qcreport.analysis.comparable import Comparable, without
from qcreport.analysis.outcome import Outcome, Question, changed_answers, decide
from qcreport.analysis.result import Flagged
from qcreport.analysis.screen import Group
from qcreport.plan.model import Scale
from qcreport.stats.outliers import SMALLEST_ESD_N, OutlierCheck, generalized_esd, grubbs
from qcreport.stats.summary import summarize

LEVEL = 0.05
"""Shared over the compared groups."""


def flag(groups: Sequence[Group], outcome: Outcome, question: Question) -> tuple[Flagged, ...]:
    """Return the outlying values: Grubbs' test in small groups, generalized ESD from 15 results on.

    Both at 0.05 shared over the groups. A large group may hold several, which hide each other from Grubbs'
    test.
    """
    ready = outcome.ready
    if ready.censored or not ready.groups:
        return ()
    checks = _checks(ready)
    by_label = {g.label: g for g in ready.groups}
    found: list[Flagged] = []
    for check in checks:
        if not check.flagged or _within_rounding(check, by_label[check.label], question.plan.scale):
            continue
        unit = by_label[check.label].units[check.index]
        found.append(
            Flagged(
                group=check.label,
                cell=unit.cells[0],
                value=unit.value,
                test=check.test,
                statistic=check.statistic,
                p=check.p,
                changes_answer=_changes(groups, check.label, unit.cells[0], outcome, question),
            )
        )
    return tuple(found)


def _checks(ready: Comparable) -> list[OutlierCheck]:
    labels = [g.label for g in ready.groups]
    small = {c.label: (c,) for c in grubbs(labels, ready.values, alpha=LEVEL)}
    found: list[OutlierCheck] = []
    for label, values in zip(labels, ready.values, strict=True):
        if len(values) >= SMALLEST_ESD_N:
            found.extend(generalized_esd(label, values, alpha=LEVEL / len(labels)))
        else:
            found.extend(small.get(label, ()))
    return found


def _within_rounding(check: OutlierCheck, group: Group, scale: Scale) -> bool:
    """Return whether the rounding of the values alone can make one of them stand out.

    Two equal values and a third one step away have the largest statistic there is. So a value counts as
    outlying only if it is so too with the variance of rounding, step²/12, added to the scatter.
    """
    step = 10.0 ** -max(u.decimals for u in group.units)
    values = group.values
    if scale is Scale.LOG:
        step, values = step / min(values), tuple(map(math.log, values))
    variance = summarize(group.label, values).variance
    statistic = check.statistic * math.sqrt(variance / (variance + step * step / 12.0))
    return statistic < check.critical


def _changes(
    groups: Sequence[Group], label: str, cell: str, outcome: Outcome, question: Question
) -> bool | None:
    if outcome.comparison is None:
        return None
    if question.plan.procedure == "tukey_hsd":  # one value less makes the sizes unequal
        question = replace(question, plan=replace(question.plan, procedure="tukey_kramer"))
    other = decide(without(groups, label, cell), replace(question, beside=True))
    if other.comparison is None:
        return True
    here, there = outcome.comparison.pairs, other.comparison.pairs
    return len(here) != len(there) or bool(changed_answers(here, there))
