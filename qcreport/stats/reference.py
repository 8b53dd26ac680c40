"""Each group with one reference: Dunnett's exact procedure and two forms for unequal variances."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np

from qcreport.errors import TooFewObservationsError
from qcreport.stats.comparison import PairwiseComparison, PosthocResult, require_alpha, sidak, sidak_level
from qcreport.stats.distributions import many_to_one_isf, many_to_one_sf
from qcreport.stats.distributions.rows import Array
from qcreport.stats.distributions.student import t_two_sided, t_two_sided_quantile, t_upper, t_upper_quantile
from qcreport.stats.one_way import anova
from qcreport.stats.summary import GroupSummary, mean_difference, require_groups
from qcreport.stats.unequal import WelchPair, welch_pair
from qcreport.stats.weighted import level_at_critical_value, weighted_critical_value

Direction = Literal["both", "lower", "higher"]


@dataclass(frozen=True, slots=True, kw_only=True)
class _Row:
    """One group against the reference before its interval is drawn."""

    label: str
    difference: float
    se: float
    df: float | None
    critical: float
    p: float


def dunnett(
    groups: Sequence[GroupSummary], *, reference: int, alpha: float, direction: Direction = "both"
) -> PosthocResult:
    """Compare each group with a reference, one variance, any sizes (Dunnett).

    Assumes independent, normal results with one variance.

    Parameters
    ----------
    groups : sequence of GroupSummary, length k >= 2
        The reference among them, in u.
    reference : int
        Position of the reference, 0 to k - 1.
    alpha : float in (0, 1), dimensionless
        Family-wise error rate.
    direction : {"both", "lower", "higher"}
        Whether a group may differ, be lower or be higher than the reference.

    Returns
    -------
    PosthocResult
        k - 1 comparisons, group minus reference, in input order. A one-sided interval is open towards its
        direction.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        k < 2, no such reference or no df within groups; no scatter within any group.

    Notes
    -----
    Exact for any sizes: the correlations are products, so that one integral gives the joint tail.

    References
    ----------
    .. [1] Dunnett (1955), J. Am. Stat. Assoc. 50, 1096-1121. doi:10.1080/01621459.1955.10501294
    .. [2] Dunnett (1964), Biometrics 20(3), 482-491. doi:10.2307/2528490

    Examples
    --------
    >>> from qcreport.stats.summary import summarize
    >>> c = summarize("C", [7.40, 8.50, 7.20, 8.24, 9.84, 8.32])
    >>> a, b = summarize("A", [9.76, 8.80, 7.68, 9.36]), summarize("B", [12.80, 9.68, 12.16, 9.20, 10.55])
    >>> round(dunnett([c, a, b], reference=0, alpha=0.05).comparisons[1].p, 6)
    0.005825
    """
    require_alpha(alpha)
    base, others = _split(groups, reference)
    overall = anova(groups)
    sizes = [g.n for g in others]
    two_sided = direction == "both"
    differences = [mean_difference(g, base) for g in others]
    sds = [math.sqrt(overall.ms_within) * math.sqrt(1.0 / base.n + 1.0 / g.n) for g in others]
    t = _towards(np.array([d / se for d, se in zip(differences, sds, strict=True)]), direction)
    p = many_to_one_sf(t, base.n, sizes, overall.df_within, two_sided)
    critical = float(many_to_one_isf(alpha, base.n, sizes, overall.df_within, two_sided))
    rows = [
        _Row(label=g.label, difference=d, se=se, df=overall.df_within, critical=critical, p=float(tail))
        for g, d, se, tail in zip(others, differences, sds, p, strict=True)
    ]
    return _result("dunnett", base, alpha, rows, direction, critical)


def dunnett_unequal(
    groups: Sequence[GroupSummary], *, reference: int, alpha: float, direction: Direction = "both"
) -> PosthocResult:
    """Compare each group with a reference when variances may differ: Welch's t at Sidak's level.

    The many-to-one form of Tamhane's T2; for groups of at least ten.

    Parameters
    ----------
    groups, reference, alpha, direction
        As for `dunnett`; each group with n >= 2 and variance > 0.

    Returns
    -------
    PosthocResult
        k - 1 comparisons, group minus reference, each on its Welch-Satterthwaite df.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        k < 2, no such reference or some n < 2; a group without scatter.

    References
    ----------
    .. [1] Tamhane (1979), J. Am. Stat. Assoc. 74, 471-480. doi:10.1080/01621459.1979.10482541
    .. [2] Sidak (1967), J. Am. Stat. Assoc. 62, 626-633. doi:10.1080/01621459.1967.10482935
    """
    base, pairs = _welch_pairs(groups, reference, alpha)
    m = len(pairs)
    level = sidak_level(alpha, m)
    rows = [
        _Row(
            label=pair.first.label,
            difference=pair.difference,
            se=pair.se,
            df=pair.df,
            critical=_quantile(level, pair.df, direction),
            p=sidak(_tail(pair.statistic, pair.df, direction), m),
        )
        for pair in pairs
    ]
    return _result("dunnett_unequal", base, alpha, rows, direction, None)


def dunnett_weighted(
    groups: Sequence[GroupSummary], *, reference: int, alpha: float, direction: Direction = "both"
) -> PosthocResult:
    """Compare each group with a reference when variances may differ, safe in small groups.

    Welch's t against the mean of the two groups' own t quantiles on n - 1 df at Sidak's level, weighted by
    s**2/n [1]_.

    Parameters
    ----------
    groups, reference, alpha, direction
        As for `dunnett_unequal`.

    Returns
    -------
    PosthocResult
        k - 1 comparisons; `df` is None, `p` the level at which the statistic meets its critical value.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        As for `dunnett_unequal`.

    References
    ----------
    .. [1] Cochran & Cox (1957), Experimental Designs, 2nd ed., Wiley, section 4.14.
    .. [2] Sidak (1967), J. Am. Stat. Assoc. 62, 626-633. doi:10.1080/01621459.1967.10482935
    """
    base, pairs = _welch_pairs(groups, reference, alpha)
    m = len(pairs)

    def tail(t: Array, df: Array) -> Array:
        return np.array([_tail_from(x, nu, direction) for x, nu in zip(t, df, strict=True)])

    def quantile(p: Array, df: Array) -> Array:
        return np.array([_quantile(float(x), float(nu), direction) for x, nu in zip(p, df, strict=True)])

    variances = np.array([[p.first.variance / p.first.n, p.second.variance / p.second.n] for p in pairs])
    dfs = np.array([[p.first.n - 1.0, p.second.n - 1.0] for p in pairs])
    t = _towards(np.array([p.statistic for p in pairs]), direction)
    critical = weighted_critical_value(np.full(m, sidak_level(alpha, m)), variances, dfs, quantile)
    levels = level_at_critical_value(np.abs(t), variances, dfs, tail)
    if direction != "both":  # by symmetry a statistic on the other side has the complementary level
        levels = np.where(t == 0.0, 0.5, np.where(t > 0.0, levels, 1.0 - levels))
    rows = [
        _Row(
            label=pair.first.label,
            difference=pair.difference,
            se=pair.se,
            df=None,
            critical=float(c),
            p=sidak(float(level), m),
        )
        for pair, c, level in zip(pairs, critical, levels, strict=True)
    ]
    return _result("dunnett_weighted", base, alpha, rows, direction, None)


def _split(groups: Sequence[GroupSummary], reference: int) -> tuple[GroupSummary, list[GroupSummary]]:
    if not 0 <= reference < len(groups):
        raise TooFewObservationsError(f"There is no group at position {reference} to serve as the reference.")
    return groups[reference], [g for position, g in enumerate(groups) if position != reference]


def _welch_pairs(
    groups: Sequence[GroupSummary], reference: int, alpha: float
) -> tuple[GroupSummary, list[WelchPair]]:
    require_alpha(alpha)
    require_groups(groups, smallest_n=2, scatter=True)
    base, others = _split(groups, reference)
    return base, [welch_pair(g, base) for g in others]


def _towards(t: Array, direction: Direction) -> Array:
    """Return statistics of which large values speak for the direction."""
    if direction == "both":
        return np.abs(t)
    return t if direction == "higher" else -t


def _tail(t: float, df: float, direction: Direction) -> float:
    return _tail_from(float(_towards(np.array(t), direction)), df, direction)


def _tail_from(t: float, df: float, direction: Direction) -> float:
    return t_two_sided(t, df) if direction == "both" else t_upper(t, df)


def _quantile(level: float, df: float, direction: Direction) -> float:
    return t_two_sided_quantile(level, df) if direction == "both" else t_upper_quantile(level, df)


def _result(
    procedure: str,
    base: GroupSummary,
    alpha: float,
    rows: Sequence[_Row],
    direction: Direction,
    critical: float | None,
) -> PosthocResult:
    comparisons = tuple(
        PairwiseComparison(
            first=row.label,
            second=base.label,
            difference=row.difference,
            se=row.se,
            statistic=row.difference / row.se,
            df=row.df,
            critical_value=row.critical,
            p=row.p,
            lower=None if direction == "lower" else row.difference - row.critical * row.se,
            upper=None if direction == "higher" else row.difference + row.critical * row.se,
        )
        for row in rows
    )
    return PosthocResult(
        procedure=procedure, alpha=alpha, comparisons=comparisons, critical_value=critical, hsd=None
    )
