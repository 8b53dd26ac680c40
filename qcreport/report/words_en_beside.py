"""English: what stands beside the pairs, and what a person or the laboratory states."""

from __future__ import annotations

from qcreport.report.words_en_figure import FigureWords

_SCATTER_FROM = {"plan": "that the plan gives", "history": "of earlier batches"}


class BesideWords(FigureWords):
    """Design, effects, contrasts, the decision rule, statements."""

    def detectable(self, span: str, scatter: str, source: str, limits: str) -> str:
        """Return what the design could have shown."""
        seen = (
            f"at the scatter of {scatter} " + _SCATTER_FROM[source]
            if scatter
            else "if the scatter is as seen here"
        )
        between = f" ({limits} at the 90 % limits of that scatter)" if limits else ""
        return (
            f"This design shows a difference of {span} with probability 0.80, {seen}{between}; it describes "
            "the design, the ranges above describe the result."
        )

    def span(self, low: str, high: str, unit: str) -> str:
        """Return a number or two with their unit."""
        return f"{low if low == high else f'{low} to {high}'} {unit}".strip()

    def overall_effect(self, value: str, low: str, high: str, level: str) -> str:
        """Return omega squared."""
        return (
            f"Share of the scatter that lies between the {self.group_plural}: ω² = {value} "
            f"({low} to {high}, {level})."
        )

    def pair_effects(self, listed: str, level: str) -> str:
        """Return Hedges' g of the pairs."""
        return (
            f"Differences in units of the scatter, Hedges’ g with its {level} range, each pair by itself: "
            f"{listed}."
        )

    def pair_effect(self, first: str, second: str, value: str, low: str, high: str) -> str:
        """Return one of them."""
        return f"{first} against {second} {value} ({low} to {high})"

    def effects_describe(self) -> str:
        """Return what effects are for."""
        return "They describe and decide nothing."

    def unreachable(self) -> str:
        """Return that the ranks of so few values cannot show anything."""
        return "With so few values ranks cannot show any difference; measure more of each."

    def law(self, law: str) -> str:
        """Return where p of ranks comes from."""
        if law == "exact":
            return "p counts every arrangement of these ranks."
        return "p comes from the limiting law, since there are too many arrangements to count."

    def contrast_heads(self, unit: str) -> tuple[str, ...]:
        """Return the heads of the table of contrasts."""
        return (
            "Contrast of the plan",
            "weights",
            f"estimate {unit}".strip(),
            "range, all at once",
            "p, all at once",
        )

    def error_rate(self, table: str, equal: str, small: str, large: str, n: str) -> str:
        """Return the simulated error rate of the design at hand."""
        return (
            f"For these sizes the table “{table}” finds at least one difference where there is none in "
            f"{equal} of cases with equal spread, in {small} where the smaller groups scatter twice as much "
            f"and in {large} where the larger ones do ({n} simulated tables each)."
        )

    def no_error_rate(self, reason: str) -> str:
        """Return why no error rate is given."""
        return f"No simulated error rate for this design: {reason.strip().rstrip('.')}."

    def decision_heading(self) -> str:
        """Return the head of the decision rule."""
        return "Decision rule and its risks"

    def decision_rule(self, alpha: str, level: str, margin: str, *, with_reference: bool, ranks: bool) -> str:
        """Return the rule by which pairs are answered, with the risk of each error."""
        which = "comparisons with the reference" if with_reference else "pairs"
        held = (
            f" Held against the margin of {margin}, a pair is beyond it or within it only where the whole "
            "range is; else it is open."
            if margin
            else " No margin is set, so no pair is called beyond or within one."
        )
        by = "p is below" if ranks else "its range excludes no difference, which is p below"
        return (
            f"A pair is said to differ where {by} {alpha}.{held} Risk of a false statement: over all "
            f"{which} of a characteristic together at most {alpha}, if the assumptions hold; the ranges hold "
            f"together at {level}. Risk of missing a difference: up to 0.20 for one as large as this design "
            "shows with probability 0.80, more for smaller ones. Answers are read before rounding."
        )

    def one_sided(self, direction: str) -> str:
        """Return that only one direction counts."""
        way = "lower" if direction == "lower_matters" else "higher"
        return f"By the plan only a {self.group} that is {way} matters."

    def left_out_heads(self) -> tuple[str, ...]:
        """Return the heads of the table of answers with what was left out."""
        return self.group.capitalize(), f"other {self.group}", "answer without", "answer with"

    def left_out_by(self, values: str, by: str, reason: str) -> str:
        """Return what was left out, by whom and why."""
        return f"Left out by {by}: {values}. Reason: {reason.strip().rstrip('.')}."

    def left_out_same(self, procedure: str) -> str:
        """Return that the answers are the same with them."""
        return f"With them ({procedure}) every pair gets the same answer."

    def left_out_changed(self, procedure: str) -> str:
        """Return that answers change."""
        return f"With them ({procedure}) these answers would be others:"

    def left_out_effect(self, changes: bool) -> str:
        """Return on page 1 whether leaving out changes an answer."""
        return "with them an answer changes" if changes else "with them the answers are the same"

    def replaces_label(self) -> str:
        """Return the label of the report that is replaced."""
        return "replaces"

    def replaces(self, number: str, reason: str, changed: str) -> str:
        """Return which report is replaced, and why."""
        text = f"{number}; reason: {reason.strip().rstrip('.')}"
        return f"{text}; changed: {changed}" if changed else text

    def run_changes(self, k: int, number: str, changed: str) -> str:
        """Return what was otherwise in another run."""
        return f"against run {k}, {number}, changed: {changed or 'nothing'}"

    def change(self, what: str, key: str) -> str:
        """Return one change by its name."""
        return f"{what} {key}".strip()

    def and_more(self, n: int) -> str:
        """Return how many more there are."""
        return f"{n} more"

    def statement_labels(self) -> dict[str, str]:
        """Return the names of what the laboratory states."""
        return {
            "customer": "customer",
            "items": "items as received",
            "sampling": "sampling",
            "deviations": "departures from the method",
            "external": "results from others",
            "copying": "copies",
        }

    def not_stated(self, reason: str) -> str:
        """Return what stands for a statement that is left out."""
        return f"left out: {reason.strip().rstrip('.')}" if reason else "not stated"
