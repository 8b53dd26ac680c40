"""Largest t of several groups against one reference, any sizes, pooled scatter."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Sequence
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from qcreport.errors import DegenerateDataError, TooFewObservationsError
from qcreport.stats.distributions.families import check_df, give_back, upper_quantile, upper_tail
from qcreport.stats.distributions.inverse import quantile
from qcreport.stats.distributions.laws import AllBelowLaw, Law, ManyToOneLaw
from qcreport.stats.distributions.quadrature import tail_area
from qcreport.stats.distributions.rows import Array


def many_to_one_sf(
    t: ArrayLike, n_reference: int, n_others: Sequence[int], df: ArrayLike, two_sided: bool = True
) -> Any:
    """Return P(max > t) for the t statistics of m groups against one reference.

    Parameters
    ----------
    t : array_like
        Statistic, dimensionless; signed where `two_sided` is false.
    n_reference : int >= 1
        Size of the reference group.
    n_others : sequence of int >= 1, length m
        Sizes of the other groups.
    df : array_like >= 0.5, may be infinite
        Degrees of freedom of the pooled scatter.
    two_sided : bool
        The largest |t|, or the largest signed t.

    Returns
    -------
    float or ndarray
        `t` and `df` broadcast; relative error about 1e-13.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        A size below 1, no other group, df < 0.5; t not a number.

    Notes
    -----
    The correlation of groups i and j is lambda_i lambda_j with lambda_i = sqrt(n_i / (n_reference + n_i))
    [1]_, so that given the reference's deviate the differences are independent and one integral is exact
    for any sizes.

    References
    ----------
    .. [1] Dunnett (1955), J. Am. Stat. Assoc. 50, 1096-1121. doi:10.1080/01621459.1955.10501294
    .. [2] Dunnett (1964), Biometrics 20(3), 482-491. doi:10.2307/2528490

    Examples
    --------
    >>> round(many_to_one_sf(2.7590, 6, [6, 6, 6], 10), 4)
    0.05
    """
    law = _law(n_reference, n_others, two_sided)
    statistic, nu = np.broadcast_arrays(np.asarray(t, dtype=float), np.asarray(df, dtype=float))
    positive = upper_tail(np.maximum(statistic, 0.0), [law], _zeros(statistic), nu)
    if two_sided or not (statistic <= 0.0).any():
        return positive
    result = np.array(positive)
    rows = statistic <= 0.0
    result[rows] = 1.0 - _below(law, -statistic[rows], nu[rows])
    return give_back(result)


def many_to_one_isf(
    p: ArrayLike, n_reference: int, n_others: Sequence[int], df: ArrayLike, two_sided: bool = True
) -> Any:
    """Return t with P(max > t) = p: the critical value of the comparisons with one reference.

    Parameters
    ----------
    p : array_like in [0, 1]
        Tail area.
    n_reference, n_others, df, two_sided
        As for `many_to_one_sf`.

    Returns
    -------
    float or ndarray
        Broadcast, dimensionless; negative where signed statistics exceed it with more than their chance at 0.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        A size below 1, no other group, df < 0.5; p outside [0, 1].

    Examples
    --------
    >>> round(many_to_one_isf(0.05, 6, [6, 6, 6], 10), 4)
    2.759
    """
    law = _law(n_reference, n_others, two_sided)
    area, nu = np.broadcast_arrays(np.asarray(p, dtype=float), np.asarray(df, dtype=float))
    sides = 2 if two_sided else 1
    if two_sided:
        return upper_quantile(area, [law], _zeros(area), nu, from_law=1.0, sides=sides)
    at_zero = 1.0 - float(law.all_below(np.zeros(1))[0])
    result = np.array(
        upper_quantile(np.where(area < at_zero, area, 1.0), [law], _zeros(area), nu, from_law=1.0, sides=1)
    )
    rows = area > at_zero
    if rows.any():
        result[rows] = -_below_quantile(law, 1.0 - area[rows], nu[rows])
    return give_back(result)


def _zeros(like: Array) -> Any:
    return np.zeros(like.shape, dtype=np.intp)


def _law(n_reference: int, n_others: Sequence[int], two_sided: bool) -> ManyToOneLaw:
    """Return the law of a design; groups of equal size share a loading."""
    if not n_others:
        raise TooFewObservationsError("At least one group beside the reference is needed.")
    if min(n_reference, *n_others) < 1:
        raise TooFewObservationsError("Every group needs at least one result.")
    sizes = sorted(Counter(n_others).items())
    loadings = tuple(math.sqrt(n / (n_reference + n)) for n, _ in sizes)
    return ManyToOneLaw(loadings=loadings, counts=tuple(count for _, count in sizes), two_sided=two_sided)


def _below(law: ManyToOneLaw, size: Array, df: Array) -> Array:
    """Return P(every signed t < -size)."""
    check_df(df)
    laws: list[Law] = [AllBelowLaw(law)]
    result = np.where(np.isinf(size), 0.0, law.all_below(np.zeros(1))[0])
    inner = (size > 0.0) & np.isfinite(size)
    if inner.any():
        result[inner] = tail_area(
            laws, np.zeros(int(inner.sum()), dtype=np.intp), size[inner], df[inner]
        ).area
    return result


def _below_quantile(law: ManyToOneLaw, p: Array, df: Array) -> Array:
    """Return size with P(every signed t < -size) = p, for p below its value at 0."""
    if (p <= 0.0).any():
        raise DegenerateDataError("A signed critical value needs a probability below 1.")
    laws: list[Law] = [AllBelowLaw(law)]
    start = np.ones(p.shape)
    return quantile(laws, np.zeros(p.shape, dtype=np.intp), p, df, start)
