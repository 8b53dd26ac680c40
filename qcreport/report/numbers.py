"""The numbers of one characteristic as printed: decimals of the export, means and differences one more."""

from __future__ import annotations

import math
from dataclasses import dataclass

from qcreport.analysis.result import CharacteristicResult
from qcreport.plan.model import RANKS
from qcreport.report.pairs import PairView, is_log, null_of
from qcreport.report.rounding import (
    LARGEST_DECIMALS,
    apart_from,
    fixed,
    probability,
    trimmed,
)
from qcreport.report.words_en import Words

MISSING = "–"
RATIO_DECIMALS = 3


@dataclass(frozen=True, slots=True, kw_only=True)
class Numbers:
    """Prints the numbers of one characteristic."""

    result: CharacteristicResult
    words: Words
    margin_text: str
    """The margin as the plan writes it where that is not the number itself, e.g. `5 %`; else empty."""

    @property
    def decimals(self) -> int:
        """Return the decimals of the export."""
        shown = max((u.decimals for g in self.result.groups for u in g.units), default=0)
        return min(shown, LARGEST_DECIMALS - 2)

    @property
    def log(self) -> bool:
        """Return whether differences are ratios."""
        return is_log(self.result)

    @property
    def ranks(self) -> bool:
        """Return whether the procedure compares ranks."""
        return self.result.procedure in RANKS

    @property
    def result_has_limits(self) -> bool:
        """Return whether a value is known only by a limit."""
        return any(g.censored for g in self.result.groups)

    def value(self, value: float | None) -> str:
        """Return a value as the export shows it."""
        return MISSING if value is None or not math.isfinite(value) else fixed(value, self.decimals)

    def mean(self, value: float | None) -> str:
        """Return a mean or standard deviation."""
        return MISSING if value is None or not math.isfinite(value) else fixed(value, self.decimals + 1)

    def difference(self, value: float) -> str:
        """Return a difference or a ratio without its unit."""
        if not math.isfinite(value):
            return MISSING
        return fixed(value, RATIO_DECIMALS if self.log else self.decimals + 1)

    def amount(self, value: float) -> str:
        """Return a difference with its unit, or a ratio."""
        return self.difference(value) if self.log else self.with_unit(self.difference(value))

    def with_unit(self, text: str) -> str:
        """Return `text` followed by the unit."""
        return f"{text} {self.result.unit}".strip()

    def end(self, value: float, view: PairView) -> str:
        """Return an interval's end, with more places where it would read as no difference or the margin."""
        if not math.isfinite(value):
            return MISSING
        marks = [null_of(self.result), *(m for m in view.margin if m is not None)]
        return apart_from(value, RATIO_DECIMALS if self.log else self.decimals + 1, marks)

    def range(self, view: PairView) -> str:
        """Return the interval of a pair without its unit."""
        low = None if view.low is None else self.end(view.low, view)
        high = None if view.high is None else self.end(view.high, view)
        if low is not None and high is not None:
            return self.words.between(low, high)
        if low is not None:
            return self.words.at_least(low)
        if high is not None:
            return self.words.at_most(high)
        return self.words.open_by_limits() if self.result_has_limits else self.words.no_range()

    def range_with_unit(self, view: PairView) -> str:
        """Return the interval of a pair with its unit."""
        text = self.range(view)
        return text if self.log or not view.has_interval else self.with_unit(text)

    def margin(self) -> str:
        """Return the margin with its unit; empty where none is set."""
        below, above = self.result.margin
        if below is None and above is None:
            return ""
        if self.log:
            return self.words.ratio_margin(
                None if below is None else trimmed(below, 6), None if above is None else trimmed(above, 6)
            )
        text = self.words.margin(
            None if below is None else trimmed(abs(below), 6),
            None if above is None else trimmed(abs(above), 6),
            self.result.unit,
        )
        return f"{self.margin_text} ({text})" if self.margin_text else text

    def p(self, value: float | None) -> str:
        """Return a tail probability, kept apart from the error rate it is held against."""
        if value is None or not math.isfinite(value):
            return MISSING
        below, above = self.words.p_ends()
        return probability(value, near=self.result.alpha, below=below, above=above)

    def said_p(self, value: float) -> str:
        """Return a tail probability for a sentence, after the letter p."""
        text = self.p(value)
        return f"= {text}" if text[0].isdigit() else text

    def level(self) -> str:
        """Return the simultaneous level, e.g. `95 %`."""
        return f"{trimmed((1 - self.result.alpha) * 100, 4)} %"
