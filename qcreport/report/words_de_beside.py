"""Deutsch: was neben den Paaren steht. German: beside the pairs, and what people state."""

from __future__ import annotations

from qcreport.report.words_de_figure import FigureWordsDe
from qcreport.report.words_en_beside import BesideWords

_SCATTER_FROM = {"plan": "aus dem Plan", "history": "früherer Chargen"}


class BesideWordsDe(FigureWordsDe, BesideWords):
    """Design, effects, contrasts, the decision rule, statements."""

    def detectable(self, span: str, scatter: str, source: str, limits: str) -> str:
        """Return what the design could have shown."""
        seen = (
            f"bei der Streuung von {scatter} " + _SCATTER_FROM[source]
            if scatter
            else "wenn die Streuung ist wie hier gesehen"
        )
        between = f" ({limits} an den 90-%-Grenzen dieser Streuung)" if limits else ""
        return (
            f"Diese Anlage zeigt einen Unterschied von {span} mit Wahrscheinlichkeit 0,80, "
            f"{seen}{between}; das "
            "beschreibt die Anlage, die Bereiche oben beschreiben das Ergebnis."
        )

    def span(self, low: str, high: str, unit: str) -> str:
        """Return a number or two with their unit."""
        return f"{low if low == high else f'{low} bis {high}'} {unit}".strip()

    def overall_effect(self, value: str, low: str, high: str, level: str) -> str:
        """Return omega squared."""
        return (
            f"Anteil der Streuung, der zwischen den {self.group_plural} liegt: ω² = {value} "
            f"({low} bis {high}, {level})."
        )

    def pair_effects(self, listed: str, level: str) -> str:
        """Return Hedges' g of the pairs."""
        return (
            f"Unterschiede in Einheiten der Streuung, Hedges’ g mit seinem Bereich zu {level}, jedes "
            "Paar für "
            f"sich: {listed}."
        )

    def pair_effect(self, first: str, second: str, value: str, low: str, high: str) -> str:
        """Return one of them."""
        return f"{first} gegen {second} {value} ({low} bis {high})"

    def effects_describe(self) -> str:
        """Return what effects are for."""
        return "Sie beschreiben und entscheiden nichts."

    def unreachable(self) -> str:
        """Return that the ranks of so few values cannot show anything."""
        return "Bei so wenigen Werten können Ränge keinen Unterschied zeigen; mehr von jeder messen."

    def law(self, law: str) -> str:
        """Return where p of ranks comes from."""
        if law == "exact":
            return "p zählt jede Anordnung dieser Ränge."
        return "p folgt dem Grenzgesetz, da es zu viele Anordnungen gibt, um sie zu zählen."

    def contrast_heads(self, unit: str) -> tuple[str, ...]:
        """Return the heads of the table of contrasts."""
        return (
            "Kontrast des Plans",
            "Gewichte",
            f"Schätzung {unit}".strip(),
            "Bereich, zugleich",
            "p, zugleich",
        )

    def error_rate(self, table: str, equal: str, small: str, large: str, n: str) -> str:
        """Return the simulated error rate of the design at hand."""
        return (
            f"Bei diesen Umfängen findet die Tafel „{table}“ mindestens einen Unterschied, wo keiner ist, in "
            f"{equal} der Fälle bei gleicher Streuung, in {small}, wo die kleineren Gruppen doppelt so stark "
            f"streuen, und in {large}, wo es die größeren tun (je {n} simulierte Tabellen)."
        )

    def no_error_rate(self, reason: str) -> str:
        """Return why no error rate is given."""
        return f"Keine simulierte Fehlerrate für diese Anlage: {reason.strip().rstrip('.')}."

    def decision_heading(self) -> str:
        """Return the head of the decision rule."""
        return "Entscheidungsregel und ihre Risiken"

    def decision_rule(self, alpha: str, level: str, margin: str, *, with_reference: bool, ranks: bool) -> str:
        """Return the rule by which pairs are answered, with the risk of each error."""
        which = "Vergleiche mit der Referenz" if with_reference else "Paare"
        held = (
            f" Gegen die Grenze von {margin} gehalten liegt ein Paar nur dann jenseits oder innerhalb, "
            "wenn es "
            "der ganze Bereich tut; sonst ist es offen."
            if margin
            else " Eine Grenze ist nicht gesetzt; kein Paar wird jenseits oder innerhalb genannt."
        )
        by = "p unter" if ranks else "sein Bereich keinen Unterschied ausschließt, das heißt p unter"
        return (
            f"Ein Paar gilt als verschieden, wo {by} {alpha} liegt.{held} Risiko einer falschen "
            "Aussage: über "
            f"alle {which} eines Merkmals zusammen höchstens {alpha}, wenn die Annahmen gelten; die Bereiche "
            f"gelten gemeinsam zu {level}. Risiko, einen Unterschied zu übersehen: bis 0,20 für einen, den "
            "diese Anlage mit Wahrscheinlichkeit 0,80 zeigt, mehr für kleinere. Antworten werden vor "
            "dem Runden "
            "abgelesen."
        )

    def one_sided(self, direction: str) -> str:
        """Return that only one direction counts."""
        way = "niedriger" if direction == "lower_matters" else "höher"
        return f"Nach dem Plan kommt es nur auf eine {self.group} an, die {way} ist."

    def left_out_heads(self) -> tuple[str, ...]:
        """Return the heads of the table of answers with what was left out."""
        return self.group, f"andere {self.group}", "Antwort ohne", "Antwort mit"

    def left_out_by(self, values: str, by: str, reason: str) -> str:
        """Return what was left out, by whom and why."""
        return f"Ausgelassen von {by}: {values}. Grund: {reason.strip().rstrip('.')}."

    def left_out_same(self, procedure: str) -> str:
        """Return that the answers are the same with them."""
        return f"Mit ihnen ({procedure}) erhält jedes Paar dieselbe Antwort."

    def left_out_changed(self, procedure: str) -> str:
        """Return that answers change."""
        return f"Mit ihnen ({procedure}) wären diese Antworten andere:"

    def left_out_effect(self, changes: bool) -> str:
        """Return on page 1 whether leaving out changes an answer."""
        return "mit ihnen ändert sich eine Antwort" if changes else "mit ihnen bleiben die Antworten gleich"

    def replaces_label(self) -> str:
        """Return the label of the report that is replaced."""
        return "ersetzt"

    def replaces(self, number: str, reason: str, changed: str) -> str:
        """Return which report is replaced, and why."""
        text = f"{number}; Grund: {reason.strip().rstrip('.')}"
        return f"{text}; geändert: {changed}" if changed else text

    def run_changes(self, k: int, number: str, changed: str) -> str:
        """Return what was otherwise in another run."""
        return f"gegenüber Durchgang {k}, {number}, geändert: {changed or 'nichts'}"

    def change(self, what: str, key: str) -> str:
        """Return one change by its name."""
        name = {"rules": "Regeln", "template": "Vorlage", "value": "Wert", "left out": "ausgelassen"}
        return f"{name.get(what, what.capitalize())} {key}".strip()

    def and_more(self, n: int) -> str:
        """Return how many more there are."""
        return f"{n} weitere"

    def statement_labels(self) -> dict[str, str]:
        """Return the names of what the laboratory states."""
        return {
            "customer": "Auftraggeber",
            "items": "Gegenstände wie erhalten",
            "sampling": "Probenahme",
            "deviations": "Abweichungen vom Verfahren",
            "external": "Ergebnisse anderer",
            "copying": "Vervielfältigung",
        }

    def not_stated(self, reason: str) -> str:
        """Return what stands for a statement that is left out."""
        return f"weggelassen: {reason.strip().rstrip('.')}" if reason else "nicht angegeben"
