"""Declared contrasts of means with simultaneous intervals over all contrasts (Scheffé)."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from qcreport.errors import DegenerateDataError
from qcreport.stats.comparison import require_alpha
from qcreport.stats.distributions.student import f_upper, f_upper_quantile
from qcreport.stats.one_way import anova
from qcreport.stats.summary import GroupSummary, mean_difference


@dataclass(frozen=True, slots=True, kw_only=True)
class ContrastResult:
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
    """Degrees of freedom within groups."""
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
) -> tuple[ContrastResult, ...]:
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
    tuple of ContrastResult
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
    scale = overall.df_between
    critical = math.sqrt(scale * f_upper_quantile(alpha, scale, overall.df_within))
    shifts = [mean_difference(group, groups[0]) for group in groups]
    results = []
    for row in contrasts:
        _require_contrast(row, len(groups))
        estimate = math.fsum(c * shift for c, shift in zip(row, shifts, strict=True))
        variance = math.fsum(c * c / group.n for c, group in zip(row, groups, strict=True))
        se = math.sqrt(overall.ms_within) * math.sqrt(variance)
        statistic = estimate / se
        results.append(
            ContrastResult(
                coefficients=tuple(row),
                estimate=estimate,
                se=se,
                statistic=statistic,
                df=overall.df_within,
                critical_value=critical,
                p=f_upper(statistic * statistic / scale, scale, overall.df_within),
                lower=estimate - critical * se,
                upper=estimate + critical * se,
            )
        )
    return tuple(results)


def _require_contrast(row: Sequence[float], k: int) -> None:
    size = max((abs(c) for c in row), default=0.0)
    if len(row) != k or not math.isfinite(size) or size == 0.0 or abs(math.fsum(row)) > 1e-12 * size:
        raise DegenerateDataError(f"A contrast needs {k} coefficients that sum to 0 and are not all 0.")
