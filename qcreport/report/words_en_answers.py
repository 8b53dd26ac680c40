"""English: the answers in sentences, and the counts and cautions of page 1."""

from __future__ import annotations

from qcreport.report.words_en_figure import FigureWords


class AnswerWords(FigureWords):
    """Sentences; numbers arrive as printed texts."""

    def at_once(self, *, with_reference: bool) -> str:
        """Return over what the intervals hold together."""
        return "all comparisons at once" if with_reference else "all pairs at once"

    def at_least(self, text: str) -> str:
        """Return a range that is open above."""
        return f"at least {text}"

    def at_most(self, text: str) -> str:
        """Return a range that is open below."""
        return f"at most {text}"

    def between(self, low: str, high: str) -> str:
        """Return a range."""
        return f"{low} to {high}"

    def no_range(self) -> str:
        """Return what stands where there is no interval."""
        return "no interval"

    def p_ends(self) -> tuple[str, str]:
        """Return how a p too small or too near one is printed."""
        return "below {}", "above {}"

    def open_by_limits(self) -> str:
        """Return what stands for an interval where values are known only by a limit."""
        return "open: known only by a limit"

    def by_direction(self, relation: str, p: str, at_once: str) -> str:
        """Return a relation of which limits leave the direction only."""
        return (
            f"{relation} (p {p}, {at_once}). Values known only by a limit leave no interval, so by how much "
            "is open"
        )

    def direction_no_margin(self, stem: str) -> str:
        """Return the sentence of `different` without a margin where only the direction is known."""
        return f"{stem}; no margin is set."

    def direction_against_margin(self, stem: str, margin: str) -> str:
        """Return the sentence of `different` with a margin where only the direction is known."""
        return f"{stem}, also against the margin of {margin.rstrip(',')}."

    def not_settled_by_limits(self, first: str, second: str, p: str, at_once: str, margin: str) -> str:
        """Return the sentence of an open pair without any interval."""
        against = f" against the margin of {margin.rstrip(',')}" if margin else ""
        return (
            f"{first} and {second}: not settled{against} (p {p}, {at_once}); values known only by a limit "
            "leave no interval."
        )

    def margin(self, below: str | None, above: str | None, unit: str) -> str:
        """Return a margin: one number where even, else by direction."""
        if below is None and above is None:
            return ""
        if below == above:
            return f"{above} {unit}".strip()
        parts = []
        if below is not None:
            parts.append(f"{below} {unit}".strip() + " downwards")
        if above is not None:
            parts.append(f"{above} {unit}".strip() + " upwards")
        return ", ".join(parts)

    def margin_of_target(self, text: str, target: str) -> str:
        """Return a margin given as a share of a target."""
        return f"{text} of {target}"

    def ratio_margin(self, below: str | None, above: str | None) -> str:
        """Return a margin on the log scale."""
        if below is None:
            return f"a factor of {above}"
        if above is None:
            return f"a factor of {below}"
        return f"a factor of {below} to {above}"

    def margin_at_first(self, text: str) -> str:
        """Return a margin with what the word means, at its first use."""
        return f"{text}, the smallest difference that matters,"

    def relation(self, subject: str, other: str, *, lower: bool, is_reference: bool, typically: bool) -> str:
        """Return who is lower or higher than whom."""
        way = "lower" if lower else "higher"
        often = "typically " if typically else ""
        what = f"the reference {other}" if is_reference else other
        return f"{subject} is {often}{way} than {what}"

    def by_amount(self, relation: str, amount: str, range_text: str, at_once: str, *, ratio: bool) -> str:
        """Return a relation with its size and interval."""
        by = f"by a factor of {amount}" if ratio else f"by {amount}"
        return f"{relation} {by} ({range_text}, {at_once})"

    def beyond(self, stem: str, margin: str) -> str:
        """Return the sentence of `matters`."""
        return f"{stem}: beyond the margin of {margin.rstrip(',')}."

    def open_beyond(self, stem: str, margin: str) -> str:
        """Return the sentence of `different` with a margin."""
        return f"{stem}. Whether by more than the margin of {margin} is open."

    def differs_no_margin(self, stem: str) -> str:
        """Return the sentence of `different` without a margin."""
        return f"{stem}. No margin is set, so whether it matters is open."

    def differs_within(self, stem: str, margin: str) -> str:
        """Return the sentence of `within_margin`."""
        return f"{stem}, by less than the margin of {margin.rstrip(',')}."

    def not_settled(
        self, first: str, second: str, range_text: str, at_once: str, margin: str, *, ratio: bool
    ) -> str:
        """Return the sentence of `not_settled`."""
        against = "divided by" if ratio else "minus"
        return (
            f"{first} and {second}: not settled against the margin of {margin.rstrip(',')}, "
            f"{range_text} ({first} {against} {second}, {at_once})."
        )

    def would_settle(self, n: int) -> str:
        """Return how many results a group would settle an open pair."""
        return f"About {n} results a {self.group} would settle it, if the scatter is as seen here."

    def pair_within(self, first: str, second: str, range_text: str, at_once: str, margin: str) -> str:
        """Return the sentence of `equivalent`."""
        return (
            f"{first} and {second} lie within the margin of {margin.rstrip(',')}: {range_text} ({at_once})."
        )

    def not_shown(self, first: str, second: str, range_text: str, at_once: str) -> str:
        """Return the sentence of `not_shown`."""
        return (
            f"{first} and {second}: no difference shown, {range_text} ({at_once}). "
            "No margin is set, so they are not shown to be alike either."
        )

    def all_within(self, pairs: int, margin: str, furthest: str, level: str, at_once: str) -> str:
        """Return the sentence where every pair lies within the margin."""
        margin = margin.rstrip(",")
        if pairs == 1:
            return f"The pair lies within {margin}; it is not further apart than {furthest} ({level})."
        return (
            f"All {pairs} pairs lie within {margin}; none is further apart than {furthest} "
            f"({level}, {at_once})."
        )

    def none_shown(self, pairs: int, at_once: str) -> str:
        """Return the sentence where nothing is shown and no margin is set."""
        return (
            f"No difference is shown in any of the {pairs} pairs ({at_once}). "
            "No margin is set, so they are not shown to be alike either."
        )

    def not_compared(self, reason: str) -> str:
        """Return the sentence where nothing is compared."""
        return f"Not compared: {reason.strip().rstrip('.')}."

    def pair_not_compared(self, first: str, second: str) -> str:
        """Return the sentence of one pair without an answer."""
        return f"{first} and {second} are not compared."

    def group_left_out(self, label: str, reason: str) -> str:
        """Return the sentence of a group that is described only."""
        return f"{label} is not compared: {reason.strip().rstrip('.')}."

    def others_within(self, n: int) -> str:
        """Return what is said of the pairs that need no sentence of their own."""
        return (
            "The other pair lies within the margin."
            if n == 1
            else f"The other {n} pairs lie within the margin."
        )

    def more(self, n: int) -> str:
        """Return how many answers stand on another page; the page number follows."""
        return f"{n} more, page"

    def counts(self, values: int, groups: int, missing: int, censored: int) -> str:
        """Return how many values there are."""
        text = f"{values} values from {groups} {self.group if groups == 1 else self.group_plural}"
        if missing:
            text += f"; {missing} {'cell' if missing == 1 else 'cells'} marked as missing"
        if censored:
            text += f"; {censored} known only by a limit"
        return text

    def averaged(self, readings: int, units: int, unit: str) -> str:
        """Return that finer readings were averaged."""
        return f"{readings} readings averaged to {units} {unit} values, which are what counts as n"

    def none_flagged(self) -> str:
        """Return that nothing was flagged."""
        return "none flagged"

    def flagged(self, n: int, places: str, changes: bool | None) -> str:
        """Return how many values were flagged and what that does to the answers."""
        effect = {
            True: "without them an answer changes, see Flagged and left out"
            if n > 1
            else "without it an answer changes, see Flagged and left out",
            False: "the answers are the same without them"
            if n > 1
            else "the answers are the same without it",
            None: "what the answers would be without them, cannot be computed"
            if n > 1
            else "what the answers would be without it, cannot be computed",
        }[changes]
        return f"{n} flagged ({places}), kept; {effect}"

    def left_out(self, n: int) -> str:
        """Return how many values a person left out."""
        return f"{n} left out by a person, see Flagged and left out"

    def none_left_out(self) -> str:
        """Return that nobody left a value out."""
        return "none left out"

    def depends_on_spread(self, n: int, procedure: str) -> str:
        """Return the caution where the other variance policy changes answers."""
        pairs = "one pair" if n == 1 else f"{n} pairs"
        return (
            f"The answer for {pairs} depends on how spread is judged ({procedure} would answer differently); "
            "see Sensitivity."
        )
