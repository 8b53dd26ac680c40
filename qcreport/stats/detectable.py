"""What a design can see: the difference that a comparison detects, and how well its scatter is known."""

from __future__ import annotations

import math
from collections.abc import Callable
from functools import lru_cache

from scipy import special

from qcreport.errors import DegenerateDataError
from qcreport.stats.comparison import require_alpha
from qcreport.stats.distributions.student import chi_squared_upper_quantile, far_noncentrality, is_far

_LARGEST_DF = 1e7
_CLOSE = 1e-13


def detectable_difference(se: float, df: float | None, critical_value: float, power: float = 0.80) -> float:
    """Return the true difference that a comparison declares, in its direction, with the given power.

    It describes the design and not the result; the interval describes the result.

    Parameters
    ----------
    se : float > 0, in u
        Standard error of the difference.
    df : float > 0, infinite or None
        Degrees of freedom of the scatter; None counts as infinite.
    critical_value : float > 0, dimensionless
        What |statistic| must exceed.
    power : float in (0, 1)
        Wanted probability.

    Returns
    -------
    float, in u
        delta with P(noncentral t(df, delta / se) > critical_value) = power.

    Raises
    ------
    DegenerateDataError
        An argument outside its range.

    Examples
    --------
    >>> round(detectable_difference(1.0, 18, 2.1009), 2)
    2.96
    """
    if not (se > 0.0 and math.isfinite(se) and critical_value > 0.0 and math.isfinite(critical_value)):
        raise DegenerateDataError(
            "A detectable difference needs a positive standard error and critical value."
        )
    require_alpha(power)
    return noncentrality(df, critical_value, power) * se


@lru_cache(maxsize=1024)
def noncentrality(df: float | None, critical_value: float, power: float) -> float:
    """Return nc >= 0 with P(noncentral t(df, nc) > critical_value) = power, dimensionless.

    Kept for the calls that follow: under a pooled variance all pairs of a table ask for the same one.
    """
    normal = max(critical_value + float(special.ndtri(power)), 0.0)
    if df is None or df > _LARGEST_DF:
        return normal
    if is_far(critical_value, df):
        return far_noncentrality(critical_value, df, 1.0 - power)
    return _root(lambda nc: float(special.nctdtr(df, nc, critical_value)) - (1.0 - power), normal)


def scatter_limits(sd: float, df: float, confidence: float = 0.90) -> tuple[float, float]:
    """Return the equal-tailed confidence limits of a standard deviation, in the unit of `sd`.

    Parameters
    ----------
    sd : float >= 0, in u
        Estimate, e.g. the root of ms_within.
    df : float > 0
        Its degrees of freedom.
    confidence : float in (0, 1)
        Confidence of the two limits together.

    Returns
    -------
    (float, float), in u
        sd sqrt(df / chi-squared quantile); normal results assumed.

    Raises
    ------
    DegenerateDataError
        An argument outside its range.
    """
    require_alpha(confidence)
    if not (sd >= 0.0 and df > 0.0):
        raise DegenerateDataError("Limits of a standard deviation need sd >= 0 and df > 0.")
    tail = 0.5 * (1.0 - confidence)
    return (
        sd * math.sqrt(df / chi_squared_upper_quantile(tail, df)),
        sd * math.sqrt(df / chi_squared_upper_quantile(1.0 - tail, df)),
    )


def _root(excess: Callable[[float], float], start: float) -> float:
    """Return the root near `start`, or 0, of a falling function.

    A bracket grown from the start, then false position that halves the older end (Illinois).
    """
    low, high = 0.0, max(start, 0.5)
    at_low, at_high = math.inf, excess(high)
    while at_high > 0.0:
        low, at_low, high = high, at_high, 1.25 * high
        at_high = excess(high)
    while at_low == math.inf:
        below = 0.8 * high if high > 0.1 else 0.0
        found = excess(below)
        if found > 0.0 or below == 0.0:
            low, at_low = below, found
        else:
            high, at_high = below, found
    if at_low <= 0.0:
        return low
    middle, last, side = high, low, 0
    while abs(middle - last) > _CLOSE * middle:
        last, middle = middle, (low * at_high - high * at_low) / (at_high - at_low)
        found = excess(middle)
        if found > 0.0:
            low, at_low, at_high = middle, found, at_high * (0.5 if side > 0 else 1.0)
        else:
            high, at_high, at_low = middle, found, at_low * (0.5 if side < 0 else 1.0)
        side = 1 if found > 0.0 else -1
    return middle
