"""Tables of P(R > r) on the absolute grid r = exp(j step), one per law and level, grown as asked for.

A value depends on its own j only, so a table may grow in any order and still hold the same bits.
"""

from __future__ import annotations

from functools import lru_cache

import numpy as np

from qcreport.stats.distributions.laws import Law
from qcreport.stats.distributions.rows import Array
from qcreport.stats.distributions.scale import STEPS

LOWEST_LOG_R = -40.0
"""Below, the tail equals its limit at r = 0 in double precision."""


class GrowingTable:
    """P(R > exp(j step)) for a contiguous range of j."""

    __slots__ = ("_held", "_law", "_step", "lowest")

    def __init__(self, law: Law, level: int) -> None:
        self._law = law
        self._step = float(STEPS[level])
        self.lowest = int(np.floor(LOWEST_LOG_R / self._step))
        self._held: tuple[int, Array] = (0, np.empty(0))

    def part(self, first: int, last: int) -> Array:
        """Return the values for j = first, ..., last, both at or above `lowest`."""
        start, values = self._held
        if values.size == 0:
            start, values = first, self._computed(first, last)
        if first < start:
            start, values = first, np.concatenate([self._computed(first, start - 1), values])
        end = start + values.size - 1
        if last > end:
            values = np.concatenate([values, self._computed(end + 1, last)])
        self._held = (
            start,
            values,
        )  # one assignment: a reader in another thread sees the old or the new pair
        return values[first - start : last - start + 1]

    def _computed(self, first: int, last: int) -> Array:
        return self._law.upper_tail(np.exp(np.arange(first, last + 1) * self._step))


@lru_cache(maxsize=512)
def table(law: Law, level: int) -> GrowingTable:
    """Return the table of a law at a level; equal laws share it."""
    return GrowingTable(law, level)
