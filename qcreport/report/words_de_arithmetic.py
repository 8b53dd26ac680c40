"""Deutsch: die Rechnung. German: lines of arithmetic that can be redone by hand with a printed table."""

from __future__ import annotations

from qcreport.report.words_de_figure import FigureWordsDe
from qcreport.report.words_en_arithmetic import ArithmeticWords


class ArithmeticWordsDe(FigureWordsDe, ArithmeticWords):
    """Formulas with their numbers; every number arrives as a printed text."""

    def redo_intro(self, first: str, second: str) -> str:
        """Return which pair is worked."""
        return (
            f"Gerechnet für {first} gegen {second}; die anderen Paare folgen in der Tabelle mit ihren Zahlen."
        )

    def further_pairs(self, n: int) -> str:
        """Return where the pairs are that the table has no room for."""
        return f"{n} weitere, weniger gewichtige Paare stehen mit denselben Zahlen in result.json."

    def log_intro(self) -> str:
        """Return that the arithmetic is on logarithms."""
        return (
            "Unterschiede und Standardfehler unten gelten für natürliche Logarithmen; das Verhältnis "
            "ist e hoch "
            "dem Unterschied."
        )

    def hsd(self, q: str, ms: str, n: str, hsd: str, k: str, df: str) -> str:
        """Return Tukey's line."""
        return (
            f"HSD = q × √(mittleres Quadrat innerhalb ÷ n) = {q} × √({ms} ÷ {n}) = {hsd}, mit q für {k} "
            f"Mittelwerte und {df} FG"
        )

    def hsd_reads(self, hsd: str) -> str:
        """Return what the HSD says."""
        return f"Zwei {self.group_plural}, deren Mittel um mehr als {hsd} auseinander sind, sind verschieden."

    def pooled_se(self, ms: str, n_first: str, n_second: str, se: str) -> str:
        """Return the standard error from the pooled scatter."""
        return (
            f"se = √(mittleres Quadrat innerhalb × (1 ÷ n + 1 ÷ n)) = √({ms} × (1 ÷ {n_first} + "
            f"1 ÷ {n_second})) = {se}"
        )

    def own_se(self, s_first: str, n_first: str, s_second: str, n_second: str, se: str) -> str:
        """Return the standard error from each group's own scatter."""
        return f"se = √(s² ÷ n + s² ÷ n) = √({s_first}² ÷ {n_first} + {s_second}² ÷ {n_second}) = {se}"

    def welch_df(self, df: str) -> str:
        """Return the degrees of freedom by Welch and Satterthwaite."""
        return f"FG = se⁴ ÷ ((s² ÷ n)² ÷ (n − 1) + (s² ÷ n)² ÷ (n − 1)) = {df}"

    def half_width_q(self, q: str, se: str, half: str, of: str) -> str:
        """Return a half width from the studentized range."""
        return f"halbe Breite = q ÷ √2 × se = {q} ÷ √2 × {se} = {half}, mit q für {of}"

    def half_width(self, value: str, se: str, half: str, of: str) -> str:
        """Return a half width from another critical value."""
        return f"halbe Breite = kritischer Wert × se = {value} × {se} = {half}, {of}"

    def range_line(self, difference: str, half: str, low: str, high: str) -> str:
        """Return the interval."""
        return f"Bereich = {difference} ± {half} = {low} bis {high}"

    def studentized(self, k: str, df: str) -> str:
        """Return which entry of the table of the studentized range."""
        return f"{k} Mittelwerte und {df} FG"

    def critical_source(self, procedure: str, df: str, comparisons: str) -> str:
        """Return where a critical value comes from."""
        level = f"das zweiseitige t zum Niveau 1 − (1 − α)^(1 ÷ {comparisons})"
        return {
            "dunnett_c": "das mit s² ÷ n gewichtete Mittel von q ÷ √2 beider Gruppen zu n − 1 FG",
            "dunnett_t3": f"der studentisierte größte Betrag von {comparisons} Vergleichen zu {df} FG",
            "tamhane_t2": f"{level} zu {df} FG",
            "dunnett": f"Dunnetts zweiseitiger kritischer Wert für {comparisons} Vergleiche zu {df} FG",
            "dunnett_unequal": f"{level} zu {df} FG",
            "dunnett_weighted": f"das mit s² ÷ n gewichtete Mittel beider Gruppen: {level} zu n − 1 FG",
            "nested": f"aus dem Fehler zwischen den unabhängigen Einheiten zu {df} FG",
        }.get(procedure, f"zu {df} FG")

    def weighted(
        self, c_first: str, first: str, c_second: str, second: str, value: str, dfs: tuple[str, ...]
    ) -> str:
        """Return the mean of two critical values, weighted by the squared standard errors."""
        return (
            f"kritischer Wert = ({c_first} × {first} + {c_second} × {second}) ÷ ({first} + {second}) = "
            f"{value}, "
            f"mit s² ÷ n als Gewichten und den Werten zu {' und '.join(dfs)} FG"
        )

    def nested_se(self, se: str) -> str:
        """Return the standard error of a nested comparison."""
        return (
            f"se = {se}, aus dem mittleren Quadrat zwischen den unabhängigen Einheiten, nicht aus Ablesungen"
        )

    def ranks(self) -> str:
        """Return what stands for arithmetic where ranks are compared."""
        return (
            "Dieses Verfahren vergleicht Ränge. Der gedruckte Unterschied ist der mittlere aller "
            "Unterschiede "
            "zwischen einem Wert der einen und einem Wert der anderen Gruppe (Hodges und Lehmann); p "
            "folgt aus "
            "den Rängen jedes Paars."
        )

    def nothing_compared(self) -> str:
        """Return that there is nothing to redo."""
        return "Es wurde nichts verglichen, also ist nichts nachzurechnen."
