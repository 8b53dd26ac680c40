"""What a design can see: the detectable difference, and the size that would settle an open interval."""

from __future__ import annotations

import math
from collections.abc import Callable
from functools import lru_cache
from typing import Literal, get_args

from scipy import special

from qcreport.errors import DegenerateDataError
from qcreport.stats.comparison import require_alpha, sidak_level
from qcreport.stats.distributions import (
    many_to_one_isf,
    maximum_modulus_isf,
    studentized_range_isf,
)
from qcreport.stats.distributions.student import chi_squared_upper_quantile, t_two_sided_quantile

Procedure = Literal[
    "tukey_hsd",
    "tukey_kramer",
    "games_howell",
    "dunnett_c",
    "dunnett_t3",
    "tamhane_t2",
    "dunnett",
    "dunnett_unequal",
    "dunnett_weighted",
]

_LARGEST_DF = 1e7


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
    normal = critical_value + float(special.ndtri(power))
    if df is None or df > _LARGEST_DF:
        return max(normal, 0.0) * se
    return _root(lambda nc: float(special.nctdtr(df, nc, critical_value)) - (1.0 - power), normal) * se


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


def sample_size_for(
    *,
    procedure: Procedure,
    n_groups: int,
    variance: float,
    margin: float,
    alpha: float = 0.05,
    largest: int = 100_000,
) -> int | None:
    """Return about how many results each group needs for intervals narrower than the margin on either side.

    Parameters
    ----------
    procedure : name
        A procedure based on means.
    n_groups : int >= 2
        Number of groups, the reference included.
    variance : float >= 0, in u**2
        Scatter of single results, if it stays as seen; the mean variance of the two groups of a pair.
    margin : float > 0, in u
        Smallest difference that matters.
    alpha : float in (0, 1)
        Family-wise error rate.
    largest : int
        Where to give up.

    Returns
    -------
    int or None
        Smallest common n >= 2 with critical value times sqrt(2 variance / n) < margin; None above `largest`.

    Raises
    ------
    DegenerateDataError
        An argument outside its range.

    Examples
    --------
    >>> sample_size_for(procedure="tukey_hsd", n_groups=3, variance=1.0, margin=1.0)
    13
    """
    require_alpha(alpha)
    if not (margin > 0.0 and variance >= 0.0 and n_groups >= 2):
        raise DegenerateDataError(
            "A sample size needs a positive margin, a variance and at least two groups."
        )
    if procedure not in get_args(Procedure):
        raise DegenerateDataError(f"No sample size is known for the procedure {procedure}.")

    def wanted(n: int) -> float:
        """Return the n that the critical value at n asks for; n settles where it is below n."""
        return 2.0 * variance * (critical_value(procedure, n_groups, alpha, n) / margin) ** 2

    # The critical value hardly depends on a large n, so what it asks for is nearly the answer itself; the
    # bracket (too few, enough) makes the search end whatever it does.
    too_few, enough, n = 1, largest + 1, largest
    while enough - too_few > 1:
        asked = wanted(n)
        too_few, enough = (too_few, n) if asked < n else (n, enough)
        guess = enough if asked >= largest else math.floor(asked) + 1
        n = min(max(guess, too_few + 1), max(enough - 1, too_few + 1))
    return None if enough > largest else enough


@lru_cache(maxsize=4096)
def critical_value(procedure: Procedure, k: int, alpha: float, n: int) -> float:
    """Return what |statistic| must exceed among k groups of n results each, spreads alike, dimensionless.

    Kept for the calls that follow: the pairs of one table ask for the same few.
    """
    pairs = k * (k - 1) // 2
    level = sidak_level(alpha, k - 1)
    match procedure:
        case "tukey_hsd" | "tukey_kramer":
            return float(studentized_range_isf(alpha, k, k * (n - 1)) / math.sqrt(2.0))
        case "games_howell":
            return float(studentized_range_isf(alpha, k, 2 * (n - 1)) / math.sqrt(2.0))
        case "dunnett_c":
            return float(studentized_range_isf(alpha, k, n - 1) / math.sqrt(2.0))
        case "dunnett_t3":
            return float(maximum_modulus_isf(alpha, pairs, 2 * (n - 1)))
        case "tamhane_t2":
            return t_two_sided_quantile(sidak_level(alpha, pairs), 2 * (n - 1))
        case "dunnett":
            return float(many_to_one_isf(alpha, n, [n] * (k - 1), k * (n - 1)))
        case "dunnett_unequal":
            return t_two_sided_quantile(level, 2 * (n - 1))
        case "dunnett_weighted":
            return t_two_sided_quantile(level, n - 1)


def _root(excess: Callable[[float], float], start: float) -> float:
    """Return the positive root of a falling function by bisection of a widened bracket."""
    low, high = 0.0, max(2.0 * start, 1.0)
    while excess(high) > 0.0:
        low, high = high, 2.0 * high
    while (middle := 0.5 * (low + high)) not in (low, high):
        low, high = (middle, high) if excess(middle) > 0.0 else (low, middle)
    return middle
