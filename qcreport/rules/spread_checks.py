"""The variance checks of one characteristic: those that a judgement may rest on, and those that describe."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from qcreport.errors import StatisticsError
from qcreport.rules.evidence import Check
from qcreport.rules.history import SpreadHistory
from qcreport.rules.policy import SpreadPolicy
from qcreport.stats.assumptions import (
    bartlett,
    brown_forsythe,
    cochran_c,
    spread_conflict,
    spread_ratio_upper_limit,
    spread_ratio_upper_limit_of,
)
from qcreport.stats.spread_history import spread_variation
from qcreport.stats.summary import GroupSummary


@dataclass(frozen=True, slots=True, kw_only=True)
class Pooled:
    """A variance with its degrees of freedom."""

    df: float
    """Degrees of freedom; 0 where there are none."""
    variance: float
    """In the unit squared."""


@dataclass(frozen=True, slots=True, kw_only=True)
class SpreadChecks:
    """The variance checks as computed."""

    levene: Check
    """Median-centred Levene on this export."""
    limit: Check
    """Upper limit of the largest spread ratio from this export alone."""
    together: Check | None
    """The same from the lines' history and this export; None without a history of every line."""
    variation: Check | None
    """Upper limit of the standard deviation of ln sigma over earlier batches; None without enough of them."""
    conflict: Check | None
    """The group that exceeds the others most; None where nothing is declared and no history counts."""
    description: tuple[Check, ...]
    """Bartlett's and Cochran's checks."""

    def all(self) -> tuple[Check, ...]:
        """Return every check that was made, in the order printed."""
        made = (self.levene, self.limit, self.together, self.variation, self.conflict)
        return (*(check for check in made if check is not None), *self.description)


def levene_check(
    groups: Sequence[GroupSummary], values: Sequence[Sequence[float]], policy: SpreadPolicy
) -> Check:
    """Return the median-centred Levene check."""
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


def limit_check(groups: Sequence[GroupSummary], policy: SpreadPolicy) -> Check:
    """Return the upper limit of the largest spread ratio, from this export alone."""
    limit = spread_ratio_upper_limit(groups, confidence=policy.confidence)
    return _limit("spread_ratio_limit", limit, policy, "")


def together_check(
    groups: Sequence[GroupSummary],
    within: Sequence[Pooled],
    history: SpreadHistory | None,
    policy: SpreadPolicy,
) -> Check | None:
    """Return the upper limit from the lines' history and this export; None without a history of every line.

    `within` is this export's part, same order as `groups`.
    """
    lines = [] if history is None else [history.line(g.label) for g in groups]
    pools = [
        pooled((Pooled(df=line.df, variance=line.variance), own))
        for line, own in zip(lines, within, strict=False)
        if line is not None
    ]
    if len(pools) < len(groups):
        return None
    dfs = [p.df for p in pools]
    limit = spread_ratio_upper_limit_of(dfs, [p.variance for p in pools], policy.confidence)
    note = f"history and this export, {min(dfs):g} df" + (f" to {max(dfs):g}" if max(dfs) > min(dfs) else "")
    return _limit("spread_ratio_limit_with_history", limit, policy, note)


def variation_check(
    groups: Sequence[GroupSummary], history: SpreadHistory | None, policy: SpreadPolicy
) -> Check | None:
    """Return the upper limit of the standard deviation of ln sigma over earlier batches.

    None where there are too few of them with enough degrees of freedom, or too many groups are compared.
    """
    batches = [] if history is None else [b for b in history.batches if b.df >= policy.history_df]
    if len(batches) < policy.history_batches or len(groups) > policy.history_groups:
        return None
    found = spread_variation([b.df for b in batches], [b.variance for b in batches], policy.confidence)
    return Check(
        name="spread_variation",
        statistic=found.upper_limit,
        df=(),
        p=None,
        threshold=policy.history_sd_ln,
        met=found.upper_limit <= policy.history_sd_ln,
        note=f"{found.n_batches} earlier batches, estimate {found.sd_log_sigma:.2f}",
    )


def pooled(parts: Sequence[Pooled]) -> Pooled:
    """Return one variance from several, weighted by their degrees of freedom."""
    df = math.fsum(p.df for p in parts)
    if df == 0.0:
        return Pooled(df=0.0, variance=0.0)
    return Pooled(df=df, variance=math.fsum(p.df * p.variance for p in parts) / df)


def conflict_check(groups: Sequence[GroupSummary], policy: SpreadPolicy) -> Check:
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


def description(groups: Sequence[GroupSummary]) -> tuple[Check, ...]:
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


def _limit(name: str, limit: float, policy: SpreadPolicy, note: str) -> Check:
    met = limit <= policy.ratio_limit
    return Check(name=name, statistic=limit, df=(), p=None, threshold=policy.ratio_limit, met=met, note=note)


def _undefined(name: str, why: str) -> Check:
    return Check(name=name, statistic=None, df=(), p=None, threshold=None, met=None, note=why)
