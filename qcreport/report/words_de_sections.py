"""Deutsch: die Abschnitte nach Seite 1. German: the sections after page 1."""

from __future__ import annotations

from qcreport.report.words_de_figure import FigureWordsDe
from qcreport.report.words_de_rules import DEFAULT, FACTS, SOURCES, VALUES
from qcreport.report.words_en_sections import SectionWords

_PROCEDURES = {
    "dunnett": "Dunnetts Vergleich jeder mit der Referenz",
    "dunnett_unequal": "jede mit der Referenz, Welch-t zum Niveau nach Šidák",
    "dunnett_weighted": "jede mit der Referenz, Welch-t mit gewichteten kritischen Werten",
    "steel_dwass": "Steel–Dwass–Critchlow–Fligner, auf Rängen",
    "steel": "Steels Vergleich jeder mit der Referenz, auf Rängen",
    "nested": "der geschachtelte Vergleich über seinen Fehler",
    "none": "kein Vergleich",
}
_CHECKS = {
    "brown_forsythe": "Levene um den Median (Brown und Forsythe)",
    "cochran_c": "Cochrans C",
    "spread_ratio_limit": "Obere Grenze des größten Verhältnisses der Streuungen",
    "spread_ratio_limit_with_history": "Dieselbe Grenze, mit der Vorgeschichte der Linien",
    "spread_variation": "Schwankung der Streuung früherer Chargen, obere Grenze",
    "spread_conflict": "Eine Gruppe gegen den zusammengefassten Rest",
    "shapiro_wilk": "Shapiro–Wilk an Residuen",
}
_OVERALL = {"anova": "einfache Varianzanalyse", "welch": "Welchs Test der Mittel"}


