"""All pairs with one pooled variance: Tukey's HSD and its form for unequal sizes."""

from __future__ import annotations

import math
from collections.abc import Sequence
from functools import lru_cache

import numpy as np

from qcreport.errors import DegenerateDataError
from qcreport.stats.comparison import PairwiseComparison, PosthocResult, all_pairs, require_alpha
from qcreport.stats.distributions import studentized_range_isf, studentized_range_sf
from qcreport.stats.one_way import anova
from qcreport.stats.summary import GroupSummary, mean_difference

_SQRT_2 = math.sqrt(2.0)


def tukey_hsd(groups: Sequence[GroupSummary], *, alpha: float) -> PosthocResult:
    """Compare all pairs of means of equally large groups with one variance (Tukey's HSD).

    Assumes independent, normal results with one variance and equal sizes.

    Parameters
    ----------
    groups : sequence of GroupSummary, length k >= 2
        All of one size n >= 2, in u.
    alpha : float in (0, 1), dimensionless
        Family-wise error rate.

    Returns
    -------
    PosthocResult
        k(k-1)/2 comparisons; `hsd` = q(alpha; k, k(n-1)) sqrt(ms_within / n), in u.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        k < 2 or n < 2; sizes that differ, or no scatter within any group.

    Notes
    -----
    No significant F is needed before.

    References
    ----------
    .. [1] Tukey (1953), The problem of multiple comparisons; in The Collected Works VIII, Chapman & Hall,
    1994.

    Examples
    --------
    >>> from qcreport.stats.summary import summarize
    >>> a, b = summarize("A", [10.1, 9.8, 10.4, 10.0]), summarize("B", [10.9, 11.6, 10.2, 11.9])
    >>> result = tukey_hsd([a, b, summarize("C", [10.3, 10.2, 10.5, 10.4])], alpha=0.05)
    >>> round(result.comparisons[0].p, 4), round(result.hsd, 4)
    (0.0245, 0.9231)
    """
    if len({g.n for g in groups}) > 1:
        raise DegenerateDataError("Tukey's HSD needs groups of one size; use Tukey-Kramer.")
    return _tukey("tukey_hsd", groups, alpha)


def tukey_kramer(groups: Sequence[GroupSummary], *, alpha: float) -> PosthocResult:
    """Compare all pairs of means with one variance and any sizes (Tukey-Kramer).

    Assumes independent, normal results with one variance. The family-wise error rate is at most alpha for
    any sizes [3]_; with equal sizes it is Tukey's HSD.

    Parameters
    ----------
    groups : sequence of GroupSummary, length k >= 2
        In u; at least one has n >= 2.
    alpha : float in (0, 1), dimensionless
        Family-wise error rate.

    Returns
    -------
    PosthocResult
        k(k-1)/2 comparisons, se = sqrt(ms_within (1/n_i + 1/n_j)); `hsd` only where sizes are equal.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        k < 2 or no df within groups; no scatter within any group.

    References
    ----------
    .. [1] Tukey (1953), The problem of multiple comparisons.
    .. [2] Kramer (1956), Biometrics 12(3), 307-310. doi:10.2307/3001469
    .. [3] Hayter (1984), Ann. Stat. 12(1), 61-75. doi:10.1214/aos/1176346392
    """
    return _tukey("tukey_kramer", groups, alpha)


@lru_cache(maxsize=1024)
def critical_range(alpha: float, k: int, df: float) -> float:
    """Return q(alpha; k, df); tables of one design share it."""
    return float(studentized_range_isf(alpha, k, df))


def _tukey(procedure: str, groups: Sequence[GroupSummary], alpha: float) -> PosthocResult:
    require_alpha(alpha)
    overall = anova(groups)
    k, df = len(groups), overall.df_within
    pairs = all_pairs(k)
    sds = [math.sqrt(overall.ms_within) * math.sqrt(1.0 / groups[i].n + 1.0 / groups[j].n) for i, j in pairs]
    differences = [mean_difference(groups[i], groups[j]) for i, j in pairs]
    statistics = [d / se for d, se in zip(differences, sds, strict=True)]
    p = studentized_range_sf(_SQRT_2 * np.abs(statistics), k, df)
    q = critical_range(alpha, k, df)
    critical = q / _SQRT_2
    comparisons = tuple(
        PairwiseComparison(
            first=groups[i].label,
            second=groups[j].label,
            difference=difference,
            se=se,
            statistic=statistic,
            df=df,
            critical_value=critical,
            p=float(tail),
            lower=difference - critical * se,
            upper=difference + critical * se,
        )
        for (i, j), difference, se, statistic, tail in zip(
            pairs, differences, sds, statistics, p, strict=True
        )
    )
    equal = len({g.n for g in groups}) == 1
    return PosthocResult(
        procedure=procedure,
        alpha=alpha,
        comparisons=comparisons,
        critical_value=critical,
        hsd=q * math.sqrt(overall.ms_within) / math.sqrt(groups[0].n) if equal else None,
    )
