"""The studentized range: range of k means over an independent estimate of their standard error."""

from __future__ import annotations

import math
from typing import Any

from numpy.typing import ArrayLike

from qcreport.stats.distributions.families import by_count, upper_quantile, upper_tail
from qcreport.stats.distributions.laws import RangeLaw


def studentized_range_sf(q: ArrayLike, k: ArrayLike, df: ArrayLike) -> Any:
    """Return P(Q > q) for the studentized range of k groups on df degrees of freedom.

    Parameters
    ----------
    q : array_like
        Statistic, dimensionless; at or below 0 the answer is 1.
    k : array_like of whole numbers >= 2
        Number of groups.
    df : array_like >= 0.5, may be infinite
        Degrees of freedom of the scatter estimate.

    Returns
    -------
    float or ndarray
        The three broadcast against each other; relative error about 1e-13 down to 1e-300, then 0.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        k < 2 or df < 0.5; k not whole, q not a number.

    References
    ----------
    .. [1] Newman (1939), Biometrika 31, 20-30. doi:10.1093/biomet/31.1-2.20

    Examples
    --------
    >>> round(studentized_range_sf(3.8768, 3, 10), 4)
    0.05
    """
    laws, index, _ = by_count(k, 2, RangeLaw)
    return upper_tail(q, laws, index, df)


def studentized_range_isf(p: ArrayLike, k: ArrayLike, df: ArrayLike) -> Any:
    """Return q with P(Q > q) = p for the studentized range, the critical value at level p.

    Parameters
    ----------
    p : array_like in [0, 1]
        Tail area; below 1e-300 the answer is infinite.
    k, df : array_like
        As for `studentized_range_sf`.

    Returns
    -------
    float or ndarray
        Broadcast, dimensionless.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        k < 2 or df < 0.5; k not whole, p outside [0, 1].

    Examples
    --------
    >>> round(studentized_range_isf(0.05, 3, 10), 4)
    3.8768
    """
    laws, index, _ = by_count(k, 2, RangeLaw)
    return upper_quantile(p, laws, index, df, from_law=math.sqrt(2.0), sides=2)
