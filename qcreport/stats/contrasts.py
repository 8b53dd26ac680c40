"""Declared contrasts of means with simultaneous intervals over all contrasts (Scheffé)."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from qcreport.errors import DegenerateDataError
from qcreport.stats.comparison import require_alpha
from qcreport.stats.distributions.student import f_upper, f_upper_quantile
from qcreport.stats.one_way import anova
from qcreport.stats.summary import GroupSummary, mean_difference, require_groups


@dataclass(frozen=True, slots=True, kw_only=True)
class ContrastEstimate:
    """One contrast, results in the unit u."""

    coefficients: tuple[float, ...]
    """One for each group, summing to 0."""
    estimate: float
    """Sum of coefficient times mean, in u."""
    se: float
    """Standard error, in u."""
    statistic: float
    """estimate / se, signed, dimensionless."""
    df: float
    """Degrees of freedom of the standard error."""
    critical_value: float
    """sqrt((k - 1) F(alpha; k - 1, df)), dimensionless."""
    p: float
    """P value adjusted for all contrasts that there are."""
    lower: float
    """Lower end of the simultaneous interval, in u."""
    upper: float
    """Upper end of the simultaneous interval, in u."""


def scheffe(
    groups: Sequence[GroupSummary], contrasts: Sequence[Sequence[float]], *, alpha: float
) -> tuple[ContrastEstimate, ...]:
    """Estimate contrasts of means with intervals that hold for all contrasts together (Scheffé).

    Assumes independent, normal results with one variance.

    Parameters
    ----------
    groups : sequence of GroupSummary, length k >= 2
        In u.
    contrasts : sequence of sequences of k floats
        Coefficients, each row summing to 0 and not all 0.
    alpha : float in (0, 1), dimensionless
        Family-wise error rate.

    Returns
    -------
    tuple of ContrastEstimate
        Input order.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        As for `anova`; a row of another length, or one that is no contrast.

    References
    ----------
    .. [1] Scheffé (1953), Biometrika 40, 87-104. doi:10.1093/biomet/40.1-2.87
    """
    require_alpha(alpha)
    overall = anova(groups)
    sd = math.sqrt(overall.ms_within)
    _require_contrasts(contrasts, len(groups))
    return tuple(
        _estimate(
            groups,
            row,
            alpha,
            math.hypot(*[c * sd / math.sqrt(g.n) for c, g in _used(row, groups)]),
            overall.df_within,
        )
        for row in contrasts
    )


def brown_forsythe_contrasts(
    groups: Sequence[GroupSummary], contrasts: Sequence[Sequence[float]], *, alpha: float
) -> tuple[ContrastEstimate, ...]:
    """Estimate contrasts of means when variances may differ (Brown & Forsythe's form of Scheffé's method).

    Each group's own variance enters the standard error, with Satterthwaite's degrees of freedom.

    Parameters
    ----------
    groups, contrasts, alpha
        As for `scheffe`; each group with n >= 2 and variance > 0.

    Returns
    -------
    tuple of ContrastEstimate
        Input order.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        As for `games_howell`; a row of another length, or one that is no contrast.

    References
    ----------
    .. [1] Brown & Forsythe (1974), Biometrics 30(4), 719-724. doi:10.2307/2529238
    """
    require_alpha(alpha)
    require_groups(groups, smallest_n=2, scatter=True)
    _require_contrasts(contrasts, len(groups))
    estimates = []
    for row in contrasts:
        parts = [c * math.sqrt(g.variance) / math.sqrt(g.n) for c, g in _used(row, groups)]
        se = math.hypot(*parts)
        shares = [
            (part / se) ** 4 / (g.n - 1) for part, (_, g) in zip(parts, _used(row, groups), strict=True)
        ]
        estimates.append(_estimate(groups, row, alpha, se, 1.0 / math.fsum(shares)))
    return tuple(estimates)


def _used(row: Sequence[float], groups: Sequence[GroupSummary]) -> list[tuple[float, GroupSummary]]:
    """Return the groups that a contrast weighs, with their coefficients."""
    return [(c, group) for c, group in zip(row, groups, strict=True) if c]


def _estimate(
    groups: Sequence[GroupSummary], row: Sequence[float], alpha: float, se: float, df: float
) -> ContrastEstimate:
    """Return one contrast with its interval over all contrasts of these groups."""
    between = len(groups) - 1
    critical = math.sqrt(between * f_upper_quantile(alpha, between, df))
    shifts = [mean_difference(group, groups[0]) for group in groups]
    estimate = math.fsum(c * shift for c, shift in zip(row, shifts, strict=True))
    statistic = estimate / se
    return ContrastEstimate(
        coefficients=tuple(row),
        estimate=estimate,
        se=se,
        statistic=statistic,
        df=df,
        critical_value=critical,
        p=f_upper(statistic * statistic / between, between, df),
        lower=estimate - critical * se,
        upper=estimate + critical * se,
    )


def _require_contrasts(rows: Sequence[Sequence[float]], k: int) -> None:
    for row in rows:
        _require_contrast(row, k)


def _require_contrast(row: Sequence[float], k: int) -> None:
    size = max((abs(c) for c in row), default=0.0)
    if len(row) != k or not math.isfinite(size) or size == 0.0 or abs(math.fsum(row)) > 1e-12 * size:
        raise DegenerateDataError(f"A contrast needs {k} coefficients that sum to 0 and are not all 0.")
