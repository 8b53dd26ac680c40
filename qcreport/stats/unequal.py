"""All pairs when variances may differ: Games-Howell, Dunnett's T3 and C, Tamhane's T2."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from qcreport.stats.comparison import (
    PairwiseComparison,
    PosthocResult,
    all_pairs,
    require_alpha,
    sidak,
    sidak_level,
)
from qcreport.stats.distributions import (
    maximum_modulus_isf,
    maximum_modulus_sf,
    studentized_range_isf,
    studentized_range_sf,
)
from qcreport.stats.distributions.rows import Array
from qcreport.stats.distributions.student import t_two_sided, t_two_sided_quantile
from qcreport.stats.summary import GroupSummary, mean_difference, require_groups
from qcreport.stats.weighted import level_at_critical_value, weighted_critical_value

_SQRT_2 = math.sqrt(2.0)


@dataclass(frozen=True, slots=True, kw_only=True)
class WelchPair:
    """Two groups compared with their own variances, results in u."""

    first: GroupSummary
    """The first group."""
    second: GroupSummary
    """The second group."""
    difference: float
    """Difference of means, first minus second, in u."""
    se: float
    """sqrt(s1**2/n1 + s2**2/n2), in u."""
    df: float
    """Welch-Satterthwaite degrees of freedom."""

    @property
    def statistic(self) -> float:
        """Welch's t, dimensionless."""
        return self.difference / self.se


def welch_pair(first: GroupSummary, second: GroupSummary) -> WelchPair:
    """Return difference, standard error and Welch-Satterthwaite df of two groups with scatter.

    Notes
    -----
    The df of [1]_, [2]_ from the shares of the squared standard error, so that the unit does not matter; it
    lies between the smaller n - 1 and n1 + n2 - 2.

    References
    ----------
    .. [1] Satterthwaite (1946), Biometrics Bulletin 2(6), 110-114. doi:10.2307/3002019
    .. [2] Welch (1947), Biometrika 34, 28-35. doi:10.1093/biomet/34.1-2.28
    """
    a, b = first.variance / first.n, second.variance / second.n
    share = a / (a + b)
    df = 1.0 / (share * share / (first.n - 1) + (1.0 - share) ** 2 / (second.n - 1))
    return WelchPair(
        first=first,
        second=second,
        difference=mean_difference(first, second),
        se=math.sqrt(a + b),
        df=min(max(df, min(first.n, second.n) - 1.0), first.n + second.n - 2.0),
    )


def games_howell(groups: Sequence[GroupSummary], *, alpha: float) -> PosthocResult:
    """Compare all pairs of means when group variances may differ (Games-Howell).

    Assumes independent, normal results in each group; not equal variances, not equal n.

    Parameters
    ----------
    groups : sequence of GroupSummary, length k >= 2
        Each with n >= 2; mean in unit u, variance > 0 in u**2.
    alpha : float in (0, 1), dimensionless
        Family-wise error rate.

    Returns
    -------
    PosthocResult
        k(k-1)/2 comparisons, input order, i < j.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        k < 2 or some n < 2; a zero variance or a value that is not finite.

    Notes
    -----
    Studentized range on the Welch-Satterthwaite df of each pair, [1]_, p. 116. For k = 2 equal to Welch's t
    test.

    References
    ----------
    .. [1] Games & Howell (1976), J. Educ. Stat. 1(2), 113-125. doi:10.3102/10769986001002113

    Examples
    --------
    >>> from qcreport.stats.summary import summarize
    >>> a, b = summarize("A", [10.1, 9.8, 10.4, 10.0]), summarize("B", [10.9, 11.6, 10.2, 11.9])
    >>> result = games_howell([a, b, summarize("C", [10.3, 10.2, 10.5, 10.4])], alpha=0.05)
    >>> round(result.comparisons[0].p, 4)
    0.122
    """
    k = len(groups)
    return _by_pair_df(
        "games_howell",
        groups,
        alpha,
        tail=lambda t, df: studentized_range_sf(_SQRT_2 * t, k, df),
        quantile=lambda df: studentized_range_isf(alpha, k, df) / _SQRT_2,
    )


def dunnett_t3(groups: Sequence[GroupSummary], *, alpha: float) -> PosthocResult:
    """Compare all pairs of means when variances may differ, safe in small groups (Dunnett's T3).

    Parameters
    ----------
    groups, alpha
        As for `games_howell`.

    Returns
    -------
    PosthocResult
        k(k-1)/2 comparisons, input order, i < j.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        As for `games_howell`.

    Notes
    -----
    Studentized maximum modulus of k(k-1)/2 comparisons on the Welch-Satterthwaite df of each pair [1]_.

    References
    ----------
    .. [1] Dunnett (1980), J. Am. Stat. Assoc. 75, 796-800. doi:10.1080/01621459.1980.10477552
    """
    m = max(len(all_pairs(len(groups))), 1)
    return _by_pair_df(
        "dunnett_t3",
        groups,
        alpha,
        tail=lambda t, df: maximum_modulus_sf(t, m, df),
        quantile=lambda df: maximum_modulus_isf(alpha, m, df),
    )


