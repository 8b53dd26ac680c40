"""Upper tails of Q = R / s: one integral over log s, vectorised over (statistic, law, df).

With v = log r the tail is the integral of g(v - log q) P(R > exp(v)) over v, by the trapezoid rule on an
absolute grid: P(R > r) is tabulated once for each law and step, and a (q, df) costs one gather and one
exponential a node. Both factors are analytic in a strip, so the rule converges geometrically; the step
min(2**-3.5, 0.55 / sqrt(2 df)) leaves 1e-16.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple

import numpy as np

from qcreport.stats.distributions import scale
from qcreport.stats.distributions.laws import Law, coarsest_level, reach
from qcreport.stats.distributions.rows import LENGTH_UNIT, Array, Index, distinct, row_blocks
from qcreport.stats.distributions.tables import table

SMALLEST_P = 1e-300
"""Tails below are given as 0."""
_LOCAL_NODES = 40
_LOCAL_STEP = 0.5
"""Nodes for large df, in standard deviations of log s."""
_KNOWN_DF = 1e18
"""From here a finite df changes no tail down to 1e-300 by more than rounding does."""


class Tail(NamedTuple):
    """A tail area and how it changes."""

    area: Array
    """P(Q > q)."""
    slope: Array
    """d area / d log q, never positive."""


def tail_area(laws: Sequence[Law], law_of_row: Index, q: Array, df: Array, *, slope: bool = True) -> Tail:
    """Return P(R / s > q) and, where asked for, its slope in log q.

    Parameters
    ----------
    laws : sequence of Law
        The distinct laws.
    law_of_row : (n,) integers
        Index into `laws` for each row.
    q, df : (n,) floats
        Statistic > 0, finite; degrees of freedom > 0, may be infinite.
    slope : bool
        Whether the slope is wanted; else it is zero.

    Returns
    -------
    Tail
        Two arrays (n,). The slope of a large df is taken by a central difference.
    """
    tabled = df <= scale.LARGEST_TABLED_DF
    if tabled.all():
        return _bounded(*_from_tables(laws, law_of_row, q, df, slope))
    area, slopes = np.empty(q.shape), np.zeros(q.shape)
    rows = np.flatnonzero(tabled)
    if rows.size:
        area[rows], slopes[rows] = _from_tables(laws, law_of_row[rows], q[rows], df[rows], slope)
    for number, law in enumerate(laws):
        of_law = ~tabled & (law_of_row == number)
        for rows, untabled in (
            (np.flatnonzero(of_law & (df < _KNOWN_DF)), _from_local_nodes),
            (np.flatnonzero(of_law & (df >= _KNOWN_DF)), _from_law),
        ):
            if rows.size:
                area[rows] = untabled(law, q[rows], df[rows])
                if slope:
                    slopes[rows] = _slope_by_difference(law, q[rows], df[rows])
    return _bounded(area, slopes)


def _bounded(area: Array, slope: Array) -> Tail:
    """Return the tail with areas in [0, 1] and lost ones at 0."""
    return Tail(np.where(area < SMALLEST_P, 0.0, np.minimum(area, 1.0)), slope)


class _Windows(NamedTuple):
    """Where each row begins on its grid and in the flat table."""

    first: Index
    """First grid index j of each row."""
    length: Index
    """Number of nodes that the row needs."""
    base: Index
    """Position in the flat table of the row's j = 0."""
    lowest: Index
    """Position in the flat table of the first value that the row may read."""
    flat: Array
    """Tables laid end to end."""


def _from_tables(laws: Sequence[Law], law_of_row: Index, q: Array, df: Array, with_slope: bool) -> Tail:
    log_q = np.log(q)
    coarsest = np.array([coarsest_level(law) for law in laws], dtype=np.intp)
    level = np.maximum(scale.levels(df), coarsest[law_of_row])
    step = scale.STEPS[level]
    windows = _windows(laws, law_of_row, level, log_q, df)
    start = windows.first * step - log_q  # u at the first node
    area, slope = np.empty(q.shape), np.zeros(q.shape)
    for rows, length, depth in row_blocks(windows.length, level):
        offsets = scale.STEPS[depth] * np.arange(length)
        place = (windows.base[rows] + windows.first[rows])[:, None] + np.arange(length)
        np.maximum(place, windows.lowest[rows, None], out=place)
        grown = np.exp(2.0 * start[rows])[:, None] * np.exp(2.0 * offsets)
        grown -= 1.0  # s**2 - 1, s**2 = exp(2u)
        part = (start[rows, None] + offsets) - 0.5 * grown
        part *= df[rows, None]
        np.exp(part, out=part)
        part *= windows.flat.take(place)
        area[rows] = part.sum(axis=-1)
        if with_slope:
            part *= grown
            slope[rows] = part.sum(axis=-1)
    constant = scale.density_constant(df) * step
    return Tail(area * constant, np.minimum(slope * df * constant, 0.0))


