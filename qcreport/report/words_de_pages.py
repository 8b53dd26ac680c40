"""Deutsch: Seite 1 um die Antwort. German: page 1 around the answer, running lines, provenance."""

from __future__ import annotations

from qcreport.report.words_de_figure import FigureWordsDe
from qcreport.report.words_en_pages import PageWords


class PageWordsDe(FigureWordsDe, PageWords):
    """Labels and short lines."""

    def identity(self, number: str, revision: int) -> str:
        """Return report number and revision as on every page."""
        return f"Bericht {number}, Fassung {revision}"

    def identity_rows(self, number: str, revision: int, made: str) -> tuple[tuple[str, str], ...]:
        """Return number, revision and date as page 1 prints them."""
        return ("Bericht", number), ("Fassung", str(revision)), ("erstellt", made)

    def page(self) -> str:
        """Return the word before the page number."""
        return "Seite"

    def of(self) -> str:
        """Return the word before the number of pages."""
        return "von"

    def end_mark(self, number: str, revision: int) -> str:
        """Return the explicit end of the report."""
        return f"Ende des Berichts {number}, Fassung {revision}"

    def subtitle(self, groups: str, reference: str | None) -> str:
        """Return what is compared."""
        if reference is not None:
            return f"Jede {self.group} verglichen mit der Referenz {reference}: {groups}"
        return f"{self.group_plural} miteinander verglichen: {groups}"

    def date(self, iso: str) -> str:
        """Return a date from its ISO form."""
        year, month, day = iso.split("-")
        return f"{day}.{month}.{year}"

    def place_of_work(self, place: str) -> str:
        """Return where the work was done."""
        return f"Ort der Arbeit: {place}"

    def customer(self, name: str) -> str:
        """Return for whom."""
        return f"Auftraggeber: {name}"

    def basis_labels(self) -> tuple[str, ...]:
        """Return export, product, dates, plan, rule, run."""
        return "Export", "Produkt", "Daten", "Plan", "Verfahren"

    def dates(self, received: str, earliest: str | None, latest: str | None) -> str:
        """Return when it was measured and received."""
        if earliest is None or latest is None:
            return f"erhalten {received}; der Export gibt keine Zeiten der Messung"
        when = earliest if earliest == latest else f"{earliest} bis {latest}"
        return f"gemessen {when}; erhalten {received}"

    def product(self, product: str, method: str) -> str:
        """Return product and method."""
        if product and method:
            return f"{product}; Prüfverfahren: {method}"
        if method:
            return f"im Plan nicht genannt; Prüfverfahren: {method}"
        if product:
            return f"{product}; Prüfverfahren im Plan nicht genannt"
        return "Produkt und Prüfverfahren im Plan nicht genannt"

    def rule(self, procedure: str, reason: str) -> str:
        """Return the rule in words."""
        reason = reason.strip().rstrip(".")
        procedure = f"{procedure[:1].upper()}{procedure[1:]}"
        return f"{procedure}: {reason}." if reason else f"{procedure}."

    def rate_and_unit(self, alpha: str, unit: str, *, export_wide: bool) -> str:
        """Return over what the error rate is kept, and what counts as n."""
        over = "alle Merkmale des Exports zusammen" if export_wide else "jedes Merkmal"
        counts = {
            "reading": "Ablesungen",
            "sample": "Proben, feinere Ablesungen zu ihnen gemittelt",
            "batch": "Chargen, feinere Ablesungen schrittweise zu ihnen gemittelt",
        }.get(unit, unit)
        return f"Fehlerrate {alpha} über {over}; n zählt {counts}."

    def answers_more(self, n: int) -> str:
        """Return how many characteristics are answered elsewhere; the page number follows."""
        return f"{n} {'weiteres Merkmal' if n == 1 else 'weitere Merkmale'}, Seite"

    def figures_elsewhere(self) -> str:
        """Return where the figure is when page 1 has no room for it; the page number follows."""
        return "Das Bild steht auf Seite"

    def digest_of(self, name: str) -> str:
        """Return the label of a digest."""
        names = {"export": "Export", "plan": "Plan", "layout": "Layout", "rules": "Regeln"}
        return f"{names.get(name, name)} (SHA-256)"

    def records_label(self, sequence: int) -> str:
        """Return the label of the newest ledger entry before printing."""
        text = "jüngster Eintrag der Aufzeichnungen"
        return f"{text} ({sequence})" if sequence else text

    def seal_label(self) -> str:
        """Return the label of the seal's fingerprint."""
        return "siegelndes Zertifikat"

    def export_label(self) -> str:
        """Return the label of the export."""
        return "Export"

    def received(self, name: str, received: str) -> str:
        """Return export and time of receipt."""
        return f"{name}, erhalten {received}"

    def run_label(self) -> str:
        """Return the label of the run."""
        return "Durchgang"

    def software_label(self) -> str:
        """Return the label of the versions."""
        return "berechnet mit"

    def level_label(self) -> str:
        """Return the label of the seal's level."""
        return "Siegel"

    def level_aimed(self, level: str, subject: str) -> str:
        """Return which level the seal aims at and who seals."""
        return f"von „{subject}“, angestrebte Stufe: PAdES {level}"

    def templates_label(self) -> str:
        """Return the label of the templates."""
        return "Briefkopf, Fußzeile und Stil"

    def digests_heading(self) -> str:
        """Return the head of the digests."""
        return "Prüfsummen, in Gruppen zu acht"

    def template_digests_heading(self) -> str:
        """Return the head of the template digests."""
        return "Seiten und Stile, mit denen dies gesetzt ist (SHA-256)"

    def plan(self, name: str, approval: str) -> str:
        """Return plan and approval."""
        return f"{name}. {approval}"

    def export_and_run(self, name: str, run: str) -> str:
        """Return the export and which run over it this is."""
        return f"{name}; {run}"
