"""Deutsch: Daten, Prüfung, Begriffe. German: data, what was flagged, how to check, terms, cautions."""

from __future__ import annotations

from qcreport.report.words_de_figure import FigureWordsDe
from qcreport.report.words_en_checking import CheckingWords


class CheckingWordsDe(FigureWordsDe, CheckingWords):
    """Words for the part of a report that an auditor works with."""

    DEMONSTRATION = "Vorführung: mit einem Vorführschlüssel gesiegelt; nicht für eine Freigabe."
    SIGNING_RULE = "Gilt nur mit beiden Unterschriften; ohne sie ist dies ein Entwurf."
    CAUTION_RELEASE = (
        "Dieser Bericht unterstützt die Freigabeentscheidung der verantwortlichen Person und ersetzt sie nie."
    )
    CAUTION_ITEMS = "Er bezieht sich nur auf die geprüften Gegenstände."

    def cautions(self) -> tuple[str, ...]:
        """Return the cautions that hold for every report."""
        one = (
            "Eine Charge sagt nichts über ihre Linie."
            if self.group == "Charge"
            else "Die hier genannten Chargen stehen für ihre Linie nur, soweit sie dafür gezogen wurden."
        )
        return (
            f"{self.group_plural}, die an verschiedenen Tagen, auf verschiedenen Ständen oder von "
            "verschiedenen "
            "Personen gemessen wurden, tragen diesen Unterschied in sich.",
            "Die Bereiche gelten für Unterschiede von Mitteln; sie sind nicht die Messunsicherheit.",
            one,
            f"Vier oder weniger Ergebnisse je {self.group} zeigen nur sehr große Unterschiede.",
            "Unabhängigkeit der Ergebnisse ist angenommen, wo sie nicht geprüft wurde.",
            "Die Antwort hängt davon ab, wie die Streuung beurteilt wird; der Weg steht unter Warum dieses "
            "Verfahren.",
            "Die Fehlerraten setzen annähernd normalverteilte Daten voraus.",
            "Spezifikationsgrenzen dienen der Orientierung; Konformität wird nicht beurteilt.",
        )

    def data_intro(self, export: str) -> str:
        """Return how to read the annex."""
        return (
            f"Jeder Wert wie aus {export} gelesen, in der Reihenfolge des Exports, jeweils nach seiner "
            "Zelle. Wo "
            "der gespeicherte Text von der gedruckten Zahl abweicht, folgt er in Anführungszeichen."
        )

    def data_group(self, label: str, values: int, sheet: str) -> str:
        """Return the head of one group's values."""
        text = f"{label}, {values} {'Zelle' if values == 1 else 'Zellen'}"
        return f"{text}, {sheet}" if sheet else text

    def sheet(self, name: str) -> str:
        """Return a sheet's name in words."""
        return f"Blatt {name}"

    def sample(self, name: str) -> str:
        """Return a sample's name in words."""
        return f"Probe {name}"

    def stored(self, text: str) -> str:
        """Return the stored text of a cell."""
        return f"(„{text}“)"

    def missing(self) -> str:
        """Return what is printed for a missing value."""
        return "fehlt"

    def not_detected(self) -> str:
        """Return what is printed for a value that was not detected."""
        return "nicht nachgewiesen"

    def mark(self, mark: str) -> str:
        """Return the state of a cell."""
        words = {
            "struck": "gestrichen",
            "commented": "mit Kommentar",
            "hidden": "ausgeblendet",
            "left out": "ausgelassen",
        }
        return words.get(mark, mark)

    def flagged_line(
        self, key: str, group: str, value: str, cell: str, test: str, p: str, effect: str
    ) -> str:
        """Return one flagged value."""
        return f"{key}: {group}, {value}, {cell}. {test}, p höchstens {p}. Im Vergleich behalten. {effect}"

    def test_name(self, name: str) -> str:
        """Return the name of an outlier test."""
        names = {"grubbs": "Grubbs-Test je Gruppe", "generalized_esd": "Verallgemeinerter ESD je Gruppe"}
        return names.get(name, name)

    def without_it(self, changes: bool | None) -> str:
        """Return what leaving a value out would change."""
        if changes is None:
            return "Die Antworten ohne ihn sind nicht berechenbar."
        return (
            "Ohne ihn würde sich eine Antwort ändern." if changes else "Ohne ihn bleibt jede Antwort gleich."
        )

    def nothing_flagged(self) -> str:
        """Return that no value was flagged."""
        return "Kein Wert wurde als auffällig gekennzeichnet."

    def described_only(self, label: str, n: int, reason: str) -> str:
        """Return one group that is described only."""
        return f"{label} (n = {n}) ist beschrieben, nicht verglichen: {reason.strip().rstrip('.')}."

    def reading_notices(self) -> str:
        """Return the head of the notices."""
        return "Hinweise des Lesens und der Auswertung, in deren Wortlaut"

    def no_notices(self) -> str:
        """Return that there were no notices."""
        return "Lesen und Auswertung gaben keine Hinweise."

    def notice(self, text: str, cells: str) -> str:
        """Return one notice with its cells."""
        return f"{text} Zellen: {cells}." if cells else text

    def unprintable(self, characters: str) -> str:
        """Return the notice on characters that the fonts lack."""
        return f"Zeichen, die den Schriften fehlen, sind mit ihrer Unicode-Nummer gedruckt: {characters}."

    def versions(self, text: str) -> str:
        """Return what computed the numbers."""
        return text

    def run(self, k: int, n: int, reason: str) -> str:
        """Return which run of how many this is."""
        text = f"Durchgang {k} von {n} über diesen Export zum Zeitpunkt des Druckens"
        return f"{text}; erneut, weil: {reason.strip().rstrip('.')}" if reason.strip() else text

    def no_records(self) -> str:
        """Return that the records held no entry when this was printed."""
        return "noch kein Eintrag"

    def changed_by_lab(self, names: str) -> str:
        """Return which templates the laboratory changed."""
        return f"vom Labor geändert: {names}" if names else "wie geliefert"

    def checking_intro(self) -> str:
        """Return what the steps need."""
        return "Übliche Mittel genügen: ein PDF-Leser, für die Befehlszeilen poppler und openssl."

    def terms_intro(self) -> str:
        """Return what the table of terms is."""
        return "Die Wörter dieses Berichts, wie er sie gebraucht."

    def terms(self) -> tuple[tuple[str, str], ...]:
        """Return what the words of the report mean."""
        return (
            (
                "Charge, Linie, Probe, Ablesung",
                "Eine Ablesung ist ein Wert des Geräts; Ablesungen gehören zu einer Probe, Proben zu einer "
                "Charge, Chargen zu einer Linie. Was als n zählt, steht auf Seite 1.",
            ),
            (
                "Grenze",
                "Der kleinste Unterschied, auf den es ankommt, im Plan gesetzt von denen, die das "
                "Produkt kennen.",
            ),
            (
                "Bereich, alle Paare zugleich",
                "Ein Intervall für den Unterschied zweier Mittel; alle zusammen enthalten die wahren "
                "Unterschiede in 95 von 100 solchen Vergleichen beim üblichen Niveau.",
            ),
            (
                "p, alle Paare",
                "Wie oft ein mindestens so deutlicher Unterschied irgendwo unter allen Paaren "
                "erschiene, wenn es "
                "keinen gäbe.",
            ),
            ("jenseits der Grenze", "Der ganze Bereich liegt jenseits der Grenze."),
            (
                "verschieden; Grenze offen",
                "Der Bereich schließt keinen Unterschied aus und reicht über die Grenze.",
            ),
            ("nicht geklärt", "Der Bereich enthält keinen Unterschied und Unterschiede jenseits der Grenze."),
            ("innerhalb der Grenze", "Der ganze Bereich liegt innerhalb der Grenze."),
            (
                "Mittel, s, n",
                "Arithmetisches Mittel, Standardabweichung mit n − 1, Zahl unabhängiger Ergebnisse.",
            ),
            ("Streuung", "Wie weit Ergebnisse um ihr eigenes Mittel liegen."),
            (
                "gekennzeichnet",
                "Auffällig nach einem genannten Test; im Vergleich behalten, außer eine Person lässt "
                "ihn aus.",
            ),
            ("gesiegelt", "Unversehrtheit und Herkunft der Datei, durch den Dienstschlüssel des Labors."),
            ("unterschrieben", "Name, Zeit und Bedeutung einer Person, mit deren eigenem Schlüssel."),
            ("Durchgang k von n", "Wie oft dieser Export verglichen war, als dieser Bericht gedruckt wurde."),
        )

    def seal_text(self, fingerprint: str) -> str:
        """Return what the seal's box says."""
        return f"Gesiegelt mit dem Dienstschlüssel des Labors; Fingerabdruck {fingerprint}"

    def roles(self) -> tuple[tuple[str, str], ...]:
        """Return the personal fields: role with its meaning, description."""
        return (
            ("Auf Richtigkeit geprüft", "Unterschrift der prüfenden Person: Name, Bedeutung, Zeit mit Zone"),
            (
                "Zur Ausgabe genehmigt",
                "Unterschrift der genehmigenden Person: Name, Bedeutung, Zeit mit Zone",
            ),
        )

    def entries(self) -> tuple[str, ...]:
        """Return the ruled entries of a signature box."""
        return "Name", "Bedeutung", "Zeit, Zone"

    def seal_description(self) -> str:
        """Return the seal field for readers who do not see it."""
        return "Siegel des Dienstschlüssels des Labors"

    def check_steps(self, number: str, export_file: str) -> tuple[tuple[str, str], ...]:
        """Return the steps an auditor takes with common tools; what to type is the same in every language."""
        typed = [line for _, line in super().check_steps(number, export_file)]
        said = (
            "Die Datei in einem PDF-Leser öffnen, der Unterschriften zeigt. Das Siegel deckt den "
            "Bericht; jede "
            "Unterschrift nennt Person, Zeit und Bedeutung. Den Fingerabdruck des siegelnden "
            "Zertifikats mit dem "
            "vergleichen, den das Labor veröffentlicht, und mit dem unten.",
            "Oder auf einer Befehlszeile; den Text lesen, nicht den Rückgabewert.",
            "Das Siegel für sich prüfen: die Unterschriften herausschreiben, die signierten Bytes "
            "ausschneiden, "
            "wie /ByteRange sagt, und gegen das veröffentlichte Zertifikat des Labors halten.",
            "Die angehängten Dateien speichern und ihre Prüfsummen mit denen unter Woher dies stammt "
            "vergleichen. Sie der Fassung entnehmen, die das Siegel deckt.",
            "Den Export öffnen, Werte und Zellen mit Daten, Zelle für Zelle vergleichen und die Rechnung mit "
            "einer gedruckten Tafel nachrechnen.",
        )
        return tuple(zip(said, typed, strict=True))

    def attachments_intro(self) -> str:
        """Return the head of the list of attachments."""
        return "In dieser Datei angehängt"

    def attachments(self, export_file: str) -> tuple[tuple[str, str], ...]:
        """Return the attachments with what they are."""
        return (
            (export_file, "der Export, Byte für Byte wie erhalten"),
            ("plan.toml", "was verglichen wurde und gegen welche Grenze"),
            ("layout.toml", "wie der Export gelesen wurde"),
            ("rules.toml", "die Regeltafel, die das Verfahren wählte"),
            ("context.json", "was von außerhalb kam: Labor, Nummer, Zeit, Durchgang, Aufzeichnungen"),
            ("result.json", "jede Zahl in voller Genauigkeit"),
        )

    def fingerprint_line(self) -> str:
        """Return the name of the fingerprint to compare."""
        return "Fingerabdruck zum Vergleich (SHA-256 des siegelnden Zertifikats)"

    def own_check(self, number: str) -> str:
        """Return how the software itself checks."""
        return (
            f"Mit der Software liest qcreport verify {number}.pdf den Export erneut und rechnet den "
            "Bericht neu."
        )
