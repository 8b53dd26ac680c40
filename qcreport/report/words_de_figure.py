"""Deutsch: die Wörter in und an den Bildern. German: the words in and about the figures."""

from __future__ import annotations

from collections.abc import Sequence

from qcreport.analysis.result import CharacteristicResult, GroupResult
from qcreport.plan.model import Groups
from qcreport.report.pairs import PairView
from qcreport.report.rounding import fixed
from qcreport.report.words_en_figure import FigureWords

_SHORT = {
    "matters": "jenseits der Grenze",
    "different": "verschieden; Grenze offen",
    "not_settled": "nicht geklärt",
    "within_margin": "verschieden, innerhalb",
    "equivalent": "innerhalb der Grenze",
    "not_shown": "kein Unterschied gezeigt",
    "not_compared": "nicht verglichen",
}


class FigureWordsDe(FigureWords):
    """Words that depend on what is compared: Chargen or Linien, both feminine."""

    def __init__(self, groups: Groups) -> None:
        self.group = "Charge" if groups is Groups.BATCH else "Linie"
        self.group_plural = "Chargen" if groups is Groups.BATCH else "Linien"

    def mean_heading(self) -> str:
        """Return the head of the numbers at the right."""
        return "Mittel"

    def lower_limit(self, text: str) -> str:
        """Return the name of the lower specification limit."""
        return f"untere Spezifikation {text}"

    def upper_limit(self, text: str) -> str:
        """Return the name of the upper specification limit."""
        return f"obere Spezifikation {text}"

    def margin_bar(self, text: str) -> str:
        """Return what the scale bar says."""
        return f"die Grenze: {text}"

    def margin_off_scale(self, text: str) -> str:
        """Return what stands in place of a scale bar that would not fit."""
        return f"die Grenze: {text} (länger als diese Achse)"

    def margin_edge(self, text: str, *, signed: bool) -> str:
        """Return the name of a margin line."""
        return f"Grenze {'+' if signed else ''}{text}"

    def no_difference(self) -> str:
        """Return the name of the zero line."""
        return "kein Unterschied"

    def ratio_unit(self) -> str:
        """Return what the axis counts on the log scale."""
        return "Verhältnis"

    def in_short(self, answer: str, has_margin: bool) -> str:
        """Return an answer as the figure and the table print it."""
        if answer == "different" and not has_margin:
            return "verschieden; keine Grenze"
        return _SHORT.get(answer, answer)

    def values_alt(self, result: CharacteristicResult, groups: Sequence[GroupResult], decimals: int) -> str:
        """Return the panel of values in words."""
        rows = "; ".join(
            f"{g.label}: {g.n} Werte, {fixed(g.minimum, decimals)} bis {fixed(g.maximum, decimals)}, "
            f"Mittel {fixed(g.mean, decimals + 1)}"
            if g.minimum is not None and g.maximum is not None and g.mean is not None
            else f"{g.label}: {g.n} Werte, davon {g.censored} nur als Schranke bekannt"
            for g in groups
        )
        return f"Jeder Wert von {result.title} in {result.unit}, je {self.group} eine Zeile. {rows}."

    def apart_alt(self, result: CharacteristicResult, views: Sequence[PairView], decimals: int) -> str:
        """Return the panel of differences in words."""
        rows = "; ".join(
            f"{v.first} gegen {v.second}: {self.range(v.low, v.high, decimals + 1)}, "
            f"{self.in_short(v.answer, v.has_margin)}"
            for v in views
        )
        return f"Wie weit die {self.group_plural} in {result.title} auseinander sind. {rows}."

    def range(self, low: float | None, high: float | None, decimals: int) -> str:
        """Return an interval in words, plainly rounded."""
        if low is None:
            return "kein Bereich" if high is None else f"höchstens {fixed(high, decimals)}"
        if high is None:
            return f"mindestens {fixed(low, decimals)}"
        return f"{fixed(low, decimals)} bis {fixed(high, decimals)}"

    def mark_alt(self, answer: str, view: PairView | None, decimals: int) -> str:
        """Return a mark in words."""
        if view is None:
            return self.in_short(answer, False)
        return (
            f"{view.first} gegen {view.second}: {self.range(view.low, view.high, decimals + 1)}, "
            f"{self.in_short(answer, view.has_margin)}"
        )

    def grid_alt(self, result: CharacteristicResult) -> str:
        """Return the grid in words."""
        counts = dict.fromkeys(_SHORT, 0)
        for pair in result.pairs:
            counts[pair.answer] = counts.get(pair.answer, 0) + 1
        said = ", ".join(f"{n} {_SHORT.get(a, a)}" for a, n in counts.items() if n)
        return f"Alle {len(result.pairs)} Paare von {result.title} als Gitter von Marken: {said}."

    def grid_legend(self, *, has_margin: bool) -> tuple[tuple[str, str], ...]:
        """Return what each mark of the grid means."""
        if not has_margin:
            return ("different", "verschieden"), ("not_shown", "kein Unterschied gezeigt")
        return tuple((code, _SHORT[code]) for code in ("matters", "different", "not_settled", "equivalent"))
