"""Whether the groups scatter alike: shown, declared, contradicted, or open.

A variance check that fails to reject proves nothing, least of all at small n. So spread counts as similar
only where a person has declared it and the data do not contradict, or where an upper confidence limit of the
largest ratio of standard deviations is small enough. The alternative policy lets this export's own check
decide.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass

from qcreport.errors import StatisticsError
from qcreport.plan.model import SpreadDeclaration
from qcreport.rules.evidence import Check
from qcreport.rules.facts import CANNOT_BE_JUDGED, CONFLICT, DIFFERENT, SIMILAR
from qcreport.rules.table import THIS_EXPORT, SpreadPolicy
from qcreport.stats.assumptions import (
    bartlett,
    brown_forsythe,
    cochran_c,
    spread_conflict,
    spread_ratio_upper_limit,
)
from qcreport.stats.summary import GroupSummary

LEVENE_SOURCE = "Median-centred Levene: Brown and Forsythe (1974), J. Am. Stat. Assoc. 69, 364-367"
LIMIT_SOURCE = "Simultaneous upper limit of the largest ratio of standard deviations, F limits, Bonferroni"
CONFLICT_SOURCE = "F of each group against the pooled rest, shared over the groups"


@dataclass(frozen=True, slots=True, kw_only=True)
class SpreadJudgement:
    """The fact `spread` with all that led to it."""

    value: str
    """similar, different, cannot be judged or conflict."""
    observed: str
    """What was declared or seen, one or two sentences."""
    source: str
    """What it rests on."""
    checks: tuple[Check, ...]
    """All variance checks as computed."""


def judge_spread(
    groups: Sequence[GroupSummary],
    values: Sequence[Sequence[float]],
    policy: SpreadPolicy,
    declaration: SpreadDeclaration | None,
    earliest: dt.date | None,
) -> SpreadJudgement:
    """Judge the spread of two or more groups, at least one of which varies.

    Parameters
    ----------
    groups, values
        Summaries and values of the compared groups, same order.
    policy
        The decision table's policy.
    declaration
        The plan's, or None.
    earliest
        Date of the earliest measurement, or None where the export has no times.
    """
    checks = _Checks.of(groups, values, policy, declared=declaration is not None and declaration.similar)
    if policy.policy == THIS_EXPORT:
        value, observed, source = _by_this_export(checks, policy)
    else:
        value, observed, source = _shown_or_declared(checks, groups, policy, declaration, earliest)
    return SpreadJudgement(value=value, observed=observed, source=source, checks=checks.all())


@dataclass(frozen=True, slots=True, kw_only=True)
class _Checks:
    """The variance checks of one characteristic."""

    levene: Check
    limit: Check
    conflict: Check | None
    description: tuple[Check, ...]

    @classmethod
    def of(
        cls,
        groups: Sequence[GroupSummary],
        values: Sequence[Sequence[float]],
        policy: SpreadPolicy,
        *,
        declared: bool,
    ) -> _Checks:
        return cls(
            levene=_levene_check(groups, values, policy),
            limit=_limit_check(groups, policy),
            conflict=_conflict_check(groups, policy) if declared else None,
            description=_description(groups),
        )

    def all(self) -> tuple[Check, ...]:
        conflict = () if self.conflict is None else (self.conflict,)
        return (self.levene, self.limit, *conflict, *self.description)


def _levene_check(
    groups: Sequence[GroupSummary], values: Sequence[Sequence[float]], policy: SpreadPolicy
) -> Check:
    try:
        found = brown_forsythe([g.label for g in groups], values)
    except StatisticsError as error:
        return _undefined("brown_forsythe", error.text)
    return Check(
        name="brown_forsythe",
        statistic=found.statistic,
        df=found.df,
        p=found.p,
        threshold=policy.different_level,
        met=None if found.p is None else found.p >= policy.different_level,
    )


def _limit_check(groups: Sequence[GroupSummary], policy: SpreadPolicy) -> Check:
    limit = spread_ratio_upper_limit(groups, confidence=policy.confidence)
    return Check(
        name="spread_ratio_limit",
        statistic=limit,
        df=(),
        p=None,
        threshold=policy.ratio_limit,
        met=limit <= policy.ratio_limit,
    )


def _conflict_check(groups: Sequence[GroupSummary], policy: SpreadPolicy) -> Check:
    """Return the check of the group that exceeds the pooled rest most."""
    found = spread_conflict(groups, alpha=policy.conflict_level)
    worst = min(found.groups, key=lambda g: g.p)
    return Check(
        name="spread_conflict",
        statistic=worst.statistic,
        df=(worst.df_group, worst.df_rest),
        p=worst.p,
        threshold=policy.conflict_level / len(groups),
        met=not found.conflict,
        note=worst.label,
    )


def _description(groups: Sequence[GroupSummary]) -> tuple[Check, ...]:
    """Return Bartlett's and Cochran's checks, printed as description and never used to choose."""
    described: list[Check] = []
    for name, check in (("bartlett", bartlett), ("cochran_c", cochran_c)):
        try:
            found = check(groups)
        except StatisticsError as error:
            described.append(_undefined(name, error.text))
        else:
            described.append(
                Check(name=name, statistic=found.statistic, df=found.df, p=found.p, threshold=None, met=None)
            )
    return tuple(described)


def _undefined(name: str, why: str) -> Check:
    return Check(name=name, statistic=None, df=(), p=None, threshold=None, met=None, note=why)


def _by_this_export(checks: _Checks, policy: SpreadPolicy) -> tuple[str, str, str]:
    p = checks.levene.p
    if p is None:
        return CANNOT_BE_JUDGED, "The variance check is not defined for this export.", LEVENE_SOURCE
    value = DIFFERENT if p < policy.different_level else SIMILAR
    words = "objects" if value == DIFFERENT else "does not object"
    return (
        value,
        f"This export's own variance check {words} at level {policy.different_level:g}.",
        LEVENE_SOURCE,
    )


def _shown_or_declared(
    checks: _Checks,
    groups: Sequence[GroupSummary],
    policy: SpreadPolicy,
    declaration: SpreadDeclaration | None,
    earliest: dt.date | None,
) -> tuple[str, str, str]:
    size_ratio = max(g.n for g in groups) / min(g.n for g in groups)
    set_aside = ""
    if declaration is not None:
        who = f"{declaration.by}, {declaration.on.isoformat()}"
        if not declaration.similar:
            return DIFFERENT, f"Declared different by {who}: {declaration.reason}", "Comparison plan"
        set_aside = _why_set_aside(checks, declaration, policy, size_ratio, earliest)
        if not set_aside:
            return SIMILAR, f"Declared similar by {who}: {declaration.reason}", "Comparison plan"
        if checks.conflict is not None and checks.conflict.met is False:
            return CONFLICT, set_aside, CONFLICT_SOURCE
    value, observed, source = _shown(checks, policy, size_ratio)
    return value, f"{set_aside} {observed}".strip(), source


def _why_set_aside(
    checks: _Checks,
    declaration: SpreadDeclaration,
    policy: SpreadPolicy,
    size_ratio: float,
    earliest: dt.date | None,
) -> str:
    """Return why the declaration does not count; empty where it does."""
    who = f"{declaration.by}, {declaration.on.isoformat()}"
    if checks.conflict is not None and checks.conflict.met is False:
        return (
            f"Data and declaration conflict: declared similar by {who}, but {checks.conflict.note} "
            "scatters more than the other groups together. The declaration is set aside."
        )
    if earliest is not None and declaration.on > earliest:
        return (
            f"Declared similar by {who}, after the first measurement ({earliest.isoformat()}); "
            "a declaration counts only when made before the data."
        )
    if size_ratio > policy.declared_size_ratio and not declaration.accept_unequal_sizes:
        return (
            f"Declared similar by {who}, but the largest group is more than {policy.declared_size_ratio:g} "
            "times the smallest and the plan does not say accept_unequal_sizes."
        )
    return ""


def _shown(checks: _Checks, policy: SpreadPolicy, size_ratio: float) -> tuple[str, str, str]:
    limit = checks.limit.statistic
    if limit is not None and checks.limit.met and size_ratio <= policy.shown_size_ratio:
        words = (
            f"Shown by this export: no standard deviation is more than {policy.ratio_limit:g} times another."
        )
        return SIMILAR, words, LIMIT_SOURCE
    if checks.levene.met is False:
        return DIFFERENT, "Seen in this export: the groups scatter differently.", LEVENE_SOURCE
    words = (
        "Not shown: this export is too small to say that no group scatters more than "
        f"{policy.ratio_limit:g} times as much as another, and a check that fails to object proves nothing."
    )
    return CANNOT_BE_JUDGED, words, LIMIT_SOURCE
