"""Critical values that are means of two quantiles, weighted by the groups' squared standard errors.

Used by Dunnett's C and by `dunnett_weighted`; both need the level at which a statistic just meets such a
critical value.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from qcreport.stats.distributions.rows import Array, Index

Tail = Callable[[Array, Array], Array]
Quantile = Callable[[Array, Array], Array]

_SMALLEST_LEVEL = 1e-299
_MOST_STEPS = 80
_CLOSE = 1e-14


def weighted_critical_value(level: Array, variances: Array, dfs: Array, quantile: Quantile) -> Array:
    """Return (c1 a1 + c2 a2) / (a1 + a2) for each pair.

    Parameters
    ----------
    level : (m,) floats in (0, 1)
        Level of each pair.
    variances : (m, 2) floats > 0, in u**2
        a = s**2 / n of both groups.
    dfs : (m, 2) floats
        n - 1 of both groups.
    quantile : callable
        quantile(level, df), on the scale of |t|.

    Returns
    -------
    (m,) floats, dimensionless
    """
    share = variances[:, 0] / (variances[:, 0] + variances[:, 1])
    both = quantile(np.concatenate([level, level]), np.concatenate([dfs[:, 0], dfs[:, 1]]))
    first, second = both[: level.size], both[level.size :]
    return np.asarray(second + (first - second) * share)


def level_at_critical_value(t: Array, variances: Array, dfs: Array, tail: Tail, quantile: Quantile) -> Array:
    """Return the level at which |t| equals its weighted critical value, the p value of each pair.

    The critical value lies between the two quantiles, so the level lies between the two tails; regula falsi
    (Illinois form) in log level closes that bracket.

    Parameters
    ----------
    t : (m,) floats >= 0
        |statistic|.
    variances, dfs
        As for `weighted_critical_value`.
    tail, quantile : callables
        tail(t, df), and its inverse in t.

    Returns
    -------
    (m,) floats in [0, 1]
    """
    tails = np.stack([tail(t, dfs[:, 0]), tail(t, dfs[:, 1])], axis=-1)
    low, high = tails.min(axis=-1), tails.max(axis=-1)
    result = np.where(high <= _SMALLEST_LEVEL, 0.0, high)
    open_rows = np.flatnonzero((high > low) & (high > _SMALLEST_LEVEL) & (t > 0.0))
    if open_rows.size:
        log_low = np.log(np.maximum(low[open_rows], _SMALLEST_LEVEL))
        at = (t[open_rows], variances[open_rows], dfs[open_rows])
        result[open_rows] = np.exp(_illinois(log_low, np.log(high[open_rows]), *at, quantile))
    return result


def _illinois(a: Array, b: Array, t: Array, variances: Array, dfs: Array, quantile: Quantile) -> Array:
    """Return the log level in [a, b] where log critical value equals log t; it falls as the level grows."""

    def excess(x: Array, rows: Index) -> Array:
        level = np.minimum(np.exp(x), 1.0 - 2.0**-53)
        return np.asarray(
            np.log(weighted_critical_value(level, variances[rows], dfs[rows], quantile) / t[rows])
        )

    rows = np.arange(a.size)
    x, fa, fb = 0.5 * (a + b), excess(a, rows), excess(b, rows)
    fa, fb = np.maximum(fa, 0.0), np.minimum(fb, 0.0)
    for _ in range(_MOST_STEPS):
        spread = fa[rows] - fb[rows]
        share = np.where(spread > 0.0, fa[rows] / np.where(spread > 0.0, spread, 1.0), 0.5)
        x[rows] = a[rows] + (b[rows] - a[rows]) * np.clip(share, 0.0, 1.0)
        f = excess(x[rows], rows)
        above = f > 0.0
        fb[rows] = np.where(above, 0.5 * fb[rows], f)
        fa[rows] = np.where(above, f, 0.5 * fa[rows])
        a[rows], b[rows] = np.where(above, x[rows], a[rows]), np.where(above, b[rows], x[rows])
        width = b[rows] - a[rows]
        rows = rows[(np.abs(f) > _CLOSE) & (width > _CLOSE)]
        if rows.size == 0:
            break
    return x
