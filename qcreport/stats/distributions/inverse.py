"""Quantiles by safeguarded Newton steps in (log q, log p), started from the Bonferroni bound."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from qcreport.stats.distributions.laws import Law
from qcreport.stats.distributions.quadrature import tail_area
from qcreport.stats.distributions.rows import Array, Index
from qcreport.stats.distributions.scale import LARGEST_TABLED_DF

_MOST_STEPS = 60
_CLOSE = 2e-14
_LARGEST_LOG = 700.0
"""Quantiles beyond exp(700) are given as infinite."""


def quantile(laws: Sequence[Law], law_of_row: Index, p: Array, df: Array, start: Array) -> Array:
    """Return q with P(R / s > q) = p.

    log p is concave and falling in log q, so Newton's method from the right of the root (`start`, a bound
    from the sum of the single tails) falls to it without overshoot; a step that would leave the bracket is
    replaced by its middle.

    Parameters
    ----------
    laws, law_of_row
        As for `tail_area`.
    p : (n,) floats
        In [1e-300, p(0)).
    df, start : (n,) floats
        Degrees of freedom; a finite upper bound of q.

    Returns
    -------
    (n,) floats
    """
    x = np.log(start)
    low, high = np.full(x.shape, -np.inf), np.full(x.shape, np.inf)
    target = np.log(p)
    enough = np.where(
        df <= LARGEST_TABLED_DF, 3e-9, 1e-14
    )  # squared by the step itself where the slope is exact
    active = np.arange(x.size)
    step = 0
    while active.size and step < _MOST_STEPS:
        step += 1
        tail = tail_area(laws, law_of_row[active], np.exp(x[active]), df[active])
        here = x[active]
        with np.errstate(divide="ignore", invalid="ignore"):
            excess = np.log(tail.area) - target[active]
            move = -excess * tail.area / tail.slope
        low[active] = np.where(excess > 0.0, here, low[active])
        high[active] = np.where(excess <= 0.0, here, high[active])
        x[active] = _inside(np.minimum(here + move, _LARGEST_LOG + 1.0), low[active], high[active], here)
        moved = np.abs(x[active] - here)
        active = active[(np.abs(excess) > _CLOSE) & (moved > enough[active])]
    return np.where(x > _LARGEST_LOG, np.inf, np.exp(x))


def _inside(proposal: Array, low: Array, high: Array, here: Array) -> Array:
    """Keep a proposal inside its bracket; else halve the bracket, or step out where one end is open."""
    bounded_low = np.where(np.isfinite(low), low, here - 2.0)
    bounded_high = np.where(np.isfinite(high), high, here + 2.0)
    good = np.isfinite(proposal) & (proposal >= low) & (proposal <= high)
    return np.where(good, proposal, 0.5 * (bounded_low + bounded_high))
