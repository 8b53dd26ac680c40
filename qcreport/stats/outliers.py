"""Outlying values: flagged, never dropped."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

from qcreport.errors import TooFewObservationsError
from qcreport.stats.comparison import require_alpha
from qcreport.stats.distributions.student import t_two_sided, t_two_sided_quantile
from qcreport.stats.summary import summarize

SMALLEST_ESD_N = 15
"""From this size on the generalized ESD test holds its level."""


@dataclass(frozen=True, slots=True, kw_only=True)
class OutlierCheck:
    """The most extreme value of one group."""

    label: str
    """Name of the group."""
    test: str
    """Published name of the test, e.g. `grubbs`."""
    index: int
    """Position of the value in its group, 0-based."""
    value: float
    """The value, in u."""
    statistic: float
    """Distance from the group's mean in standard deviations, dimensionless."""
    p: float
    """Two-sided p for this group; an upper bound by the sum over its values."""
    critical: float
    """What the statistic must exceed at this group's level, dimensionless."""
    flagged: bool
    """Whether p is below the group's level."""


def grubbs(
    labels: Sequence[str], values: Sequence[Sequence[float]], alpha: float = 0.05
) -> tuple[OutlierCheck, ...]:
    """Check the most extreme value of each group, two-sided, at level alpha / k (Grubbs).

    Parameters
    ----------
    labels : sequence of str, length k >= 1
        Names of the groups.
    values : sequence of k sequences of float
        Results in u.
    alpha : float in (0, 1)
        Level for all groups together.

    Returns
    -------
    tuple of OutlierCheck
        One for each group with n >= 3 and scatter; other groups cannot be checked and are left out.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        No group, or an empty one; a value that is not finite.

    Notes
    -----
    p = n P(|T| > t) on n - 2 df, t**2 = n (n - 2) G**2 / ((n - 1)**2 - n G**2) [1]_; exact where two values
    cannot both be that far out, an upper bound otherwise.

    References
    ----------
    .. [1] Grubbs (1969), Technometrics 11(1), 1-21. doi:10.1080/00401706.1969.10490657

    Examples
    --------
    >>> grubbs(["A"], [[199.31, 199.53, 200.19, 200.82, 201.92, 201.95, 202.18, 245.57]])[0].index
    7
    """
    require_alpha(alpha)
    if not labels:
        raise TooFewObservationsError("There is no group to check.")
    level = alpha / len(labels)
    checks = (_most_extreme(label, group, level) for label, group in zip(labels, values, strict=True))
    return tuple(check for check in checks if check is not None)


def generalized_esd(
    label: str, values: Sequence[float], alpha: float = 0.05, most: int | None = None
) -> tuple[OutlierCheck, ...]:
    """Find several outlying values of one group (Rosner's generalized extreme studentized deviate).

    Parameters
    ----------
    label : str
        Name of the group.
    values : sequence of float, length n >= 15
        Results in u.
    alpha : float in (0, 1)
        Level for this group.
    most : int, optional
        How many outlying values are looked for; by default a fifth of the group, at most ten.

    Returns
    -------
    tuple of OutlierCheck
        One for each step, the most extreme value first; flagged are all steps up to the last whose
        statistic exceeds its critical value, so that values cannot hide each other. Stops early where no
        scatter is left.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        n < 15 or `most` outside 1 to n - 3; a value that is not finite.

    References
    ----------
    .. [1] Rosner (1983), Technometrics 25(2), 165-172. doi:10.1080/00401706.1983.10487848
    """
    require_alpha(alpha)
    n = len(values)
    steps = min(n // 5, 10) if most is None else most
    if n < SMALLEST_ESD_N or not 1 <= steps <= n - 3:
        raise TooFewObservationsError(f"The generalized ESD test needs {SMALLEST_ESD_N} results; found {n}.")
    left = list(range(n))
    checks: list[OutlierCheck] = []
    for _ in range(steps):
        check = _most_extreme(label, [values[i] for i in left], alpha)
        if check is None:
            break
        checks.append(replace(check, test="generalized_esd", index=left[check.index]))
        del left[check.index]
    last = max((i for i, check in enumerate(checks) if check.flagged), default=-1)
    return tuple(replace(check, flagged=i <= last) for i, check in enumerate(checks))


def grubbs_p(statistic: float, n: int) -> float:
    """Return the two-sided p bound of Grubbs' statistic among n >= 3 values."""
    rest = (n - 1) ** 2 / n - statistic * statistic
    if rest <= 0.0:
        return 0.0
    return min(1.0, n * t_two_sided(statistic * math.sqrt((n - 2) / rest), n - 2))


def grubbs_critical(level: float, n: int) -> float:
    """Return the two-sided critical value of Grubbs' statistic among n >= 3 values."""
    t = t_two_sided_quantile(min(level / n, 1.0), n - 2)
    return (n - 1) / math.sqrt(n) * t / math.sqrt(n - 2 + t * t)


def _most_extreme(label: str, values: Sequence[float], level: float) -> OutlierCheck | None:
    summary = summarize(label, values, allow_single=True)
    if summary.n < 3 or summary.variance <= 0.0:
        return None
    sd = math.sqrt(summary.variance)
    distances = [abs((value - summary.mean) - summary.mean_residual) / sd for value in values]
    index = max(range(summary.n), key=distances.__getitem__)
    p = grubbs_p(distances[index], summary.n)
    return OutlierCheck(
        label=label,
        test="grubbs",
        index=index,
        value=values[index],
        statistic=distances[index],
        p=p,
        critical=grubbs_critical(level, summary.n),
        flagged=p < level,
    )
