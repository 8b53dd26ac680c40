"""Adjustment of p values for several statements."""

from __future__ import annotations

from collections.abc import Sequence

from qcreport.errors import DegenerateDataError


def holm(p: Sequence[float]) -> tuple[float, ...]:
    """Return Holm's step-down adjusted p values, in input order.

    Parameters
    ----------
    p : sequence of float in [0, 1], length m
        Single p values, of any dependence.

    Returns
    -------
    tuple of float
        The smallest family-wise level at which each is rejected.

    Raises
    ------
    DegenerateDataError
        A value outside [0, 1].

    References
    ----------
    .. [1] Holm (1979), Scand. J. Stat. 6(2), 65-70. https://www.jstor.org/stable/4615733

    Examples
    --------
    >>> holm([0.01, 0.04, 0.03])
    (0.03, 0.06, 0.06)
    """
    if not all(0.0 <= value <= 1.0 for value in p):
        raise DegenerateDataError("A p value must lie in [0, 1].")
    m = len(p)
    adjusted = [0.0] * m
    largest = 0.0
    for rank, index in enumerate(sorted(range(m), key=p.__getitem__)):
        largest = max(largest, min(1.0, (m - rank) * p[index]))
        adjusted[index] = largest
    return tuple(adjusted)
