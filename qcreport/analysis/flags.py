"""Outlying values: flagged, never dropped, with what the answer would be without them."""

from __future__ import annotations

from collections.abc import Sequence

from qcreport.analysis.comparable import without
from qcreport.analysis.outcome import Outcome, Question, changed_answers, decide
from qcreport.analysis.result import Flagged
from qcreport.analysis.screen import Group
from qcreport.stats.outliers import grubbs

LEVEL = 0.05
"""Shared over the compared groups."""


def flag(groups: Sequence[Group], outcome: Outcome, question: Question) -> tuple[Flagged, ...]:
    """Return the values that Grubbs' test flags at 0.05 shared over the groups, one a group at most."""
    ready = outcome.ready
    if ready.censored or not ready.groups:
        return ()
    checks = grubbs([g.label for g in ready.groups], ready.values, alpha=LEVEL)
    by_label = {g.label: g for g in ready.groups}
    found: list[Flagged] = []
    for check in checks:
        if not check.flagged:
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


def _changes(
    groups: Sequence[Group], label: str, cell: str, outcome: Outcome, question: Question
) -> bool | None:
    if outcome.comparison is None:
        return None
    other = decide(without(groups, label, cell), question)
    if other.comparison is None:
        return True
    here, there = outcome.comparison.pairs, other.comparison.pairs
    return len(here) != len(there) or bool(changed_answers(here, there))
