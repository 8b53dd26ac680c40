"""The Hodges-Lehmann shift between two groups and the interval that inverts the rank-sum test."""

from __future__ import annotations

import math
from collections.abc import Sequence
from itertools import chain

import numpy as np

from qcreport.stats.arrangements import tie_blocks
from qcreport.stats.distributions.rows import Array


def shift_and_interval(
    first: Sequence[float], second: Sequence[float], critical: float | None
) -> tuple[float, float | None, float | None]:
    """Return the shift (first minus second) and the ends of its interval, in the unit u of the results.

    Parameters
    ----------
    first, second : sequences of float, lengths n and m >= 1, in u
        Results; -inf and +inf for those known only to lie below or above all others.
    critical : float or None
        What the standardised rank sum must exceed; None where nothing can.

    Returns
    -------
    (float, float or None, float or None)
        The median of all n m differences [1]_; the smallest and largest shift that the test does not
        reject. An end is None where no shift on its side is rejected, or where a result is not finite.

    References
    ----------
    .. [1] Hodges & Lehmann (1963), Ann. Math. Stat. 34, 598-611. doi:10.1214/aoms/1177704172
    """
    differences = _differences(first, second)
    total = differences.size
    shift = _middle(differences)
    if critical is None or not all(map(math.isfinite, chain(first, second))):
        return shift, None, None
    half = critical * _sd_of_count(first, second)
    rank = math.ceil(
        0.5 * total - half * (1.0 + 1e-12)
    )  # smallest number of differences below an accepted shift
    if rank < 1:
        return shift, None, None
    return shift, float(differences[rank - 1]), float(differences[total - rank])


def _differences(first: Sequence[float], second: Sequence[float]) -> Array:
    """Return all differences, ascending; two results that are tied at the same infinity differ by 0."""
    a, b = np.asarray(first)[:, None], np.asarray(second)
    with np.errstate(invalid="ignore"):
        return np.sort(np.where(a == b, 0.0, a - b), axis=None)


def _middle(ordered: Array) -> float:
    low, high = float(ordered[(ordered.size - 1) // 2]), float(ordered[ordered.size // 2])
    return low if low == high else 0.5 * low + 0.5 * high


def _sd_of_count(first: Sequence[float], second: Sequence[float]) -> float:
    """Return the standard deviation of the Mann-Whitney count, corrected for ties."""
    n, m = len(first), len(second)
    lost = math.fsum(float(b**3 - b) for b in tie_blocks(sorted(chain(first, second))))
    return math.sqrt(max(n * m / 12.0 * ((n + m + 1) - lost / ((n + m) * (n + m - 1))), 0.0))
