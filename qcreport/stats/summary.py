"""Group summaries: the only thing that the mean-based procedures know of a group."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from itertools import chain, repeat

from qcreport.errors import DegenerateDataError, TooFewObservationsError

_SMALLEST_NORMAL = 2.0**-1022


@dataclass(frozen=True, slots=True, kw_only=True)
class GroupSummary:
    """One group's results in a few numbers, in the unit u of the results."""

    label: str
    """Name of the group."""
    n: int
    """Number of independent results."""
    mean: float
    """Arithmetic mean, in u."""
    variance: float
    """Sample variance (divisor n - 1), in u**2; 0 for equal values and for a single value."""
    mean_residual: float = 0.0
    """What rounding took from `mean`: `mean + mean_residual` is the mean to about 32 digits, in u."""
    minimum: float
    """Smallest value, in u."""
    maximum: float
    """Largest value, in u."""
    median: float
    """Middle value, or the mean of the two middle values, in u."""


def summarize(label: str, values: Sequence[float], *, allow_single: bool = False) -> GroupSummary:
    """Summarise one group.

    Parameters
    ----------
    label : str
        Name of the group.
    values : sequence of float, length n
        Independent results, in u; order does not matter.
    allow_single : bool
        Accept n = 1, with variance 0 and no degrees of freedom: such a group can be described and shares a
        pooled variance, but says nothing about scatter.

    Returns
    -------
    GroupSummary
        The mean as an unevaluated sum of two doubles, the variance by the corrected two-pass formula [1]_
        with exactly rounded sums.

    Raises
    ------
    TooFewObservationsError
        No value, or a single one where that is not allowed.
    DegenerateDataError
        A value that is not finite, or a scatter whose square leaves the range of double precision.

    References
    ----------
    .. [1] Chan, Golub & LeVeque (1983), Am. Stat. 37(3), 242-247. doi:10.1080/00031305.1983.10483115

    Examples
    --------
    >>> summarize("A", [4.0, 6.0, 8.0]).variance
    4.0
    """
    n = len(values)
    if n == 0 or (n == 1 and not allow_single):
        raise TooFewObservationsError(
            f"Group {label} has {n} result(s); at least {1 if allow_single else 2} needed."
        )
    ordered = sorted(map(float, values))
    if not all(map(math.isfinite, ordered)):
        raise DegenerateDataError(f"Group {label} holds a value that is not a finite number.")
    mean, residual = _mean_in_two_parts(ordered)
    return GroupSummary(
        label=label,
        n=n,
        mean=mean,
        variance=_variance(label, ordered, mean, residual),
        mean_residual=residual,
        minimum=ordered[0],
        maximum=ordered[-1],
        median=_median(ordered),
    )


def mean_difference(first: GroupSummary, second: GroupSummary) -> float:
    """Return the difference of two means, first minus second in u, with what rounding took from each."""
    return (first.mean - second.mean) + (first.mean_residual - second.mean_residual)


def with_floored_variance(groups: Sequence[GroupSummary], floor: float) -> tuple[GroupSummary, ...]:
    """Return the groups with variances of at least `floor`.

    Parameters
    ----------
    groups : sequence of GroupSummary
        Groups that enter an unequal-variance procedure.
    floor : float > 0, in u**2
        Usually resolution**2 / 12, the variance of rounding to the resolution.

    Returns
    -------
    tuple of GroupSummary
        Same order; only `variance` may differ.

    Raises
    ------
    DegenerateDataError
        A floor that is not positive and finite.
    """
    if not (math.isfinite(floor) and floor > 0.0):
        raise DegenerateDataError("A floor of the variance must be positive and finite.")
    return tuple(replace(g, variance=max(g.variance, floor)) for g in groups)


def require_groups(groups: Sequence[GroupSummary], *, smallest_n: int, scatter: bool) -> None:
    """Refuse fewer than two groups, a group below `smallest_n`, and with `scatter` a group without any."""
    if len(groups) < 2:
        raise TooFewObservationsError("At least two groups are needed.")
    for group in groups:
        if group.n < smallest_n:
            raise TooFewObservationsError(
                f"Group {group.label} has {group.n} result(s); at least {smallest_n} needed."
            )
        if not (math.isfinite(group.variance) and math.isfinite(group.mean)):
            raise DegenerateDataError(f"Group {group.label} has a mean or variance that is not finite.")
        if scatter and group.variance <= 0.0:
            raise DegenerateDataError(
                f"Group {group.label} has no scatter, and the procedure divides by it; set a floor."
            )


def _mean_in_two_parts(values: Sequence[float]) -> tuple[float, float]:
    """Return the rounded mean and the remainder, both from exactly rounded sums of halved-range values."""
    n = len(values)
    _, exponent = math.frexp(max(abs(values[0]), abs(values[-1])))
    down = max(exponent - 960, 0)  # only huge values need room for their sum
    scaled = [math.ldexp(value, -down) for value in values] if down else values
    mean = math.fsum(scaled) / n
    residual = math.fsum(chain(scaled, repeat(-mean, n))) / n
    mean, residual = mean + residual, residual - ((mean + residual) - mean)
    return math.ldexp(mean, down), math.ldexp(residual, down)


def _variance(label: str, values: Sequence[float], mean: float, residual: float) -> float:
    """Return the variance (divisor n - 1); deviations are scaled by a power of two and then squared."""
    n = len(values)
    if values[0] == values[-1]:
        return 0.0
    half_mean, half_residual = 0.5 * mean, 0.5 * residual
    deviations = [0.5 * value - half_mean - half_residual for value in values]
    _, exponent = math.frexp(max(map(abs, deviations)))
    scaled = [math.ldexp(d, -exponent) for d in deviations]
    total = math.fsum([d * d for d in scaled]) - math.fsum(scaled) ** 2 / n
    try:
        variance = math.ldexp(total / (n - 1), 2 * exponent + 2)
    except OverflowError:
        variance = math.inf
    if not _SMALLEST_NORMAL <= variance < math.inf:
        raise DegenerateDataError(
            f"The scatter of group {label} is too large or too small to be squared in double precision; "
            "give the results in another unit."
        )
    return variance


def _median(ordered: Sequence[float]) -> float:
    """Return the median of ascending values."""
    n = len(ordered)
    middle = n // 2
    if n % 2:
        return ordered[middle]
    return 0.5 * ordered[middle - 1] + 0.5 * ordered[middle]
