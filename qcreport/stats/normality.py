"""The Shapiro-Wilk test of normality: it informs and never chooses."""

from __future__ import annotations

import math
from collections.abc import Sequence

from scipy import special

from qcreport.errors import DegenerateDataError, TooFewObservationsError
from qcreport.stats.assumptions import AssumptionCheck
from qcreport.stats.summary import summarize

SMALLEST_N = 10
"""Fewer residuals say nothing about the shape."""
_LARGEST_N = 5000
_LAST = (0.0, 0.221157, -0.147981, -2.071190, 4.434685, -2.706056)
_LAST_BUT_ONE = (0.0, 0.042981, -0.293762, -1.752461, 5.682633, -3.582633)
_SMALL_GAMMA = (-2.273, 0.459)
_SMALL_MEAN = (0.5440, -0.39978, 0.025054, -0.0006714)
_SMALL_LOG_SD = (1.3822, -0.77857, 0.062767, -0.0020322)
_LARGE_MEAN = (-1.5861, -0.31082, -0.083751, 0.0038915)
_LARGE_LOG_SD = (-0.4803, -0.082676, 0.0030302)
"""Polynomials of [2]_, constant term first."""


def scaled_residuals(labels: Sequence[str], values: Sequence[Sequence[float]]) -> tuple[float, ...]:
    """Return each result's distance from its group's mean in standard deviations of its own group.

    Parameters
    ----------
    labels : sequence of str, length k
        Names of the groups.
    values : sequence of k sequences of float
        Results in u.

    Returns
    -------
    tuple of float
        Dimensionless, input order; groups of one result or without scatter give none.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        An empty group; a value that is not finite.
    """
    residuals: list[float] = []
    for label, group in zip(labels, values, strict=True):
        summary = summarize(label, group, allow_single=True)
        if summary.variance > 0.0:
            sd = math.sqrt(summary.variance)
            residuals.extend(((value - summary.mean) - summary.mean_residual) / sd for value in group)
    return tuple(residuals)


def shapiro_wilk(residuals: Sequence[float], alpha: float = 0.05) -> AssumptionCheck:
    """Test normality by the ratio of two estimates of scatter (Shapiro-Wilk), weights and p after Royston.

    Parameters
    ----------
    residuals : sequence of float, length 10 to 5000
        For groups with their own spread: `scaled_residuals`.
    alpha : float in (0, 1)
        Level of the verdict.

    Returns
    -------
    AssumptionCheck
        W, and p by the normal approximation of [2]_; the p of residuals is approximate, as they are not
        independent.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        Fewer than 10 or more than 5000 residuals; no scatter, or a value that is not finite.

    References
    ----------
    .. [1] Shapiro & Wilk (1965), Biometrika 52, 591-611. doi:10.1093/biomet/52.3-4.591
    .. [2] Royston (1995), Appl. Stat. 44(4), 547-551, algorithm AS R94. doi:10.2307/2986146
    """
    n = len(residuals)
    if not SMALLEST_N <= n <= _LARGEST_N:
        raise TooFewObservationsError(
            f"Normality is tested from {SMALLEST_N} to {_LARGEST_N} values; found {n}."
        )
    summary = summarize("residuals", residuals)
    if summary.variance <= 0.0:
        raise DegenerateDataError("The residuals do not vary; their shape cannot be tested.")
    sd = math.sqrt(summary.variance)
    scaled = sorted(((value - summary.mean) - summary.mean_residual) / sd for value in residuals)
    lost = _one_minus_w(scaled, _weights(n))
    p = _p_value(math.log(lost), n)
    return AssumptionCheck(
        name="shapiro_wilk", statistic=1.0 - lost, df=(), p=p, threshold=None, met=p >= alpha
    )


def _weights(n: int) -> list[float]:
    """Return the weights of the ordered values, ascending, of unit length and odd ([2]_, section 2)."""
    scores = [float(special.ndtri((i - 0.375) / (n + 0.25))) for i in range(1, n + 1)]
    total = math.fsum(m * m for m in scores)
    small = 1.0 / math.sqrt(n)
    last = _polynomial(_LAST, small) + scores[-1] / math.sqrt(total)
    last_but_one = _polynomial(_LAST_BUT_ONE, small) + scores[-2] / math.sqrt(total)
    inner = (total - 2.0 * scores[-1] ** 2 - 2.0 * scores[-2] ** 2) / (
        1.0 - 2.0 * last**2 - 2.0 * last_but_one**2
    )
    middle = [m / math.sqrt(inner) for m in scores[2:-2]]
    return [-last, -last_but_one, *middle, last_but_one, last]


def _one_minus_w(ordered: Sequence[float], weights: Sequence[float]) -> float:
    """Return 1 - W without cancellation, as a product of two sums of squares."""
    size = math.sqrt(math.fsum(x * x for x in ordered))
    length = math.sqrt(math.fsum(a * a for a in weights))
    apart = math.fsum((a / length - x / size) ** 2 for a, x in zip(weights, ordered, strict=True))
    together = math.fsum((a / length + x / size) ** 2 for a, x in zip(weights, ordered, strict=True))
    return max(apart * together / 4.0, 1e-19)


def _p_value(log_lost: float, n: int) -> float:
    """Return P(W at most as large) from the transformed log(1 - W) ([2]_, section 3)."""
    if n <= 11:
        value = -math.log(_polynomial(_SMALL_GAMMA, n) - log_lost)  # positive from n = 5 on, as log_lost < 0
        mean, log_sd = _polynomial(_SMALL_MEAN, n), _polynomial(_SMALL_LOG_SD, n)
    else:
        value = log_lost
        mean, log_sd = _polynomial(_LARGE_MEAN, math.log(n)), _polynomial(_LARGE_LOG_SD, math.log(n))
    return float(special.ndtr(-(value - mean) / math.exp(log_sd)))


def _polynomial(coefficients: Sequence[float], x: float) -> float:
    result = 0.0
    for coefficient in reversed(coefficients):
        result = result * x + coefficient
    return result
