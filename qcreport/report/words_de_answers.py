"""Deutsch: die Antworten in Sätzen. German: the answers in sentences, and the counts of page 1."""

from __future__ import annotations

from qcreport.report.words_de_figure import FigureWordsDe
from qcreport.report.words_en_answers import AnswerWords

_SCATTER = "wenn die Streuung ist wie hier gesehen"


class AnswerWordsDe(FigureWordsDe, AnswerWords):
    """Sentences; numbers arrive as printed texts."""

    def at_once(self, *, with_reference: bool) -> str:
        """Return over what the intervals hold together."""
        return "alle Vergleiche zugleich" if with_reference else "alle Paare zugleich"

    def at_least(self, text: str) -> str:
        """Return a range that is open above."""
        return f"mindestens {text}"

    def at_most(self, text: str) -> str:
        """Return a range that is open below."""
        return f"höchstens {text}"

    def between(self, low: str, high: str) -> str:
        """Return a range."""
        return f"{low} bis {high}"

    def no_range(self) -> str:
        """Return what stands where there is no interval."""
        return "kein Bereich"

    def p_ends(self) -> tuple[str, str]:
        """Return how a p too small or too near one is printed."""
        return "unter {}", "über {}"

    def open_by_limits(self) -> str:
        """Return what stands for an interval where values are known only by a limit."""
        return "offen: nur als Schranke bekannt"

    def by_direction(self, relation: str, p: str, at_once: str) -> str:
        """Return a relation of which limits leave the direction only."""
        return (
            f"{relation} (p {p}, {at_once}). Werte, die nur als Schranke bekannt sind, lassen keinen Bereich "
            "zu; um wie viel, ist offen"
        )

    def direction_no_margin(self, stem: str) -> str:
        """Return the sentence of `different` without a margin where only the direction is known."""
        return f"{stem}; eine Grenze ist nicht gesetzt."

    def direction_against_margin(self, stem: str, margin: str) -> str:
        """Return the sentence of `different` with a margin where only the direction is known."""
        return f"{stem}, auch gegen die Grenze von {margin.rstrip(',')}."

    def not_settled_by_limits(self, first: str, second: str, p: str, at_once: str, margin: str) -> str:
        """Return the sentence of an open pair without any interval."""
        against = f" gegen die Grenze von {margin.rstrip(',')}" if margin else ""
        return (
            f"{first} und {second}: nicht geklärt{against} (p {p}, {at_once}); Werte, die nur als Schranke "
            "bekannt sind, lassen keinen Bereich zu."
        )

    def margin(self, below: str | None, above: str | None, unit: str) -> str:
        """Return a margin: one number where even, else by direction."""
        if below is None and above is None:
            return ""
        if below == above:
            return f"{above} {unit}".strip()
        sides = ((below, "nach unten"), (above, "nach oben"))
        return ", ".join(f"{text} {unit}".strip() + f" {way}" for text, way in sides if text is not None)

    def margin_of_target(self, text: str, target: str) -> str:
        """Return a margin given as a share of a target."""
        return f"{text} von {target}"

    def ratio_margin(self, below: str | None, above: str | None) -> str:
        """Return a margin on the log scale."""
        if below is None or above is None:
            return self.factor(above if below is None else below)
        return f"Faktor {below} bis {above}"

    def factor(self, text: str | None) -> str:
        """Return a ratio in words."""
        return f"Faktor {text}"

    def margin_at_first(self, text: str) -> str:
        """Return a margin with what the word means, at its first use."""
        return f"{text}, dem kleinsten Unterschied, auf den es ankommt,"

    def relation(self, subject: str, other: str, *, lower: bool, is_reference: bool, typically: bool) -> str:
        """Return who is lower or higher than whom."""
        way = "niedriger" if lower else "höher"
        often = "meist " if typically else ""
        what = f"die Referenz {other}" if is_reference else other
        return f"{subject} ist {often}{way} als {what}"

    def by_amount(self, relation: str, amount: str, range_text: str, at_once: str, *, ratio: bool) -> str:
        """Return a relation with its size and interval."""
        by = f"um den Faktor {amount}" if ratio else f"um {amount}"
        return f"{relation}, {by} ({range_text}, {at_once})"

    def beyond(self, stem: str, margin: str) -> str:
        """Return the sentence of `matters`."""
        return f"{stem}: jenseits der Grenze von {margin.rstrip(',')}."

    def open_beyond(self, stem: str, margin: str) -> str:
        """Return the sentence of `different` with a margin."""
        return f"{stem}. Ob um mehr als die Grenze von {margin} ist offen."

    def differs_no_margin(self, stem: str) -> str:
        """Return the sentence of `different` without a margin."""
        return f"{stem}. Eine Grenze ist nicht gesetzt; ob es darauf ankommt, ist offen."

    def differs_within(self, stem: str, margin: str) -> str:
        """Return the sentence of `within_margin`."""
        return f"{stem}, um weniger als die Grenze von {margin.rstrip(',')}."

    def not_settled(
        self, first: str, second: str, range_text: str, at_once: str, margin: str, *, ratio: bool
    ) -> str:
        """Return the sentence of `not_settled`."""
        against = "geteilt durch" if ratio else "minus"
        return (
            f"{first} und {second}: nicht geklärt gegen die Grenze von {margin.rstrip(',')}, {range_text} "
            f"({first} {against} {second}, {at_once})."
        )

    def would_settle(self, n: int) -> str:
        """Return how many results a group would settle an open pair."""
        return f"Etwa {n} Ergebnisse je {self.group} würden es klären, {_SCATTER}."

    def pair_within(self, first: str, second: str, range_text: str, at_once: str, margin: str) -> str:
        """Return the sentence of `equivalent`."""
        margin = margin.rstrip(",")
        return f"{first} und {second} liegen innerhalb der Grenze von {margin}: {range_text} ({at_once})."

    def not_shown(self, first: str, second: str, range_text: str, at_once: str) -> str:
        """Return the sentence of `not_shown`."""
        return (
            f"{first} und {second}: kein Unterschied gezeigt, {range_text} ({at_once}). Eine Grenze "
            "ist nicht "
            "gesetzt; dass sie gleich wären, ist damit auch nicht gezeigt."
        )

    def all_within(self, pairs: int, margin: str, furthest: str, level: str, at_once: str) -> str:
        """Return the sentence where every pair lies within the margin."""
        margin = margin.rstrip(",")
        if pairs == 1:
            return (
                f"Das Paar liegt innerhalb von {margin}, nicht weiter auseinander als {furthest} ({level})."
            )
        return (
            f"Alle {pairs} Paare liegen innerhalb von {margin}; keines ist weiter auseinander als {furthest} "
            f"({level}, {at_once})."
        )

    def none_shown(self, pairs: int, at_once: str) -> str:
        """Return the sentence where nothing is shown and no margin is set."""
        return (
            f"In keinem der {pairs} Paare ist ein Unterschied gezeigt ({at_once}). Eine Grenze ist nicht "
            "gesetzt; dass sie gleich wären, ist damit auch nicht gezeigt."
        )

    def not_compared(self, reason: str) -> str:
        """Return the sentence where nothing is compared."""
        return f"Nicht verglichen: {reason.strip().rstrip('.')}."

    def pair_not_compared(self, first: str, second: str) -> str:
        """Return the sentence of one pair without an answer."""
        return f"{first} und {second} sind nicht verglichen."

    def group_left_out(self, label: str, reason: str) -> str:
        """Return the sentence of a group that is described only."""
        return f"{label} ist nicht verglichen: {reason.strip().rstrip('.')}."

    def others_within(self, n: int) -> str:
        """Return what is said of the pairs that need no sentence of their own."""
        if n == 1:
            return "Das andere Paar liegt innerhalb der Grenze."
        return f"Die anderen {n} Paare liegen innerhalb der Grenze."

    def more(self, n: int) -> str:
        """Return how many answers stand on another page; the page number follows."""
        return f"{n} weitere, Seite"

    def counts(self, values: int, groups: int, missing: int, censored: int) -> str:
        """Return how many values there are."""
        text = f"{values} Werte aus {groups} {self.group if groups == 1 else self.group_plural}"
        if missing:
            text += f"; {missing} {'Zelle' if missing == 1 else 'Zellen'} als fehlend gekennzeichnet"
        return f"{text}; {censored} nur als Schranke bekannt" if censored else text

    def averaged(self, readings: int, units: int, unit: str) -> str:
        """Return that finer readings were averaged."""
        what = {"sample": "Proben", "batch": "Chargen"}.get(unit, unit)
        return f"{readings} Ablesungen zu {units} Mittelwerten ({what}) gemittelt, die als n zählen"

    def none_flagged(self) -> str:
        """Return that nothing was flagged."""
        return "keiner gekennzeichnet"

    def flagged(self, n: int, places: str, changes: bool | None) -> str:
        """Return how many values were flagged and what that does to the answers."""
        it = "sie" if n > 1 else "ihn"
        effect = {
            True: f"ohne {it} ändert sich eine Antwort, siehe Gekennzeichnet und ausgelassen",
            False: f"ohne {it} bleiben die Antworten gleich",
            None: f"die Antworten ohne {it} sind nicht berechenbar",
        }[changes]
        return f"{n} gekennzeichnet ({places}), behalten; {effect}"

    def left_out(self, n: int) -> str:
        """Return how many values a person left out."""
        return f"{n} von einer Person ausgelassen, siehe Gekennzeichnet und ausgelassen"

    def none_left_out(self) -> str:
        """Return that nobody left a value out."""
        return "keiner ausgelassen"

    def depends_on_spread(self, n: int, procedure: str) -> str:
        """Return the caution where the other variance policy changes answers."""
        pairs = "ein Paar" if n == 1 else f"{n} Paare"
        return (
            f"Die Antwort für {pairs} hängt davon ab, wie die Streuung beurteilt wird ({procedure} "
            "würde anders "
            "antworten); siehe Gegenprobe."
        )
