"""Standardised sizes of effects with intervals: Hedges' g for a pair, omega squared for all groups."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

from scipy import special

from qcreport.errors import DegenerateDataError
from qcreport.stats.comparison import require_alpha
from qcreport.stats.distributions.student import chi_squared_upper_quantile, far_noncentrality, is_far
from qcreport.stats.one_way import AnovaResult
from qcreport.stats.summary import GroupSummary, mean_difference, require_groups

_FAR_NONCENTRALITY = 1e8
"""From here the limits of omega squared need no series, which get slow; they are right to 1e-14."""


@dataclass(frozen=True, slots=True, kw_only=True)
class EffectSize:
    """A dimensionless effect size."""

    name: str
    """`hedges_g` or `omega_squared`."""
    value: float
    """Estimate; omega squared can be slightly negative."""
    lower: float
    """Lower confidence limit."""
    upper: float
    """Upper confidence limit."""
    confidence: float
    """Confidence of the two limits together."""


def hedges_g(first: GroupSummary, second: GroupSummary, confidence: float = 0.95) -> EffectSize:
    """Return the difference of two means in pooled standard deviations, corrected for bias (Hedges' g).

    Parameters
    ----------
    first, second : GroupSummary
        n1 + n2 >= 3, some scatter; in one unit.
    confidence : float in (0, 1)
        Confidence of the limits, which invert the noncentral t.

    Returns
    -------
    EffectSize

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        No df; no scatter.

    References
    ----------
    .. [1] Hedges (1981), J. Educ. Stat. 6(2), 107-128. doi:10.3102/10769986006002107
    """
    require_alpha(confidence)
    require_groups([first, second], smallest_n=1, scatter=False)
    df = first.n + second.n - 2
    pooled = ((first.n - 1) * first.variance + (second.n - 1) * second.variance) / max(df, 1)
    if df < 1 or pooled <= 0.0:
        raise DegenerateDataError("An effect in standard deviations needs scatter within the groups.")
    size = math.sqrt(first.n * second.n / (first.n + second.n))
    t = mean_difference(first, second) / math.sqrt(pooled) * size
    correction = (
        math.exp(float(special.gammaln(0.5 * df) - special.gammaln(0.5 * (df - 1)))) if df > 1 else 0.0
    )
    correction *= math.sqrt(2.0 / df)
    tail = 0.5 * (1.0 - confidence)
    return EffectSize(
        name="hedges_g",
        value=correction * t / size,
        lower=correction * _noncentral_t_limit(t, df, 1.0 - tail) / size,
        upper=correction * _noncentral_t_limit(t, df, tail) / size,
        confidence=confidence,
    )


def omega_squared(result: AnovaResult, confidence: float = 0.90) -> EffectSize:
    """Return the share of variance between groups, omega squared, with limits from the noncentral F.

    Parameters
    ----------
    result : AnovaResult of `anova`
        One-way analysis of variance.
    confidence : float in (0, 1)
        Confidence of the two limits; 0.90 excludes 0 exactly when F is significant at 0.05.

    Returns
    -------
    EffectSize
        Limits lambda / (lambda + N) for the limits lambda of the noncentrality.

    Raises
    ------
    DegenerateDataError
        A confidence outside (0, 1).

    References
    ----------
    .. [1] Hays (1963), Statistics for Psychologists, Holt, Rinehart & Winston.
    .. [2] Steiger (2004), Psychol. Methods 9(2), 164-182. doi:10.1037/1082-989X.9.2.164
    """
    require_alpha(confidence)
    total = result.ss_between + result.ss_within
    value = (result.ss_between - result.df_between * result.ms_within) / (total + result.ms_within)
    n = result.df_between + result.df_within + 1.0
    tail = 0.5 * (1.0 - confidence)
    lower, upper = (_noncentral_f_limit(result, level) for level in (1.0 - tail, tail))
    return EffectSize(
        name="omega_squared",
        value=value,
        lower=lower / (lower + n),
        upper=upper / (upper + n),
        confidence=confidence,
    )


def _noncentral_t_limit(t: float, df: float, level: float) -> float:
    """Return the noncentrality at which P(T <= t) = level."""
    if is_far(abs(t), df):
        return far_noncentrality(t, df, level) if t > 0.0 else -far_noncentrality(-t, df, 1.0 - level)
    return _crossing(lambda nc: _noncentral_t(t, df, nc) - level, -abs(t) - 10.0, abs(t) + 10.0)


def _noncentral_t(t: float, df: float, nc: float) -> float:
    """Return P(T <= t) for noncentral t, for either sign of the noncentrality."""
    return float(special.nctdtr(df, nc, t)) if nc >= 0.0 else 1.0 - float(special.nctdtr(df, -nc, -t))


def _noncentral_f_limit(result: AnovaResult, level: float) -> float:
    """Return the noncentrality at which P(F <= f) = level, 0 where even no noncentrality gives less."""
    between, within, f = result.df_between, result.df_within, result.statistic

    def excess(nc: float) -> float:
        return float(special.ncfdtr(between, within, nc, f)) - level

    if between * f >= _FAR_NONCENTRALITY:  # the noncentral chi-squared is as good as its noncentrality
        return between * (f * chi_squared_upper_quantile(level, within) / within - 1.0)
    if excess(0.0) <= 0.0:
        return 0.0
    return _crossing(excess, 0.0, between * f + 50.0)


def _crossing(excess: Callable[[float], float], low: float, high: float) -> float:
    """Return where a falling function crosses 0; the bracket is widened as needed."""
    while excess(high) > 0.0:
        high += 2.0 * (high - low)
    while excess(low) < 0.0:
        low -= 2.0 * (high - low)
    while (middle := 0.5 * (low + high)) not in (low, high):
        low, high = (middle, high) if excess(middle) > 0.0 else (low, middle)
    return middle
