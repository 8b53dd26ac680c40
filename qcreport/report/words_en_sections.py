"""English: the sections after page 1."""

from __future__ import annotations

from qcreport.report.words_en_figure import FigureWords

PROCEDURE_NAMES: dict[str, str] = {
    "tukey_hsd": "Tukey’s HSD",
    "tukey_kramer": "Tukey–Kramer",
    "games_howell": "Games–Howell",
    "dunnett_c": "Dunnett’s C",
    "dunnett_t3": "Dunnett’s T3",
    "tamhane_t2": "Tamhane’s T2",
    "dunnett": "Dunnett’s comparison of each with the reference",
    "dunnett_unequal": "each with the reference, Welch t at Šidák’s level",
    "dunnett_weighted": "each with the reference, Welch t with weighted critical values",
    "steel_dwass": "Steel–Dwass–Critchlow–Fligner, on ranks",
    "steel": "Steel’s comparison of each with the reference, on ranks",
    "nested": "the nested comparison through its proper error term",
    "none": "no comparison",
}
CHECK_NAMES: dict[str, str] = {
    "brown_forsythe": "Median-centred Levene (Brown and Forsythe)",
    "bartlett": "Bartlett",
    "cochran_c": "Cochran’s C",
    "spread_ratio_limit": "Upper limit of the largest ratio of spreads",
    "spread_ratio_limit_with_history": "The same limit, with the history of the lines",
    "spread_variation": "Variation of spread over earlier batches, upper limit",
    "spread_conflict": "One group against the pooled rest",
    "shapiro_wilk": "Shapiro–Wilk on residuals",
}
OVERALL_NAMES: dict[str, str] = {
    "anova": "one-way analysis of variance",
    "welch": "Welch’s test of means",
    "kruskal_wallis": "Kruskal–Wallis",
}


