"""Checks of equal spread, printed as description, and two statements that a decision may rest on.

A check that fails to reject proves nothing; `spread_ratio_upper_limit` shows similarity, `spread_conflict`
contradicts a declaration of it.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from qcreport.errors import DegenerateDataError, TooFewObservationsError
from qcreport.stats.distributions.student import (
    chi_squared_upper,
    chi_squared_upper_quantile,
    f_upper,
    f_upper_quantile,
)
from qcreport.stats.one_way import anova
from qcreport.stats.summary import GroupSummary, require_groups, summarize


@dataclass(frozen=True, slots=True, kw_only=True)
class AssumptionCheck:
    """One check of an assumption."""

    name: str
    """Stable name, e.g. `brown_forsythe`."""
    statistic: float
    """Value of the statistic, dimensionless."""
    df: tuple[float, ...]
    """Degrees of freedom of its law."""
    p: float | None
    """P value, if the law gives one."""
    threshold: float | None
    """Critical value at `alpha`."""
    met: bool | None
    """True where p >= alpha: nothing speaks against the assumption, which does not show that it holds."""
    group: str | None = None
    """The group that the statistic points at, if it does."""


@dataclass(frozen=True, slots=True, kw_only=True)
class GroupSpread:
    """One group's variance against the pooled variance of the rest."""

    label: str
    """Name of the group."""
    statistic: float | None
    """Variance over the pooled variance of the others; None where the others have none."""
    df_group: float
    """n - 1 of the group."""
    df_rest: float
    """Pooled degrees of freedom of the others."""
    p: float
    """P(F at least as large), one-sided, not adjusted."""
    exceeds: bool
    """Whether p is below alpha / k."""


@dataclass(frozen=True, slots=True, kw_only=True)
class SpreadConflict:
    """Whether the data contradict a declared similar spread."""

    groups: tuple[GroupSpread, ...]
    """Each group, input order."""
    alpha: float
    """Error rate of the verdict for all groups together."""
    conflict: bool
    """Whether any group exceeds the rest."""


def brown_forsythe(
    labels: Sequence[str], values: Sequence[Sequence[float]], alpha: float = 0.05
) -> AssumptionCheck:
    """Check equal spread by the analysis of variance of |value - group median|.

    This is the median-centred form of Levene's test [1]_, not the test of means that bears the same names.

    Parameters
    ----------
    labels : sequence of str, length k >= 2
        Names of the groups.
    values : sequence of k sequences of float
        Results in u, each group with n >= 2.
    alpha : float in (0, 1)
        Level of threshold and verdict.

    Returns
    -------
    AssumptionCheck
        F on (k - 1, N - k).

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        k < 2 or some n < 2; deviations that do not vary within any group (always so where every n is 2).

    References
    ----------
    .. [1] Brown & Forsythe (1974), J. Am. Stat. Assoc. 69, 364-367. doi:10.1080/01621459.1974.10482955
    """
    deviations = []
    for label, group in zip(labels, values, strict=True):
        median = summarize(label, group).median
        deviations.append(summarize(label, [abs(value - median) for value in group]))
    result = anova(deviations)
    return AssumptionCheck(
        name="brown_forsythe",
        statistic=result.statistic,
        df=(result.df_between, result.df_within),
        p=result.p,
        threshold=f_upper_quantile(alpha, result.df_between, result.df_within),
        met=result.p >= alpha,
    )


def bartlett(groups: Sequence[GroupSummary], alpha: float = 0.05) -> AssumptionCheck:
    """Check equal variances by Bartlett's corrected likelihood ratio; assumes normal results.

    Parameters
    ----------
    groups : sequence of GroupSummary, length k >= 2
        Each with n >= 2 and variance > 0.
    alpha : float in (0, 1)
        Level of threshold and verdict.

    Returns
    -------
    AssumptionCheck
        Chi-squared on k - 1 df; 0 with p = 1 where all variances are equal.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        k < 2 or some n < 2; a group without scatter.

    References
    ----------
    .. [1] Bartlett (1937), Proc. R. Soc. Lond. A 160, 268-282. doi:10.1098/rspa.1937.0109
    """
    require_groups(groups, smallest_n=2, scatter=True)
    k = len(groups)
    df = math.fsum(g.n - 1 for g in groups)
    largest = max(g.variance for g in groups)
    relative = [g.variance / largest for g in groups]
    pooled = math.fsum((g.n - 1) * v for g, v in zip(groups, relative, strict=True)) / df
    likelihood = math.fsum((g.n - 1) * math.log(pooled / v) for g, v in zip(groups, relative, strict=True))
    correction = 1.0 + (math.fsum(1.0 / (g.n - 1) for g in groups) - 1.0 / df) / (3.0 * (k - 1))
    statistic = max(likelihood, 0.0) / correction
    p = chi_squared_upper(statistic, k - 1)
    return AssumptionCheck(
        name="bartlett",
        statistic=statistic,
        df=(float(k - 1),),
        p=p,
        threshold=chi_squared_upper_quantile(alpha, k - 1),
        met=p >= alpha,
    )


