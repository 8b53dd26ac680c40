"""Axes: where a value stands on paper, and which values get a tick."""

from __future__ import annotations

import math
from dataclasses import dataclass

from qcreport.report.rounding import fixed

_STEPS = (1.0, 2.0, 5.0, 10.0)


@dataclass(frozen=True, slots=True, kw_only=True)
class Axis:
    """A linear or logarithmic axis from `low` to `high`, drawn from `left` to `right` (points)."""

    low: float
    high: float
    left: float
    right: float
    logarithmic: bool

    def at(self, value: float) -> float:
        """Return the position of `value`, not held inside the axis."""
        low, high, here = self._scaled(self.low), self._scaled(self.high), self._scaled(value)
        return self.left + (here - low) / (high - low) * (self.right - self.left)

    def inside(self, value: float) -> float:
        """Return the position of `value`, held inside the axis."""
        return min(max(self.at(value), self.left), self.right)

    def covers(self, value: float) -> bool:
        """Return whether `value` lies on the axis."""
        return self.low <= value <= self.high

    def _scaled(self, value: float) -> float:
        return math.log(value) if self.logarithmic else value

    def ticks(self, most: int) -> tuple[tuple[float, str], ...]:
        """Return at most about `most` round values with their texts."""
        values, decimals = self._log_ticks(most) if self.logarithmic else self._linear_ticks(most)
        return tuple((v, fixed(v, decimals)) for v in values)

    def _linear_ticks(self, most: int) -> tuple[list[float], int]:
        step, exponent = round_step((self.high - self.low) / most)
        first, last = math.ceil(self.low / step - 1e-9), math.floor(self.high / step + 1e-9)
        decimals = max(0, -exponent)
        return [round(k * step, 12) + 0.0 for k in range(first, last + 1)], decimals

    def _log_ticks(self, most: int) -> tuple[list[float], int]:
        if self.high / self.low < 8:
            return self._linear_ticks(most)
        low, high = math.floor(math.log10(self.low)), math.ceil(math.log10(self.high))
        values = [m * 10.0**e for e in range(low, high + 1) for m in (1, 2, 5)]
        if (high - low) * 3 > most * 2:
            values = [10.0**e for e in range(low, high + 1)]
        kept = [v for v in values if self.low * 0.999999 <= v <= self.high * 1.000001]
        return kept, max(0, -math.floor(math.log10(kept[0]) + 1e-9))


def round_step(raw: float) -> tuple[float, int]:
    """Return the smallest of 1, 2, 5 × 10^k that is not below `raw`, and the exponent of its last digit."""
    exponent = math.floor(math.log10(raw))
    for factor in _STEPS:
        step = factor * 10.0**exponent
        if step >= raw * (1 - 1e-9):
            return step, exponent + 1 if factor == 10.0 else exponent
    raise AssertionError("one of the steps reaches ten times the power of ten below")


def padded(low: float, high: float, *, logarithmic: bool, share: float = 0.04) -> tuple[float, float]:
    """Return the range widened by `share` on both sides; a single value gets a range around it."""
    if logarithmic:
        if high <= low:
            return low / 1.1, high * 1.1
        factor = (high / low) ** share
        return low / factor, high * factor
    if high <= low:
        reach = abs(low) * 0.05 or 1.0
        return low - reach, high + reach
    reach = (high - low) * share
    return low - reach, high + reach
