"""English: the words in and about the figures."""

from __future__ import annotations

from collections.abc import Sequence

from qcreport.analysis.result import CharacteristicResult, GroupResult
from qcreport.plan.model import Groups
from qcreport.report.pairs import PairView
from qcreport.report.rounding import fixed

_SHORT = {
    "matters": "beyond the margin",
    "different": "differs; margin open",
    "not_settled": "not settled",
    "within_margin": "differs, within the margin",
    "equivalent": "within the margin",
    "not_shown": "no difference shown",
    "not_compared": "not compared",
}


class FigureWords:
    """Words that depend on what is compared: batches or lines."""

    def __init__(self, groups: Groups) -> None:
        self.group = "batch" if groups is Groups.BATCH else "line"
        self.group_plural = "batches" if groups is Groups.BATCH else "lines"

    def mean_heading(self) -> str:
        """Return the head of the numbers at the right."""
        return "mean"

    def lower_limit(self, text: str) -> str:
        """Return the name of the lower specification limit."""
        return f"lower limit {text}"

    def upper_limit(self, text: str) -> str:
        """Return the name of the upper specification limit."""
        return f"upper limit {text}"

    def margin_bar(self, text: str) -> str:
        """Return what the scale bar says."""
        return f"the margin: {text}"

    def margin_off_scale(self, text: str) -> str:
        """Return what stands in place of a scale bar that would not fit."""
        return f"the margin: {text} (longer than this axis)"

    def margin_edge(self, text: str, *, signed: bool) -> str:
        """Return the name of a margin line."""
        return f"margin {'+' if signed else ''}{text}"

    def no_difference(self) -> str:
        """Return the name of the zero line."""
        return "no difference"

    def ratio_unit(self) -> str:
        """Return what the axis counts on the log scale."""
        return "ratio"

    def in_short(self, answer: str, has_margin: bool) -> str:
        """Return an answer as the figure and the table print it."""
        if answer == "different" and not has_margin:
            return "differs; no margin set"
        return _SHORT.get(answer, answer)

    def values_alt(self, result: CharacteristicResult, groups: Sequence[GroupResult], decimals: int) -> str:
        """Return the panel of values in words."""
        rows = "; ".join(
            f"{g.label}: {g.n} values, {fixed(g.minimum, decimals)} to {fixed(g.maximum, decimals)}, "
            f"mean {fixed(g.mean, decimals + 1)}"
            if g.minimum is not None and g.maximum is not None and g.mean is not None
            else f"{g.label}: {g.n} values, {g.censored} of them known only by a limit"
            for g in groups
        )
        return f"Every value of {result.title} in {result.unit}, one row a {self.group}. {rows}."

    def apart_alt(self, result: CharacteristicResult, views: Sequence[PairView], decimals: int) -> str:
        """Return the panel of differences in words."""
        rows = "; ".join(
            f"{v.first} against {v.second}: {self.range(v.low, v.high, decimals + 1)}, "
            f"{self.in_short(v.answer, v.has_margin)}"
            for v in views
        )
        return f"How far apart the {self.group_plural} are in {result.title}. {rows}."

    def range(self, low: float | None, high: float | None, decimals: int) -> str:
        """Return an interval in words, plainly rounded."""
        if low is None:
            return "no interval" if high is None else f"at most {fixed(high, decimals)}"
        if high is None:
            return f"at least {fixed(low, decimals)}"
        return f"{fixed(low, decimals)} to {fixed(high, decimals)}"

    def mark_alt(self, answer: str, view: PairView | None, decimals: int) -> str:
        """Return a mark in words."""
        if view is None:
            return self.in_short(answer, False)
        return (
            f"{view.first} against {view.second}: {self.range(view.low, view.high, decimals + 1)}, "
            f"{self.in_short(answer, view.has_margin)}"
        )

    def grid_alt(self, result: CharacteristicResult) -> str:
        """Return the grid in words."""
        counts = dict.fromkeys(_SHORT, 0)
        for pair in result.pairs:
            counts[pair.answer] = counts.get(pair.answer, 0) + 1
        said = ", ".join(f"{n} {_SHORT.get(a, a)}" for a, n in counts.items() if n)
        return f"All {len(result.pairs)} pairs of {result.title} as a grid of marks: {said}."

    def grid_legend(self, *, has_margin: bool) -> tuple[tuple[str, str], ...]:
        """Return what each mark of the grid means."""
        if not has_margin:
            return ("different", "differs"), ("not_shown", "no difference shown")
        return (
            ("matters", "beyond the margin"),
            ("different", "differs, margin open"),
            ("not_settled", "not settled"),
            ("equivalent", "within the margin"),
        )