def cochran_c(groups: Sequence[GroupSummary], alpha: float = 0.05) -> AssumptionCheck:
    """Check whether the largest variance is too large a share of all, Cochran's C.

    Parameters
    ----------
    groups : sequence of GroupSummary, length k >= 2
        Each with n >= 2, some variance > 0.
    alpha : float in (0, 1)
        Level of threshold and verdict.

    Returns
    -------
    AssumptionCheck
        The share df_j s_j**2 / sum(df s**2) of the group whose share is the least likely: for equal sizes
        Cochran's C [1]_, else its form for unequal sizes [2]_. `p` is the Bonferroni bound over the groups.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        k < 2 or some n < 2; no scatter at all.

    References
    ----------
    .. [1] Cochran (1941), Ann. Eugenics 11, 47-52. doi:10.1111/j.1469-1809.1941.tb02271.x
    .. [2] 't Lam (2010), Anal. Chim. Acta 659, 68-84. doi:10.1016/j.aca.2009.11.032
    """
    spreads = spread_conflict(groups, alpha)
    k = len(groups)
    worst = min(spreads.groups, key=lambda g: (g.p, -(g.statistic or math.inf)))
    f = math.inf if worst.statistic is None else worst.statistic
    ratio = worst.df_rest / worst.df_group
    critical = f_upper_quantile(alpha / k, worst.df_group, worst.df_rest)
    p = min(1.0, k * worst.p)
    return AssumptionCheck(
        name="cochran_c",
        statistic=1.0 / (1.0 + ratio / f) if f > 0.0 else 0.0,
        df=(worst.df_group, worst.df_rest),
        p=p,
        threshold=1.0 / (1.0 + ratio / critical),
        met=p >= alpha,
        group=worst.label,
    )


def spread_conflict(groups: Sequence[GroupSummary], alpha: float = 0.05) -> SpreadConflict:
    """Ask whether one group's variance exceeds the pooled variance of the rest, F at p < alpha / k.

    Parameters
    ----------
    groups : sequence of GroupSummary, length k >= 2
        Each with n >= 2, some variance > 0.
    alpha : float in (0, 1)
        Error rate of the verdict if all variances are equal.

    Returns
    -------
    SpreadConflict
        F, df, p and verdict of each group, and of all.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        k < 2 or some n < 2; no scatter at all.
    """
    require_groups(groups, smallest_n=2, scatter=False)
    largest = max(g.variance for g in groups)
    if largest <= 0.0:
        raise DegenerateDataError("No group has any scatter; spreads cannot be compared.")
    k = len(groups)
    rows = []
    for group in groups:
        df_rest = math.fsum(g.n - 1 for g in groups if g is not group)
        rest = math.fsum((g.n - 1) * (g.variance / largest) for g in groups if g is not group) / df_rest
        statistic = (group.variance / largest) / rest if rest > 0.0 else None
        p = 0.0 if statistic is None else f_upper(statistic, group.n - 1, df_rest)
        rows.append(
            GroupSpread(
                label=group.label,
                statistic=statistic,
                df_group=float(group.n - 1),
                df_rest=df_rest,
                p=p,
                exceeds=p < alpha / k,
            )
        )
    return SpreadConflict(groups=tuple(rows), alpha=alpha, conflict=any(row.exceeds for row in rows))


def spread_ratio_upper_limit(groups: Sequence[GroupSummary], confidence: float = 0.95) -> float:
    """Return the simultaneous upper limit of the largest ratio of standard deviations of groups.

    See `spread_ratio_upper_limit_of`, which takes degrees of freedom and variances.
    """
    return spread_ratio_upper_limit_of([g.n - 1.0 for g in groups], [g.variance for g in groups], confidence)


def spread_ratio_upper_limit_of(
    dfs: Sequence[float], variances: Sequence[float], confidence: float = 0.95
) -> float:
    """Return the simultaneous upper limit of the largest ratio of standard deviations.

    Parameters
    ----------
    dfs : sequence of float > 0, length k >= 2
        Degrees of freedom of each variance; history and this export may be pooled before.
    variances : sequence of k floats >= 0, in u**2
        Variance estimates.
    confidence : float in (0, 1)
        That every one of the k(k-1) ordered ratios lies below its own limit.

    Returns
    -------
    float
        At least 1, dimensionless; infinite where a variance is 0.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        k < 2 or a df that is not positive; a variance that is not finite, or a confidence outside (0, 1).

    Notes
    -----
    sigma_i / sigma_j <= (s_i / s_j) sqrt(F(1 - (1 - confidence) / (k (k - 1)); df_j, df_i)) for each
    ordered pair.
    """
    if len(dfs) < 2 or min(dfs) <= 0.0:
        raise TooFewObservationsError("A spread ratio needs two variances with degrees of freedom.")
    if not (0.0 < confidence < 1.0 and all(math.isfinite(v) and v >= 0.0 for v in variances)):
        raise DegenerateDataError("A spread ratio needs finite variances and a confidence between 0 and 1.")
    if min(variances) <= 0.0:
        return math.inf
    k = len(dfs)
    level = (1.0 - confidence) / (k * (k - 1))
    limit = 1.0
    for i, (df_i, v_i) in enumerate(zip(dfs, variances, strict=True)):
        for j, (df_j, v_j) in enumerate(zip(dfs, variances, strict=True)):
            if i != j:
                limit = max(limit, math.sqrt(v_i / v_j) * math.sqrt(f_upper_quantile(level, df_j, df_i)))
    return limit