def tamhane_t2(groups: Sequence[GroupSummary], *, alpha: float) -> PosthocResult:
    """Compare all pairs of means when variances may differ (Tamhane's T2).

    Parameters
    ----------
    groups, alpha
        As for `games_howell`.

    Returns
    -------
    PosthocResult
        k(k-1)/2 comparisons, input order, i < j.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        As for `games_howell`.

    Notes
    -----
    Welch's t at Sidak's level for k(k-1)/2 comparisons [1]_.

    References
    ----------
    .. [1] Tamhane (1979), J. Am. Stat. Assoc. 74, 471-480. doi:10.1080/01621459.1979.10482541
    """
    m = max(len(all_pairs(len(groups))), 1)
    return _by_pair_df(
        "tamhane_t2",
        groups,
        alpha,
        tail=lambda t, df: np.array([sidak(t_two_sided(x, nu), m) for x, nu in zip(t, df, strict=True)]),
        quantile=lambda df: np.array([t_two_sided_quantile(sidak_level(alpha, m), nu) for nu in df]),
    )


def dunnett_c(groups: Sequence[GroupSummary], *, alpha: float) -> PosthocResult:
    """Compare all pairs of means when variances may differ, strict in tiny groups (Dunnett's C).

    Parameters
    ----------
    groups, alpha
        As for `games_howell`.

    Returns
    -------
    PosthocResult
        k(k-1)/2 comparisons; `df` is None, `p` the level at which |statistic| meets its critical value.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        As for `games_howell`.

    Notes
    -----
    Studentized range quantiles of the two groups on n - 1 df, weighted by s**2/n [1]_.

    References
    ----------
    .. [1] Dunnett (1980), J. Am. Stat. Assoc. 75, 796-800. doi:10.1080/01621459.1980.10477552
    """
    require_alpha(alpha)
    require_groups(groups, smallest_n=2, scatter=True)
    k = len(groups)
    pairs = [welch_pair(groups[i], groups[j]) for i, j in all_pairs(k)]

    def tail(t: Array, df: Array) -> Array:
        return np.asarray(studentized_range_sf(_SQRT_2 * t, k, df))

    def quantile(p: Array, df: Array) -> Array:
        return np.asarray(studentized_range_isf(p, k, df) / _SQRT_2)

    variances = np.array([[p.first.variance / p.first.n, p.second.variance / p.second.n] for p in pairs])
    dfs = np.array([[p.first.n - 1.0, p.second.n - 1.0] for p in pairs])
    t = np.abs([p.statistic for p in pairs])
    critical = weighted_critical_value(np.full(t.shape, alpha), variances, dfs, quantile)
    levels = level_at_critical_value(t, variances, dfs, tail)
    return _result("dunnett_c", alpha, pairs, levels, critical, own_df=False)


def _by_pair_df(
    procedure: str,
    groups: Sequence[GroupSummary],
    alpha: float,
    *,
    tail: Callable[[Array, Array], Array],
    quantile: Callable[[Array], Array],
) -> PosthocResult:
    """Compare all pairs by a law that depends on each pair's Welch-Satterthwaite df."""
    require_alpha(alpha)
    require_groups(groups, smallest_n=2, scatter=True)
    pairs = [welch_pair(groups[i], groups[j]) for i, j in all_pairs(len(groups))]
    df = np.array([p.df for p in pairs])
    t = np.abs([p.statistic for p in pairs])
    return _result(procedure, alpha, pairs, tail(t, df), quantile(df), own_df=True)


def _result(
    procedure: str, alpha: float, pairs: Sequence[WelchPair], p: Array, critical: Array, *, own_df: bool
) -> PosthocResult:
    comparisons = tuple(
        PairwiseComparison(
            first=pair.first.label,
            second=pair.second.label,
            difference=pair.difference,
            se=pair.se,
            statistic=pair.statistic,
            df=pair.df if own_df else None,
            critical_value=float(c),
            p=float(tail),
            lower=pair.difference - float(c) * pair.se,
            upper=pair.difference + float(c) * pair.se,
        )
        for pair, tail, c in zip(pairs, p, critical, strict=True)
    )
    return PosthocResult(
        procedure=procedure, alpha=alpha, comparisons=comparisons, critical_value=None, hsd=None
    )