def _windows(laws: Sequence[Law], law_of_row: Index, level: Index, log_q: Array, df: Array) -> _Windows:
    """Place the window of each row and lay the tables that they need end to end."""
    step = scale.STEPS[level]
    decay = np.array([law.decay for law in laws])[law_of_row]
    log_reach = np.log([reach(law) for law in laws])[law_of_row]
    peak = scale.peak(df, log_q, decay)
    low = peak - scale.left_width(df)
    high = np.minimum(log_q + scale.right_width(df), np.logaddexp(peak, log_reach))
    first = np.floor(low / step).astype(np.intp)
    length = np.ceil((high - low) / step).astype(np.intp) + 2
    code_of_row = law_of_row * scale.STEPS.size + level
    codes = distinct(code_of_row)
    if len(codes) == 1:  # one design asks, as in a single table of pairs
        held = table(laws[codes[0] // scale.STEPS.size], codes[0] % scale.STEPS.size)
        start, stop = _span(first, length, held.lowest)
        return _Windows(
            first, length, np.full_like(first, -start), np.zeros_like(first), held.part(start, stop)
        )
    base, lowest = np.empty_like(first), np.empty_like(first)
    parts: list[Array] = []
    size = 0
    for code in codes:
        rows = code_of_row == code
        held = table(laws[code // scale.STEPS.size], code % scale.STEPS.size)
        start, stop = _span(first[rows], length[rows], held.lowest)
        parts.append(held.part(start, stop))
        base[rows] = size - start
        lowest[rows] = size
        size += stop - start + 1
    return _Windows(first, length, base, lowest, np.concatenate(parts))


def _span(first: Index, length: Index, lowest: int) -> tuple[int, int]:
    """Return the first and the last grid index that rows may read."""
    start = max(int(first.min()), lowest)
    return start, max(int((first + length).max()) + LENGTH_UNIT, start)


def _from_local_nodes(law: Law, q: Array, df: Array) -> Array:
    """Large df: the law at nodes about the peak of the integrand."""
    sd = 1.0 / np.sqrt(2.0 * df)
    centre = scale.peak(df, np.log(q), law.decay) - np.log(q)
    offsets = (np.arange(_LOCAL_NODES + 1) - _LOCAL_NODES // 2) * _LOCAL_STEP
    u = centre[:, None] + offsets * sd[:, None]
    tail = law.upper_tail((q[:, None] * np.exp(u)).ravel()).reshape(u.shape)
    part = np.exp(-df[:, None] * _excess(u)) * tail
    return np.asarray(part.sum(axis=-1) * _LOCAL_STEP * sd * scale.density_constant(df))


def _from_law(law: Law, q: Array, df: Array) -> Array:
    """Infinite df, or so many that the scatter is as good as known: the law itself."""
    return law.upper_tail(q)


def _excess(u: Array) -> Array:
    """Return (exp(2u) - 1 - 2u) / 2 by its series, |u| < 0.3."""
    y = 2.0 * u
    total = np.ones(u.shape)
    for n in range(14, 2, -1):
        total = 1.0 + total * y / n
    return total * y * y / 4.0


def _slope_by_difference(law: Law, q: Array, df: Array) -> Array:
    """Return an approximate slope in log q, enough for Newton's method: that of the law at the peak."""
    finite = np.minimum(df, 1e300)
    at = q * np.exp(scale.peak(finite, np.log(q), law.decay) - np.log(q))
    h = 1e-4
    return np.asarray((law.upper_tail(at * (1.0 + h)) - law.upper_tail(at * (1.0 - h))) / (2.0 * h))
