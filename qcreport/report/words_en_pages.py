"""English: page 1 around the answer, the running lines, and the labels of provenance."""

from __future__ import annotations

from qcreport.report.words_en_figure import FigureWords


class PageWords(FigureWords):
    """Labels and short lines."""

    def identity(self, number: str, revision: int) -> str:
        """Return report number and revision as on every page."""
        return f"Report {number}, revision {revision}"

    def identity_rows(self, number: str, revision: int, made: str) -> tuple[tuple[str, str], ...]:
        """Return number, revision and date as page 1 prints them."""
        return ("report", number), ("revision", str(revision)), ("made", made)

    def page(self) -> str:
        """Return the word before the page number."""
        return "page"

    def of(self) -> str:
        """Return the word before the number of pages."""
        return "of"

    def end_mark(self, number: str, revision: int) -> str:
        """Return the explicit end of the report."""
        return f"End of report {number}, revision {revision}"

    def subtitle(self, groups: str, reference: str | None) -> str:
        """Return what is compared."""
        if reference is not None:
            return f"Each {self.group} compared with the reference {reference}: {groups}"
        return f"{self.group_plural.capitalize()} compared with each other: {groups}"

    def group_list(self, labels: tuple[str, ...]) -> str:
        """Return the groups, or how many where they are many."""
        whole = ", ".join(labels)
        if len(labels) <= 6 and len(whole) <= 160:
            return whole
        return f"{len(labels)} {self.group_plural}"

    def date(self, iso: str) -> str:
        """Return a date from its ISO form."""
        return iso

    def place_of_work(self, place: str) -> str:
        """Return where the work was done."""
        return f"Place of work: {place}"

    def customer(self, name: str) -> str:
        """Return for whom."""
        return f"Customer: {name}"

    def basis_labels(self) -> tuple[str, ...]:
        """Return export, product, dates, plan, rule, run."""
        return "export", "product", "dates", "plan", "procedure"

    def export_and_run(self, name: str, run: str) -> str:
        """Return the export and which run over it this is."""
        return f"{name}; {run}"

    def dates(self, received: str, earliest: str | None, latest: str | None) -> str:
        """Return when it was measured and received."""
        if earliest is None or latest is None:
            return f"received {received}; the export gives no times of measurement"
        when = earliest if earliest == latest else f"{earliest} to {latest}"
        return f"measured {when}; received {received}"

    def product(self, product: str, method: str) -> str:
        """Return product and method."""
        if product and method:
            return f"{product}; method: {method}"
        if method:
            return f"not named in the plan; method: {method}"
        return (
            f"{product}; method not named in the plan"
            if product
            else "product and method not named in the plan"
        )

    def plan(self, name: str, approval: str) -> str:
        """Return plan and approval."""
        return f"{name}. {approval}"

    def rule(self, procedure: str, reason: str) -> str:
        """Return the rule in words."""
        reason = reason.strip().rstrip(".")
        procedure = f"{procedure[:1].upper()}{procedure[1:]}"
        return f"{procedure}: {reason[:1].lower()}{reason[1:]}." if reason else f"{procedure}."

    def rate_and_unit(self, alpha: str, unit: str, *, export_wide: bool) -> str:
        """Return over what the error rate is kept, and what counts as n."""
        over = "all characteristics of the export together" if export_wide else "each characteristic"
        counts = {
            "reading": "readings",
            "sample": "samples, finer readings averaged to them",
            "batch": "batches, finer readings averaged to them step by step",
        }.get(unit, unit)
        return f"Error rate {alpha} over {over}; n counts {counts}."

    def answers_more(self, n: int) -> str:
        """Return how many characteristics are answered elsewhere; the page number follows."""
        return f"{n} more {'characteristic' if n == 1 else 'characteristics'}, page"

    def figures_elsewhere(self) -> str:
        """Return where the figure is when page 1 has no room for it; the page number follows."""
        return "The figure stands on page"

    def digest_of(self, name: str) -> str:
        """Return the label of a digest."""
        return f"{name} (SHA-256)"

    def records_label(self, sequence: int) -> str:
        """Return the label of the newest ledger entry before printing."""
        return f"newest entry of the records ({sequence})" if sequence else "newest entry of the records"

    def seal_label(self) -> str:
        """Return the label of the seal's fingerprint."""
        return "sealing certificate"

    def export_label(self) -> str:
        """Return the label of the export."""
        return "export"

    def received(self, name: str, received: str) -> str:
        """Return export and time of receipt."""
        return f"{name}, received {received}"

    def run_label(self) -> str:
        """Return the label of the run."""
        return "run"

    def software_label(self) -> str:
        """Return the label of the versions."""
        return "computed with"

    def level_label(self) -> str:
        """Return the label of the seal's level."""
        return "seal"

    def level_aimed(self, level: str, subject: str) -> str:
        """Return which level the seal aims at and who seals."""
        return f"by “{subject}”, level aimed at: PAdES {level}"

    def templates_label(self) -> str:
        """Return the label of the templates."""
        return "letterhead, footer and style"

    def digests_heading(self) -> str:
        """Return the head of the digests."""
        return "Digests, in groups of eight"

    def template_digests_heading(self) -> str:
        """Return the head of the template digests."""
        return "Pages and styles this was set with (SHA-256)"
