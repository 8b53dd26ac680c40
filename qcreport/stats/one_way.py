"""Overall tests of equal means: analysis of variance, and Welch's form for unequal variances."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from qcreport.errors import DegenerateDataError, TooFewObservationsError
from qcreport.stats.distributions.student import f_upper
from qcreport.stats.summary import GroupSummary, mean_difference, require_groups

_MOST_DIGITS = 15


@dataclass(frozen=True, slots=True, kw_only=True)
class AnovaResult:
    """An overall test of equal means, results in the unit u."""

    procedure: str
    """`anova` or `welch`."""
    statistic: float
    """F, dimensionless."""
    df_between: float
    """Numerator degrees of freedom, k - 1."""
    df_within: float
    """Denominator degrees of freedom."""
    p: float
    """P(F at least as large) if all means are equal."""
    ss_between: float
    """Sum of squares between groups, in u**2."""
    ss_within: float
    """Sum of squares within groups, in u**2."""
    ms_between: float
    """Mean square between groups, in u**2."""
    ms_within: float
    """Mean square within groups, the pooled variance, in u**2."""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Squares:
    """The decomposition of the sum of squares."""

    between: float
    within: float
    df_between: int
    df_within: int


def anova(groups: Sequence[GroupSummary]) -> AnovaResult:
    """Test equal means by the one-way analysis of variance.

    Assumes independent, normal results with one variance; any sizes.

    Parameters
    ----------
    groups : sequence of GroupSummary, length k >= 2
        In unit u; at least one has n >= 2.

    Returns
    -------
    AnovaResult
        F on (k - 1, N - k).

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        k < 2 or N = k; no scatter within any group.

    References
    ----------
    .. [1] Fisher (1925), Statistical Methods for Research Workers, ch. VII.

    Examples
    --------
    >>> from qcreport.stats.summary import summarize
    >>> a = summarize("1", [6.9, 5.4, 5.8, 4.6, 4.0])
    >>> b = summarize("2", [8.3, 6.8, 7.8, 9.2, 6.5])
    >>> c = summarize("3", [8.0, 10.5, 8.1, 6.9, 9.3])
    >>> round(anova([a, b, c]).statistic, 4)
    9.5911
    """
    squares = _squares(groups)
    if squares.within <= 0.0:
        raise DegenerateDataError("There is no scatter within any group; F is not defined.")
    ms_between = squares.between / squares.df_between
    ms_within = squares.within / squares.df_within
    statistic = ms_between / ms_within
    return AnovaResult(
        procedure="anova",
        statistic=statistic,
        df_between=float(squares.df_between),
        df_within=float(squares.df_within),
        p=f_upper(statistic, squares.df_between, squares.df_within),
        ss_between=squares.between,
        ss_within=squares.within,
        ms_between=ms_between,
        ms_within=ms_within,
    )


def welch(groups: Sequence[GroupSummary]) -> AnovaResult:
    """Test equal means without assuming equal variances.

    Parameters
    ----------
    groups : sequence of GroupSummary, length k >= 2
        Each with n >= 2 and variance > 0.

    Returns
    -------
    AnovaResult
        Welch's F on (k - 1, approximate df); sums of squares are the ordinary ones, as description.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        k < 2 or some n < 2; a group without scatter.

    Notes
    -----
    Weights w = n / s**2 are taken relative to their largest, so that the unit does not matter. For k = 2
    the statistic is the square of Welch's t.

    References
    ----------
    .. [1] Welch (1951), Biometrika 38, 330-336. doi:10.1093/biomet/38.3-4.330
    """
    require_groups(groups, smallest_n=2, scatter=True)
    k = len(groups)
    least = min(g.variance / g.n for g in groups)
    weights = [least / (g.variance / g.n) for g in groups]
    total = math.fsum(weights)
    shifts = [mean_difference(g, groups[0]) for g in groups]
    centre = math.fsum(w * d for w, d in zip(weights, shifts, strict=True)) / total
    between = math.fsum(w * ((d - centre) ** 2 / least) for w, d in zip(weights, shifts, strict=True)) / (
        k - 1
    )
    lack = math.fsum(
        (1.0 - w / total) ** 2 / (g.n - 1) for w, g in zip(weights, groups, strict=True)
    )  # [1], eq. 20
    statistic = between / (1.0 + 2.0 * (k - 2) / (k * k - 1) * lack)
    df_within = (k * k - 1) / (3.0 * lack)
    squares = _squares(groups)
    return AnovaResult(
        procedure="welch",
        statistic=statistic,
        df_between=float(k - 1),
        df_within=df_within,
        p=f_upper(statistic, k - 1, df_within),
        ss_between=squares.between,
        ss_within=squares.within,
        ms_between=squares.between / squares.df_between,
        ms_within=squares.within / squares.df_within,
    )


def supported_digits(groups: Sequence[GroupSummary]) -> int:
    """Return how many significant digits of F the results support as double-precision numbers.

    Storing a decimal result as a double moves it by up to half a unit in its last place. Where many leading
    digits are common to all results this is not small against the scatter, and the report prints no more
    digits than are left.

    Parameters
    ----------
    groups : sequence of GroupSummary
        As for `anova`.

    Returns
    -------
    int
        0 to 15: the digits that the root mean square rounding error leaves of the scatter within and
        between groups, as if half of it were in line with them; on certified sets one digit less than are
        right.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        As for `anova`.
    """
    result = anova(groups)
    largest = max(max(abs(g.minimum), abs(g.maximum)) for g in groups)
    rounding = math.ulp(largest) / math.sqrt(12.0)
    total = sum(g.n for g in groups)
    sd_within = math.sqrt(result.ms_within)
    sd_between = math.sqrt(max(result.ss_between, result.df_between * result.ms_within) / total)
    relative = rounding * math.hypot(1.0 / sd_within, 1.0 / sd_between)
    if relative <= 10.0**-_MOST_DIGITS:
        return _MOST_DIGITS
    return max(0, min(_MOST_DIGITS, math.floor(-math.log10(relative))))


def _squares(groups: Sequence[GroupSummary]) -> _Squares:
    """Return sums of squares from shifts against the first mean, exact to the last digits of the means."""
    require_groups(groups, smallest_n=1, scatter=False)
    total = sum(g.n for g in groups)
    if total == len(groups):
        raise TooFewObservationsError("No group has two results; scatter within groups cannot be seen.")
    shifts = [mean_difference(g, groups[0]) for g in groups]
    centre = math.fsum(g.n * d for g, d in zip(groups, shifts, strict=True)) / total
    return _Squares(
        between=math.fsum(g.n * (d - centre) ** 2 for g, d in zip(groups, shifts, strict=True)),
        within=math.fsum((g.n - 1) * g.variance for g in groups),
        df_between=len(groups) - 1,
        df_within=total - len(groups),
    )
