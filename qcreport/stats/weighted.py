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

_SMALLEST_T = 1e-300
_SMALLEST_TAIL = 1e-310
_WIDEST = 46.0
"""The two points differ by at most this in their logarithms."""
_MOST_STEPS = 120
_CLOSE = 1e-13
_FIRST_STEP = 0.25


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


def level_at_critical_value(t: Array, variances: Array, dfs: Array, tail: Tail) -> Array:
    """Return the level at which |t| equals its weighted critical value, the p value of each pair.

    Sought are two points x and y with w x + (1 - w) y = t and equal tails, w <= 1/2 the smaller weight;
    regula falsi in log x (Illinois form) on the difference of the log tails,
    which falls in x.

    Parameters
    ----------
    t : (m,) floats >= 0
        |statistic|.
    variances, dfs
        As for `weighted_critical_value`.
    tail : callable
        tail(t, df), on the scale of |t|.

    Returns
    -------
    (m,) floats in [0, 1]
    """
    at_zero, exactly_zero = tail(np.zeros(t.shape), dfs[:, 0]), t <= 0.0
    t = np.maximum(t, _SMALLEST_T)
    light = np.argmin(variances, axis=-1)[:, None]
    a = np.take_along_axis(variances, light, axis=-1)[:, 0]
    df_light = np.take_along_axis(dfs, light, axis=-1)[:, 0]
    df_heavy = np.take_along_axis(dfs, 1 - light, axis=-1)[:, 0]
    weight = a / (variances[:, 0] + variances[:, 1])

    def excess(u: Array, rows: Index) -> tuple[Array, Array]:
        """Return log tail of x less log tail of y, and the tail of y, the better conditioned of the two."""
        w, size = weight[rows], t[rows]
        y = np.maximum((1.0 - w * np.exp(u)) / (1.0 - w), 0.0) * size
        both = tail(np.concatenate([np.exp(u) * size, y]), np.concatenate([df_light[rows], df_heavy[rows]]))
        logs = np.log(np.maximum(both, _SMALLEST_TAIL))
        return logs[: rows.size] - logs[rows.size :], both[rows.size :]

    level = _root_level(excess, np.minimum(-np.log(weight), _WIDEST))
    return np.where(exactly_zero, at_zero, level)


def _root_level(excess: Callable[[Array, Index], tuple[Array, Array]], most: Array) -> Array:
    """Return the tail of y at the root of `excess` in u = log(x / t), -46 <= u <= most, for each row."""
    rows = np.arange(most.size)
    near = np.zeros(most.size)
    f_near, level = excess(near, rows)
    rising = f_near > 0.0
    far = np.where(rising, np.minimum(_FIRST_STEP, most), -_FIRST_STEP)
    f_far = np.zeros(most.size)
    rows = rows[np.abs(f_near) > _CLOSE]
    searching = rows
    while searching.size:
        f_far[searching], level[searching] = excess(far[searching], searching)
        limit = np.where(rising, most, -_WIDEST)[searching]
        same_side = ((f_far[searching] > 0.0) == rising[searching]) & (far[searching] != limit)
        searching = searching[same_side]
        near[searching], f_near[searching] = far[searching], f_far[searching]
        far[searching] = np.clip(4.0 * far[searching], -_WIDEST, most[searching])
    _close_in(excess, rows, (near, far), (f_near, f_far), level)
    return level


def _close_in(
    excess: Callable[[Array, Index], tuple[Array, Array]],
    rows: Index,
    ends: tuple[Array, Array],
    values: tuple[Array, Array],
    level: Array,
) -> None:
    """Shrink each row's bracket, writing the tail at its newest point into `level`."""
    (a, b), (fa, fb) = ends, values
    last = np.zeros(level.size)  # which end moved last: +1 the first, -1 the second
    step = 0
    while rows.size and step < _MOST_STEPS:
        step += 1
        width = b[rows] - a[rows]
        u = a[rows] + width * np.clip(fa[rows] / (fa[rows] - fb[rows]), 0.0, 1.0)
        f, level[rows] = excess(u, rows)
        side = np.where((f > 0.0) == (fa[rows] > 0.0), 1.0, -1.0)
        kept = np.where(
            side == last[rows], 0.5, 1.0
        )  # the Illinois rule: an end kept twice loses half its weight
        last[rows] = side
        fa[rows], fb[rows] = (
            np.where(side > 0.0, f, kept * fa[rows]),
            np.where(side > 0.0, kept * fb[rows], f),
        )
        a[rows], b[rows] = np.where(side > 0.0, u, a[rows]), np.where(side > 0.0, b[rows], u)
        rows = rows[(np.abs(f) > _CLOSE) & (np.abs(width) > _CLOSE)]