class SectionWordsDe(FigureWordsDe, SectionWords):
    """Table heads and sentences of the evidence."""

    def procedure(self, name: str) -> str:
        """Return a procedure's published name."""
        return _PROCEDURES.get(name) or super().procedure(name)

    def check(self, name: str) -> str:
        """Return a check's published name."""
        return _CHECKS.get(name) or super().check(name)

    def overall(self, name: str) -> str:
        """Return an overall test's published name."""
        return _OVERALL.get(name) or super().overall(name)

    def more_left_out(self, n: int) -> str:
        """Return how many more groups are not compared."""
        return f"{n} weitere sind nicht verglichen, siehe Gekennzeichnet und ausgelassen."

    def pair_heads(self, *, with_reference: bool, ranks: bool) -> tuple[str, ...]:
        """Return the heads of the table of pairs."""
        often = "meist " if ranks else ""
        span = "zugleich" if with_reference else "alle Paare zugleich"
        p = "p, alle Vergleiche" if with_reference else "p, alle Paare"
        higher, lower = f"{often}höher", f"{often}niedriger"
        return higher.capitalize(), lower.capitalize(), "Auseinander", f"Bereich, {span}", p, "In Worten"

    def apart_intro(self, level: str, unit: str, margin: str, *, with_reference: bool, log: bool) -> str:
        """Return what the table of pairs says and in which unit."""
        which = f"jede {self.group} mit der Referenz" if with_reference else "jedes Paar"
        what = (
            "Verhältnisse geometrischer Mittel"
            if log
            else f"Unterschiede in {unit}"
            if unit
            else "Unterschiede"
        )
        text = f"{what}, {which}, das Gewichtigste zuerst; die Bereiche gelten gemeinsam zu {level}."
        if margin:
            return f"{text} Die Grenze, der kleinste Unterschied, auf den es ankommt, ist {margin}."
        return (
            f"{text} Eine Grenze ist nicht gesetzt: ob es auf einen Unterschied ankommt, bleibt hier offen."
        )

    def all_within_margin(self, value: bool, level: str) -> str:
        """Return the answer for all pairs taken together."""
        if value:
            return (
                "Zusammen genommen ist gezeigt, dass alle Paare innerhalb der Grenze liegen (zwei einseitige "
                f"Tests je Paar, Bereiche zu {level}, für die gemeinsame Aussage keine Anpassung nötig)."
            )
        return (
            "Zusammen genommen ist nicht gezeigt, dass die Paare innerhalb der Grenze liegen (zwei "
            "einseitige "
            f"Tests je Paar, Bereiche zu {level})."
        )

    def apart_caption(self, partly: bool) -> str:
        """Return what is said under a panel that does not hold every pair."""
        return f"Je {self.group} das gewichtigste Paar; jedes Paar steht in der Tabelle." if partly else ""

    def grid_caption(self) -> str:
        """Return how to read the grid."""
        return (
            f"Jedes Paar als Marke. Der Name einer {self.group} steht, wo ihre Zeile (nach links) und "
            "ihre Spalte "
            "(nach unten) beginnen."
        )

    def few_results(self) -> str:
        """Return the caution for small groups."""
        return f"Mit vier oder weniger Ergebnissen je {self.group} zeigen sich nur sehr große Unterschiede."

    def group_heads(self, *, letters: bool) -> tuple[str, ...]:
        """Return the heads of the table of groups."""
        last = "gleicher Buchstabe: kein Unterschied gezeigt" if letters else "verschieden gezeigt von"
        return self.group, "n", "Mittel", "s", "kleinster–größter", last

    def nobody(self) -> str:
        """Return what stands where a group differs from none."""
        return "keiner"

    def reference_mark(self, label: str) -> str:
        """Return the reference's label in the table of groups."""
        return f"{label} (Referenz)"

    def variance_heads(self) -> tuple[str, ...]:
        """Return the heads of the table of variance."""
        return "Wo die Streuung liegt", "Quadratsumme", "FG", "mittleres Quadrat"

    def variance_rows(self) -> tuple[str, str, str]:
        """Return the rows of the table of variance."""
        return f"von {self.group} zu {self.group}", f"innerhalb der {self.group_plural}", "insgesamt"

    def fact_heads(self) -> tuple[str, ...]:
        """Return the heads of the table of facts."""
        return "Tatsache", "Wert", "Gesehen oder erklärt (Wortlaut)", "Quelle"

    def fact(self, name: str) -> str:
        """Return the name of a fact."""
        return FACTS.get(name, name)

    def fact_value(self, value: str) -> str:
        """Return what a fact says."""
        return VALUES.get(value, value)

    def fact_source(self, source: str) -> str:
        """Return where a fact comes from."""
        return SOURCES.get(source, source)

    def check_heads(self) -> tuple[str, ...]:
        """Return the heads of the table of checks."""
        return "Prüfung", "Größe", "FG", "p", "gehalten gegen", "sagt"

    def check_says(self, met: bool | None, note: str) -> str:
        """Return what a check says."""
        said = {True: "Annahme steht", False: "Annahme steht nicht", None: "nur Beschreibung"}[met]
        return f"{said}; {note}" if note else said

    def why_intro(self, procedure: str, table: str, row: str) -> str:
        """Return which rule chose."""
        procedure = f"{procedure[:1].upper()}{procedure[1:]}"
        if table == "plan" or row == "fixed_by_plan":
            return f"{procedure}, im Plan festgelegt, bevor verglichen wurde."
        row = self.row_name(row)
        return (
            f"{procedure}, gewählt von Zeile „{row}“ der Regeltafel „{table}“, von oben nach unten gelesen."
        )

    def reason(self, table: str, row: str, reason: str) -> str:
        """Return a row's reason; a laboratory's own table says it in its own words."""
        return DEFAULT.get(row, reason) if table == "default" else reason

    def rule_reason(self, reason: str, source: str) -> str:
        """Return the row's reason and what it rests on."""
        text = f"{reason.strip().rstrip('.')}."
        return f"{text} Beruht auf: {source.strip().rstrip('.')}." if source.strip() else text

    def not_a_gate(self) -> str:
        """Return that the checks do not choose in silence."""
        return (
            "Eine Prüfung dieses Exports, die nicht widerspricht, beweist nichts; die Streuung gilt nur als "
            "ähnlich, wo es gezeigt oder erklärt ist. Die Prüfungen unten sind gedruckt, wie sie ausfielen."
        )

    def trace_heads(self) -> tuple[str, ...]:
        """Return the heads of the table of rows tried."""
        return "Zuvor geprüfte Zeilen, der Reihe nach", "warum sie nicht galten (Wortlaut)"

    def row_name(self, row: str) -> str:
        """Return the id of a row in words, as `rules show` prints it."""
        return super().row_name(row)

    def why_not(self, why: str) -> str:
        """Return why a row did not apply, as the result records it."""
        return why

    def textbook_rates(self) -> str:
        """Return the measured error rates of the table `textbook`."""
        return (
            "Die Tafel „textbook“ wählt nach der eigenen Varianzprüfung dieses Exports zu 0,05. Gemessen an "
            "normalverteilten Daten ohne jeden wahren Unterschied (100 000 Wiederholungen je Fall, 3, "
            "4 und 6 "
            "Gruppen) meldet diese Gewohnheit mindestens einen Unterschied in 5,0–5,1 % der Fälle bei "
            "n = 5 und "
            "gleicher Streuung, in 7,9–10,9 % bei Streuungen 1:2:4; bei n = 10 in 5,0–5,2 % und "
            "5,7–5,8 %; bei "
            "n = 4/8/16 in 5,0–5,2 % bei gleicher Streuung, in 3,1–4,9 %, wo große Gruppen am meisten "
            "streuen, "
            "und in 12,7–14,8 %, also bis 15 %, wo kleine Gruppen am meisten streuen. Wo 5 % gemeint "
            "sind, gibt "
            "diese Gewohnheit das."
        )

    def declaration(self, *, similar: bool, by: str, on: str, reason: str) -> str:
        """Return the declaration of spread."""
        what = "ähnlich" if similar else "verschieden"
        return f"Die Streuung wurde von {by} am {on} als {what} erklärt: {reason.strip().rstrip('.')}."

    def approved(self, by: str, on: str) -> str:
        """Return who approved the plan."""
        return f"Plan genehmigt von {by} am {on}."

    def not_approved(self) -> str:
        """Return that nobody approved the plan."""
        return "Der Plan ist nicht genehmigt: keine Genehmigung ist darin festgehalten."

    def set_after(self, approved: str, measured: str) -> str:
        """Return that the plan is younger than the data."""
        return f"Nach den Daten gesetzt: Plan genehmigt am {approved}, früheste Messung vom {measured}."

    def near_normal(self) -> str:
        """Return the caution on shape."""
        return (
            "Die Fehlerraten setzen annähernd normalverteilte Daten und unabhängige Ergebnisse voraus; "
            "Unabhängigkeit ist angenommen, wo sie nicht geprüft wurde."
        )

    def arithmetic_heads(self) -> tuple[str, ...]:
        """Return the heads of the table under the arithmetic."""
        return (
            "Höher",
            "Niedriger",
            "Unterschied",
            "Standardfehler",
            "FG",
            "Unterschied ÷ se",
            "kritischer Wert",
        )

    def overall_line(self, name: str, statistic: str, p: str) -> str:
        """Return the overall test; never a gate."""
        return (
            f"Über alle {self.group_plural} ({name}): {statistic}, p {p}. Die Paare werden berichtet, "
            "was immer "
            "dies sagt."
        )

    def sensitivity_same(self, procedure: str) -> str:
        """Return that the other policy answers alike."""
        return (
            f"Nach der anderen Art, die Streuung zu beurteilen, wäre das Verfahren {procedure}. Jedes Paar "
            "erhielte dieselbe Antwort."
        )

    def sensitivity_changed(self, procedure: str, n: int) -> str:
        """Return that the other policy answers differently."""
        pairs = "Ein Paar erhielte" if n == 1 else f"{n} Paare erhielten"
        return (
            f"Nach der anderen Art, die Streuung zu beurteilen, wäre das Verfahren {procedure}. {pairs} eine "
            "andere Antwort. Die Antwort dieses Berichts bleibt die auf Seite 1; diese Tabelle sagt "
            "nur, woran "
            "sie hängt."
        )

    def sensitivity_none(self) -> str:
        """Return that there is no alternative to show."""
        return "Hier gibt es keine andere Art, die Streuung zu beurteilen, mit der zu vergleichen wäre."

    def sensitivity_heads(self) -> tuple[str, ...]:
        """Return the heads of the table of changed answers."""
        return self.group, f"andere {self.group}", "Antwort hier", "wäre"
