"""How many results a group a design needs: to see a difference, and to settle an interval."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache
from typing import Literal, get_args

from qcreport.errors import DegenerateDataError
from qcreport.stats.comparison import require_alpha, sidak_level
from qcreport.stats.detectable import detectable_difference
from qcreport.stats.distributions import many_to_one_isf, maximum_modulus_isf, studentized_range_isf
from qcreport.stats.distributions.student import t_two_sided_quantile, t_upper_quantile

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

LARGEST_N = 100_000
"""Where a search gives up."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Design:
    """Groups of one size n with one spread, compared by a procedure based on means."""

    procedure: Procedure
    """Published name."""
    n_groups: int
    """Number of groups, the reference included."""
    alpha: float = 0.05
    """Family-wise error rate, dimensionless."""
    two_sided: bool = True
    """False where, with a reference, only one direction is asked for."""

    def critical_value(self, n: int) -> float:
        """Return what |statistic| must exceed with n results a group, dimensionless."""
        return critical_value(self.procedure, self.n_groups, self.alpha, n, self.two_sided)

    def df(self, n: int) -> float:
        """Return the degrees of freedom of the scatter in a pair's standard error."""
        pooled = self.procedure in ("tukey_hsd", "tukey_kramer", "dunnett")
        return self.n_groups * (n - 1) if pooled else 2 * (n - 1)

    def half_width(self, n: int, sd: float) -> float:
        """Return half the width of a pair's interval, in the unit of `sd`."""
        return self.critical_value(n) * sd * math.sqrt(2.0 / n)

    def detectable(self, n: int, sd: float, power: float = 0.80) -> float:
        """Return the true difference that is seen with the given power, in the unit of `sd`."""
        return detectable_difference(sd * math.sqrt(2.0 / n), self.df(n), self.critical_value(n), power)


def sample_size_to_detect(
    design: Design, *, sd: float, difference: float, power: float = 0.80, largest: int = LARGEST_N
) -> int | None:
    """Return how many results each group needs for a true difference to be seen with the given power.

    Parameters
    ----------
    design : Design
        Procedure, number of groups, error rate.
    sd : float > 0, in u
        Standard deviation of single results, one for all groups.
    difference : float > 0, in u
        True difference of two means.
    power : float in (0, 1)
        Wanted probability that this pair is declared different, in its direction.
    largest : int
        Where to give up.

    Returns
    -------
    int or None
        Smallest n >= 2 whose detectable difference is at most `difference`; None above `largest`.

    Raises
    ------
    DegenerateDataError
        An argument outside its range.

    Notes
    -----
    P(noncentral t(df, difference / (sd sqrt(2 / n))) > critical value) >= power. For two groups this is the
    power of the two-sample t test, but for the other tail.

    Examples
    --------
    >>> sample_size_to_detect(Design(procedure="tukey_hsd", n_groups=2), sd=1.0, difference=0.5)
    64
    """
    _require(design, sd, difference)
    if sd == 0.0:
        return 2
    ratio = sd / difference
    require_alpha(power)

    def asked(n: int) -> float:
        noncentrality = detectable_difference(1.0, design.df(n), design.critical_value(n), power)
        return 2.0 * (ratio * noncentrality) ** 2

    return _smallest(asked, largest)


def sample_size_for(
    design: Design, *, variance: float, margin: float, largest: int = LARGEST_N
) -> int | None:
    """Return about how many results each group needs for intervals narrower than the margin on either side.

    Parameters
    ----------
    design : Design
        Procedure, number of groups, error rate.
    variance : float >= 0, in u**2
        Scatter of single results, if it stays as seen; the mean variance of the two groups of a pair.
    margin : float > 0, in u
        Smallest difference that matters.
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
    >>> sample_size_for(Design(procedure="tukey_hsd", n_groups=3), variance=1.0, margin=1.0)
    13
    """
    _require(design, variance, margin)
    return _smallest(lambda n: 2.0 * variance * (design.critical_value(n) / margin) ** 2, largest)


def _require(design: Design, scatter: float, difference: float) -> None:
    require_alpha(design.alpha)
    if not (0.0 < difference < math.inf and 0.0 <= scatter < math.inf and design.n_groups >= 2):
        raise DegenerateDataError(
            "A sample size needs a positive difference or margin, a scatter and at least two groups."
        )
    if design.procedure not in get_args(Procedure):
        raise DegenerateDataError(f"No sample size is known for the procedure {design.procedure}.")


def _smallest(asked: Callable[[int], float], largest: int) -> int | None:
    """Return the smallest n in 2 to `largest` with asked(n) < n; None where there is none.

    What a critical value at n asks for hardly depends on a large n, so it is nearly the answer itself; the
    bracket (too few, enough) makes the search end whatever it does.
    """
    too_few, enough, n = 1, largest + 1, largest
    while enough - too_few > 1:
        wanted = asked(n)
        too_few, enough = (too_few, n) if wanted < n else (n, enough)
        guess = enough if wanted >= largest else math.floor(wanted) + 1
        n = min(max(guess, too_few + 1), max(enough - 1, too_few + 1))
    return None if enough > largest else enough


@lru_cache(maxsize=4096)
def critical_value(procedure: Procedure, k: int, alpha: float, n: int, two_sided: bool = True) -> float:
    """Return what |statistic| must exceed among k groups of n results each, spreads alike, dimensionless.

    Kept for the calls that follow: the pairs of one table ask for the same few.
    """
    pairs = k * (k - 1) // 2
    level = sidak_level(alpha, k - 1)
    t_quantile = t_two_sided_quantile if two_sided else t_upper_quantile
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
            return float(many_to_one_isf(alpha, n, [n] * (k - 1), k * (n - 1), two_sided))
        case "dunnett_unequal":
            return t_quantile(level, 2 * (n - 1))
        case "dunnett_weighted":
            return t_quantile(level, n - 1)
