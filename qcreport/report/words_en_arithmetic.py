"""English: lines of arithmetic that a reviewer can redo by hand with a printed table."""

from __future__ import annotations

from qcreport.report.words_en_figure import FigureWords


class ArithmeticWords(FigureWords):
    """Formulas with their numbers; every number arrives as a printed text."""

    def redo_intro(self, first: str, second: str) -> str:
        """Return which pair is worked."""
        return (
            f"Worked for {first} against {second}; the other pairs follow in the table with their own "
            "numbers."
        )

    def further_pairs(self, n: int) -> str:
        """Return where the pairs are that the table has no room for."""
        return f"{n} further pairs, less serious ones, stand in result.json with the same numbers."

    def log_intro(self) -> str:
        """Return that the arithmetic is on logarithms."""
        return (
            "Differences and standard errors below are of natural logarithms; the ratio is e to the "
            "difference."
        )

    def hsd(self, q: str, ms: str, n: str, hsd: str, k: str, df: str) -> str:
        """Return Tukey's line."""
        return (
            f"HSD = q × √(mean square within ÷ n) = {q} × √({ms} ÷ {n}) = {hsd}, with q for {k} means "
            f"and {df} df"
        )

    def hsd_reads(self, hsd: str) -> str:
        """Return what the HSD says."""
        return f"Two {self.group_plural} whose means differ by more than {hsd} are shown to differ."

    def pooled_se(self, ms: str, n_first: str, n_second: str, se: str) -> str:
        """Return the standard error from the pooled scatter."""
        return (
            f"se = √(mean square within × (1 ÷ n + 1 ÷ n)) = √({ms} × (1 ÷ {n_first} + 1 ÷ {n_second})) "
            f"= {se}"
        )

    def own_se(self, s_first: str, n_first: str, s_second: str, n_second: str, se: str) -> str:
        """Return the standard error from each group's own scatter."""
        return f"se = √(s² ÷ n + s² ÷ n) = √({s_first}² ÷ {n_first} + {s_second}² ÷ {n_second}) = {se}"

    def welch_df(self, df: str) -> str:
        """Return the degrees of freedom by Welch and Satterthwaite."""
        return f"df = se⁴ ÷ ((s² ÷ n)² ÷ (n − 1) + (s² ÷ n)² ÷ (n − 1)) = {df}"

    def half_width_q(self, q: str, se: str, half: str, of: str) -> str:
        """Return a half width from the studentized range."""
        return f"half width = q ÷ √2 × se = {q} ÷ √2 × {se} = {half}, with q for {of}"

    def half_width(self, value: str, se: str, half: str, of: str) -> str:
        """Return a half width from another critical value."""
        return f"half width = critical value × se = {value} × {se} = {half}, {of}"

    def range_line(self, difference: str, half: str, low: str, high: str) -> str:
        """Return the interval."""
        return f"range = {difference} ± {half} = {low} to {high}"

    def studentized(self, k: str, df: str) -> str:
        """Return which entry of the table of the studentized range."""
        return f"{k} means and {df} df"

    def critical_source(self, procedure: str, df: str, comparisons: str) -> str:
        """Return where a critical value comes from."""
        return {
            "dunnett_c": "the mean of the two groups’ q ÷ √2 on n − 1 df, weighted by s² ÷ n",
            "dunnett_t3": f"the studentized maximum modulus of {comparisons} comparisons on {df} df",
            "tamhane_t2": f"the two-sided t at level 1 − (1 − α)^(1 ÷ {comparisons}) on {df} df",
            "dunnett": f"Dunnett’s two-sided critical value for {comparisons} comparisons on {df} df",
            "dunnett_unequal": f"the two-sided t at level 1 − (1 − α)^(1 ÷ {comparisons}) on {df} df",
            "dunnett_weighted": (
                f"the mean of the two groups’ two-sided t at level 1 − (1 − α)^(1 ÷ {comparisons}) on "
                "n − 1 df, "
                "weighted by s² ÷ n"
            ),
            "nested": f"from the error term between the independent units on {df} df",
        }.get(procedure, f"on {df} df")

    def weighted(
        self, c_first: str, first: str, c_second: str, second: str, value: str, dfs: tuple[str, ...]
    ) -> str:
        """Return the mean of two critical values, weighted by the squared standard errors."""
        return (
            f"critical value = ({c_first} × {first} + {c_second} × {second}) ÷ ({first} + {second}) "
            f"= {value}, with s² ÷ n as weights and the values on {' and '.join(dfs)} df"
        )

    def nested_se(self, se: str) -> str:
        """Return the standard error of a nested comparison."""
        return f"se = {se}, from the mean square between the independent units, not from single readings"

    def ranks(self) -> str:
        """Return what stands for arithmetic where ranks are compared."""
        return (
            "This procedure compares ranks. The difference printed is the middle one of all "
            "differences between a "
            "value of one group and a value of the other (Hodges and Lehmann); p comes from the "
            "ranks of each pair."
        )

    def nothing_compared(self) -> str:
        """Return that there is nothing to redo."""
        return "Nothing was compared, so there is nothing to redo."
