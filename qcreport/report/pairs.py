"""A compared pair as people read it: the higher one first, most serious first."""

from __future__ import annotations

import math
from dataclasses import dataclass

from qcreport.analysis.result import CharacteristicResult, PairResult

SERIOUSNESS: tuple[str, ...] = (
    "matters",
    "different",
    "not_settled",
    "within_margin",
    "equivalent",
    "not_shown",
    "not_compared",
)
"""Answer codes, most serious first."""

OPEN = frozenset({"different", "not_settled", "not_shown"})
WITHIN = frozenset({"within_margin", "equivalent"})
EXCLUDES_NULL = frozenset({"matters", "different", "within_margin"})

Ends = tuple[float | None, float | None]


@dataclass(frozen=True, slots=True, kw_only=True)
class PairView:
    """One pair, turned so that `difference` is `first` against `second` as printed."""

    first: str
    """Label."""
    second: str
    """Label."""
    difference: float
    """First minus second in the unit; first divided by second on the log scale."""
    low: float | None
    """Lower end of the simultaneous interval; None where open."""
    high: float | None
    """Upper end of the simultaneous interval; None where open."""
    margin: Ends
    """The margin, turned alike."""
    answer: str
    """Code of the answer."""
    pair: PairResult
    """The pair as computed."""

    @property
    def has_interval(self) -> bool:
        """Return whether at least one end is known."""
        return self.low is not None or self.high is not None

    @property
    def only_direction(self) -> bool:
        """Return whether limits leave neither difference nor interval, only who is typically higher."""
        return not self.has_interval and not math.isfinite(self.difference)

    @property
    def has_margin(self) -> bool:
        """Return whether a margin is set on at least one side."""
        return self.margin[0] is not None or self.margin[1] is not None


def is_log(result: CharacteristicResult) -> bool:
    """Return whether differences are ratios."""
    return result.scale == "log"


def null_of(result: CharacteristicResult) -> float:
    """Return the difference that means none: 0, or the ratio 1."""
    return 1.0 if is_log(result) else 0.0


def size_of(difference: float, *, log: bool) -> float:
    """Return how far apart, whatever the direction (logarithmic for ratios)."""
    if not math.isfinite(difference) or (log and difference <= 0):
        return 0.0
    return abs(math.log(difference)) if log else abs(difference)


def as_computed(pair: PairResult, result: CharacteristicResult) -> PairView:
    """Return the pair in the direction it was computed in."""
    return PairView(
        first=pair.first,
        second=pair.second,
        difference=pair.difference,
        low=pair.lower,
        high=pair.upper,
        margin=result.margin,
        answer=pair.answer,
        pair=pair,
    )


def is_lower(pair: PairResult, result: CharacteristicResult) -> bool:
    """Return whether the first group is the lower one; by the ranks where limits leave no difference."""
    if math.isfinite(pair.difference):
        return pair.difference < null_of(result)
    return pair.statistic is not None and pair.statistic < 0


def higher_first(pair: PairResult, result: CharacteristicResult) -> PairView:
    """Return the pair with the higher group first."""
    view = as_computed(pair, result)
    if not is_lower(pair, result):
        return view
    log = is_log(result)
    below, above = view.margin
    return PairView(
        first=pair.second,
        second=pair.first,
        difference=_turned(pair.difference, log=log),
        low=None if pair.upper is None else _turned(pair.upper, log=log),
        high=None if pair.lower is None else _turned(pair.lower, log=log),
        margin=(
            None if above is None else _turned(above, log=log),
            None if below is None else _turned(below, log=log),
        ),
        answer=pair.answer,
        pair=pair,
    )


def _turned(value: float, *, log: bool) -> float:
    if not log:
        return 0.0 - value
    return 1 / value if value else math.inf


def rank_of(answer: str) -> int:
    """Return how serious an answer is; 0 is the most serious."""
    return SERIOUSNESS.index(answer) if answer in SERIOUSNESS else len(SERIOUSNESS)


def most_serious_first(result: CharacteristicResult) -> tuple[PairResult, ...]:
    """Return the pairs by seriousness, then by how far apart they are, then in the order computed."""
    log = is_log(result)
    return tuple(sorted(result.pairs, key=lambda p: (rank_of(p.answer), -size_of(p.difference, log=log))))


def margin_is_even(result: CharacteristicResult) -> bool:
    """Return whether turning a pair round leaves the margin as it is."""
    below, above = result.margin
    if below is None or above is None:
        return below is None and above is None
    return math.isclose(_turned(below, log=is_log(result)), above, rel_tol=1e-12)


def for_figure(pair: PairResult, result: CharacteristicResult) -> PairView:
    """Return the pair as drawn: with a reference or an uneven margin the direction computed is kept."""
    if result.reference is not None or not margin_is_even(result):
        return as_computed(pair, result)
    return higher_first(pair, result)


def widest_of_each_group(result: CharacteristicResult) -> tuple[PairResult, ...]:
    """Return for each group its most serious pair (each pair once), most serious first."""
    ordered = most_serious_first(result)
    wanted = {g.label for g in result.groups}
    kept = []
    for pair in ordered:
        if pair.first in wanted or pair.second in wanted:
            kept.append(pair)
            wanted -= {pair.first, pair.second}
    return tuple(kept)


def n_compared(result: CharacteristicResult) -> int:
    """Return how many groups take part in the comparison; described ones do not count."""
    return len({label for p in result.pairs for label in (p.first, p.second)})