class SectionWords(FigureWords):
    """Table heads and sentences of the evidence."""

    def procedure(self, name: str) -> str:
        """Return a procedure's published name."""
        return PROCEDURE_NAMES.get(name, name)

    def check(self, name: str) -> str:
        """Return a check's published name."""
        return CHECK_NAMES.get(name, name)

    def overall(self, name: str) -> str:
        """Return an overall test's published name."""
        return OVERALL_NAMES.get(name, name)

    def factor(self, text: str) -> str:
        """Return a ratio in words."""
        return f"a factor of {text}"

    def more_left_out(self, n: int) -> str:
        """Return how many more groups are not compared."""
        return f"{n} more are not compared, see Flagged and left out."

    def pair_heads(self, *, with_reference: bool, ranks: bool) -> tuple[str, ...]:
        """Return the heads of the table of pairs."""
        often = "Typically higher" if ranks else "Higher"
        often_lower = "Typically lower" if ranks else "Lower"
        span = "all at once" if with_reference else "all pairs at once"
        p = "p, all comparisons" if with_reference else "p, all pairs"
        return often, often_lower, "Apart by", f"Range, {span}", p, "In words"

    def apart_intro(self, level: str, unit: str, margin: str, *, with_reference: bool, log: bool) -> str:
        """Return what the table of pairs says and in which unit."""
        which = f"each {self.group} with the reference" if with_reference else "every pair"
        what = "Ratios of geometric means" if log else f"Differences in {unit}" if unit else "Differences"
        text = f"{what}, {which}, most serious first; the ranges hold together at {level}."
        if margin:
            return f"{text} The margin, the smallest difference that matters, is {margin}."
        return f"{text} No margin is set: whether a difference matters is not answered here."

    def all_within_margin(self, value: bool, level: str) -> str:
        """Return the answer for all pairs taken together."""
        if value:
            return (
                "Taken together, all pairs are shown to lie within the margin "
                f"(two one-sided tests a pair, {level} intervals, no adjustment needed for the joint claim)."
            )
        return (
            "Taken together, the pairs are not shown to lie within the margin "
            f"(two one-sided tests a pair, {level} intervals)."
        )

    def apart_caption(self, partly: bool) -> str:
        """Return what is said under a panel that does not hold every pair."""
        return f"Each {self.group}’s most serious pair; every pair stands in the table." if partly else ""

    def grid_caption(self) -> str:
        """Return how to read the grid."""
        return (
            f"Every pair as a mark. A {self.group}’s name stands where its row (to the left) and its column "
            "(downwards) begin."
        )

    def few_results(self) -> str:
        """Return the caution for small groups."""
        return f"With four or fewer results a {self.group} only very large differences can be shown."

    def group_heads(self, *, letters: bool) -> tuple[str, ...]:
        """Return the heads of the table of groups."""
        last = "same letter: no difference shown" if letters else "shown different from"
        return self.group.capitalize(), "n", "mean", "s", "lowest–highest", last

    def nobody(self) -> str:
        """Return what stands where a group differs from none."""
        return "none"

    def reference_mark(self, label: str) -> str:
        """Return the reference's label in the table of groups."""
        return f"{label} (reference)"

    def variance_heads(self) -> tuple[str, ...]:
        """Return the heads of the table of variance."""
        return "Where the scatter is", "sum of squares", "df", "mean square"

    def variance_rows(self) -> tuple[str, str, str]:
        """Return the rows of the table of variance."""
        return f"from {self.group} to {self.group}", f"inside {self.group_plural}", "altogether"

    def fact_heads(self) -> tuple[str, ...]:
        """Return the heads of the table of facts."""
        return "Fact", "Value", "Seen or declared", "Source"

    def check_heads(self) -> tuple[str, ...]:
        """Return the heads of the table of checks."""
        return "Check", "statistic", "df", "p", "held against", "says"

    def check_says(self, met: bool | None, note: str) -> str:
        """Return what a check says."""
        said = {True: "assumption stands", False: "assumption does not stand", None: "description only"}[met]
        return f"{said}; {note}" if note else said

    def why_intro(self, procedure: str, table: str, row: str) -> str:
        """Return which rule chose."""
        procedure = f"{procedure[:1].upper()}{procedure[1:]}"
        if table == "plan" or row == "fixed_by_plan":
            return f"{procedure}, fixed in the plan before the comparison was made."
        row = self.row_name(row)
        return f"{procedure}, chosen by row “{row}” of the rules table “{table}”, read from top to bottom."

    def fact(self, name: str) -> str:
        """Return the name of a fact."""
        return name.replace("_", " ")

    def fact_value(self, value: str) -> str:
        """Return what a fact says."""
        return value

    def fact_source(self, source: str) -> str:
        """Return where a fact comes from."""
        return source

    def reason(self, table: str, row: str, reason: str) -> str:
        """Return a row's reason, as the table gives it."""
        return reason

    def rule_reason(self, reason: str, source: str) -> str:
        """Return the row's reason and what it rests on."""
        reason = reason.strip().rstrip(".")
        text = f"{reason[:1].upper()}{reason[1:]}."
        return f"{text} Rests on: {source.strip().rstrip('.')}." if source.strip() else text

    def not_a_gate(self) -> str:
        """Return that the checks do not choose in silence."""
        return (
            "A check of this export that fails to object proves nothing; spread counts as similar only where "
            "it was shown or declared to be. The checks below are printed as they came out."
        )

    def trace_heads(self) -> tuple[str, ...]:
        """Return the heads of the table of rows tried."""
        return "Rows tried before, in order", "why they did not apply"

    def row_name(self, row: str) -> str:
        """Return the id of a row in words."""
        return row.replace("_", " ").replace("-", " ")

    def why_not(self, why: str) -> str:
        """Return why a row did or did not apply."""
        return why

    def textbook_rates(self) -> str:
        """Return the measured error rates of the table `textbook`."""
        return (
            "The table “textbook” chooses by this export’s own variance check at 0.05. Measured on normal "
            "data without any true difference (100,000 repetitions a case, 3, 4 and 6 groups), this habit "
            "reports at least one difference in 5.0–5.1 % of cases at n = 5 with equal spread, in 7.9–10.9 % "
            "with spreads 1:2:4; at n = 10 in 5.0–5.2 % and 5.7–5.8 %; with n = 4/8/16 in 5.0–5.2 % at equal "
            "spread, in 3.1–4.9 % where large groups scatter most and in 12.7–14.8 %, that is up to 15 %, "
            "where small groups scatter most. Where 5 % is meant, that is what this habit gives."
        )

    def declaration(self, *, similar: bool, by: str, on: str, reason: str) -> str:
        """Return the declaration of spread."""
        what = "similar" if similar else "different"
        return f"Spread was declared {what} by {by} on {on}: {reason.strip().rstrip('.')}."

    def approved(self, by: str, on: str) -> str:
        """Return who approved the plan."""
        return f"Plan approved by {by} on {on}."

    def not_approved(self) -> str:
        """Return that nobody approved the plan."""
        return "The plan is not approved: nobody’s approval is recorded in it."

    def set_after(self, approved: str, measured: str) -> str:
        """Return that the plan is younger than the data."""
        return (
            f"Set after the data: the plan was approved on {approved}, "
            f"the earliest measurement is of {measured}."
        )

    def near_normal(self) -> str:
        """Return the caution on shape."""
        return (
            "The error rates assume near-normal data and independent results; independence is assumed unless "
            "it was checked."
        )

    def arithmetic_heads(self) -> tuple[str, ...]:
        """Return the heads of the table under the arithmetic."""
        return "Higher", "Lower", "difference", "standard error", "df", "difference ÷ se", "critical value"

    def overall_line(self, name: str, statistic: str, p: str) -> str:
        """Return the overall test; never a gate."""
        return (
            f"Over all {self.group_plural} ({name}): {statistic}, p {p}. "
            "The pairs are reported whatever this says."
        )

    def sensitivity_same(self, procedure: str) -> str:
        """Return that the other policy answers alike."""
        return (
            f"Judged by the other policy on spread, the procedure would be {procedure}. "
            "Every pair would get the same answer."
        )

    def sensitivity_changed(self, procedure: str, n: int) -> str:
        """Return that the other policy answers differently."""
        pairs = "One pair" if n == 1 else f"{n} pairs"
        return (
            f"Judged by the other policy on spread, the procedure would be {procedure}. {pairs} would get "
            "another answer. The answer of this report stays the one on page 1; this table only says on what "
            "it hangs."
        )

    def sensitivity_none(self) -> str:
        """Return that there is no alternative to show."""
        return "There is no other policy on spread to compare with here."

    def sensitivity_heads(self) -> tuple[str, ...]:
        """Return the heads of the table of changed answers."""
        return self.group.capitalize(), f"other {self.group}", "answer here", "would be"
