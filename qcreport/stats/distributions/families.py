"""Shared entry of the public tail and quantile functions: broadcast, check, compute, give back."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import ArrayLike
from scipy import special

from qcreport.errors import DegenerateDataError, TooFewObservationsError
from qcreport.stats.distributions.inverse import quantile
from qcreport.stats.distributions.laws import Law
from qcreport.stats.distributions.quadrature import SMALLEST_P, tail_area
from qcreport.stats.distributions.rows import Array, Index


def by_count(
    k: ArrayLike, smallest: int, make: Callable[[int], Law]
) -> tuple[list[Law], Index, tuple[int, ...]]:
    """Return the distinct laws, each element's index into them (flat), and the shape of `k`."""
    counts = np.asarray(k, dtype=float)
    if counts.size and not np.all(np.isfinite(counts) & (counts == np.floor(counts))):
        raise DegenerateDataError("The number of groups or comparisons must be a whole number.")
    if counts.size and counts.min() < smallest:
        raise TooFewObservationsError(f"At least {smallest} groups or comparisons are needed.")
    if counts.ndim == 0:
        return [make(int(counts))], np.zeros((), dtype=np.intp), ()
    distinct, index = np.unique(counts, return_inverse=True)
    return [make(int(count)) for count in distinct], index.reshape(counts.shape), counts.shape


def upper_tail(statistic: ArrayLike, laws: list[Law], law_index: Index, df: ArrayLike) -> Any:
    """Return P(Q > statistic), broadcast; a statistic at or below 0 has tail 1, an infinite one 0."""
    q, index, nu = np.broadcast_arrays(
        np.asarray(statistic, dtype=float), law_index, np.asarray(df, dtype=float)
    )
    check_df(nu)
    if np.isnan(q).any():
        raise DegenerateDataError("The statistic is not a number.")
    result = np.where(q > 0.0, 0.0, 1.0)
    inner = (q > 0.0) & np.isfinite(q)
    if inner.any():
        result[inner] = tail_area(laws, index[inner], q[inner], nu[inner], slope=False).area
    return give_back(result)


def upper_quantile(
    p: ArrayLike, laws: list[Law], law_index: Index, df: ArrayLike, *, from_law: float, sides: int
) -> Any:
    """Return q with P(Q > q) = p, broadcast; `from_law` turns a single |t| into the law's own scale."""
    area, index, nu = np.broadcast_arrays(np.asarray(p, dtype=float), law_index, np.asarray(df, dtype=float))
    check_df(nu)
    if not np.all((area >= 0.0) & (area <= 1.0)):
        raise DegenerateDataError("A probability must lie in [0, 1].")
    result = np.where(area < SMALLEST_P, np.inf, 0.0)
    inner = (area >= SMALLEST_P) & (area < 1.0)
    if inner.any():
        comparisons = np.array([law.comparisons for law in laws], dtype=float)[index[inner]]
        start = from_law * bonferroni_bound(area[inner], comparisons, nu[inner], sides)
        result[inner] = quantile(laws, index[inner], area[inner], nu[inner], start)
    return give_back(result)


def bonferroni_bound(p: Array, comparisons: Array, df: Array, sides: int) -> Array:
    """Return the t whose summed single tails are p: an upper bound of the quantile of the largest."""
    single = p / (sides * comparisons)
    finite = np.where(np.isinf(df), 1e10, df)
    t = -special.stdtrit(finite, np.minimum(single, 0.4999))
    return np.where(np.isfinite(t) & (t > 0.0), t, 1e3)


def check_df(df: Array) -> None:
    """Refuse df that are not at least 0.5."""
    if df.size and not np.all(df >= 0.5):
        raise TooFewObservationsError("Degrees of freedom must be at least 0.5.")


def give_back(values: Array) -> Any:
    """Return a float for a scalar question, the array otherwise."""
    return float(values) if values.ndim == 0 else values
