"""What the design of a comparison can see, and what would settle what it leaves open."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Final

from qcreport.stats.comparison import PairwiseComparison
from qcreport.stats.detectable import detectable_difference, scatter_limits
from qcreport.stats.sizes import Design, sample_size_for
from qcreport.stats.summary import GroupSummary
from qcreport.stats.unequal import welch_pair

Margin = tuple[float | None, float | None]
"""Below (negative) and above (positive), on the scale of the comparison."""

OPEN_ANSWERS: Final = frozenset({"different", "not_settled"})
"""Answers that more results could sharpen."""
MOST_NEEDED: Final = 300
"""Pairs up to which the number of results that would settle each is searched. Each asks for critical values
of its own, so that it takes minutes for 200 groups, whose 19,900 numbers nobody reads."""


def df_of(comparison: PairwiseComparison, groups: Mapping[str, GroupSummary]) -> float:
    """Return the pair's degrees of freedom; Welch–Satterthwaite where the procedure itself has none."""
    if comparison.df is not None:
        return comparison.df
    return welch_pair(groups[comparison.first], groups[comparison.second]).df


@dataclass(frozen=True, slots=True, kw_only=True)
class Planning:
    """One comparison seen as a design, on the scale of the comparison."""

    design: Design
    """Procedure, number of groups, error rate."""
    margin: Margin
    """Smallest difference that matters."""
    groups: Mapping[str, GroupSummary]
    """The compared groups by label."""
    scatter: float | None
    """Standard deviation of a result where the plan gives it; None: as seen in the groups."""

    def detectable(self, pair: PairwiseComparison) -> float | None:
        """Return the true difference that would be shown with probability 0.80; None where none would."""
        if pair.se is None or pair.critical_value is None:
            return None
        se = pair.se
        if self.scatter is not None:
            first, second = self.groups[pair.first], self.groups[pair.second]
            se = self.scatter * math.sqrt(1.0 / first.n + 1.0 / second.n)
        return detectable_difference(se, df_of(pair, self.groups), pair.critical_value)

    def detectable_limits(self, pair: PairwiseComparison, detectable: float) -> tuple[float, float] | None:
        """Return the detectable difference at the 90 % limits of the scatter; None where it is known."""
        if self.scatter is not None:
            return None
        return scatter_limits(detectable, df_of(pair, self.groups))

    def needed_n(self, pair: PairwiseComparison) -> int | None:
        """Return about how many results a group would put the whole interval on one side of the margin.

        The difference and the scatter are taken as seen; None where no number does: the difference lies on
        the margin itself, no margin is set, or an interval open to one side reaches across it for ever.
        """
        below, above = self.margin
        if pair.lower is None:
            ends = [m for m in (below,) if m is not None and pair.difference < m]
        elif pair.upper is None:
            ends = [m for m in (above,) if m is not None and pair.difference > m]
        else:
            ends = [m for m in (below, above) if m is not None]
        distances = [abs(pair.difference - m) for m in ends]
        if not distances or min(distances) == 0.0:
            return None
        first, second = self.groups[pair.first], self.groups[pair.second]
        variance = 0.5 * (first.variance + second.variance)
        return sample_size_for(self.design, variance=variance, margin=min(distances))
