"""English: data, what was flagged, where it comes from, how to check, terms, signatures and cautions."""

from __future__ import annotations

from qcreport.report.words_en_figure import FigureWords


class CheckingWords(FigureWords):
    """Words for the part of a report that an auditor works with."""

    DEMONSTRATION = "Demonstration: sealed with a demonstration key; not for release."
    SIGNING_RULE = "Counts only with both signatures; without them this is a draft."
    CAUTION_RELEASE = (
        "This report supports and never replaces the release decision of the responsible person."
    )
    CAUTION_ITEMS = "It relates only to the items tested."

    def cautions(self) -> tuple[str, ...]:
        """Return the cautions that hold for every report."""
        one = (
            f"one {self.group} says nothing of its line"
            if self.group == "batch"
            else ("the batches listed here stand for their line only as far as they were drawn to do so")
        )
        return (
            f"{self.group_plural.capitalize()} measured on different days, on different rigs or by different "
            "analysts carry that difference with them.",
            "The ranges are for differences of means; they are not the measurement uncertainty.",
            f"{one[0].upper()}{one[1:]}.",
            f"Four or fewer results a {self.group} show only very large differences.",
            "Independence of the results is assumed unless it was checked.",
            "The answer depends on how spread is judged; the way used here is named under Why "
            "this procedure.",
            "The error rates assume near-normal data.",
            "Specification limits are shown for orientation; conformity is not judged.",
        )

    def data_intro(self, export: str) -> str:
        """Return how to read the annex."""
        return (
            f"Every value as read from {export}, in export order, each after the cell it stands in. "
            "Where the stored text differs from the printed number, it follows in quotation marks."
        )

    def data_group(self, label: str, values: int, sheet: str) -> str:
        """Return the head of one group's values."""
        text = f"{label}, {values} {'cell' if values == 1 else 'cells'}"
        return f"{text}, {sheet}" if sheet else text

    def sheet(self, name: str) -> str:
        """Return a sheet's name in words."""
        return f"sheet {name}"

    def sample(self, name: str) -> str:
        """Return a sample's name in words."""
        return f"sample {name}"

    def stored(self, text: str) -> str:
        """Return the stored text of a cell."""
        return f"(“{text}”)"

    def missing(self) -> str:
        """Return what is printed for a missing value."""
        return "missing"

    def not_detected(self) -> str:
        """Return what is printed for a value that was not detected."""
        return "not detected"

    def mark(self, mark: str) -> str:
        """Return the state of a cell."""
        return {"struck": "struck out"}.get(mark, mark)

    def flagged_line(
        self, key: str, group: str, value: str, cell: str, test: str, p: str, effect: str
    ) -> str:
        """Return one flagged value."""
        return f"{key}: {group}, {value}, {cell}. {test}, p at most {p}. Kept in the comparison. {effect}"

    def test_name(self, name: str) -> str:
        """Return the name of an outlier test."""
        return {"grubbs": "Grubbs’ test by group", "generalized_esd": "Generalized ESD by group"}.get(
            name, name
        )

    def without_it(self, changes: bool | None) -> str:
        """Return what leaving a value out would change."""
        if changes is None:
            return "What the answers would be without it, cannot be computed."
        return "Without it an answer would change." if changes else "Without it every answer stays the same."

    def nothing_flagged(self) -> str:
        """Return that no value was flagged."""
        return "No value was flagged as outlying."

    def described_only(self, label: str, n: int, reason: str) -> str:
        """Return one group that is described only."""
        return f"{label} (n = {n}) is described, not compared: {reason.strip().rstrip('.')}."

    def reading_notices(self) -> str:
        """Return the head of the notices."""
        return "Notices of the reading and of the analysis"

    def no_notices(self) -> str:
        """Return that there were no notices."""
        return "The reading and the analysis gave no notices."

    def notice(self, text: str, cells: str) -> str:
        """Return one notice with its cells."""
        return f"{text} Cells: {cells}." if cells else text

    def unprintable(self, characters: str) -> str:
        """Return the notice on characters that the fonts lack."""
        return (
            "Characters that the fonts of this report lack are printed by their number in Unicode: "
            f"{characters}."
        )

    def versions(self, text: str) -> str:
        """Return what computed the numbers."""
        return text

    def run(self, k: int, n: int, reason: str) -> str:
        """Return which run of how many this is."""
        text = f"run {k} of {n} over this export at the time of printing"
        return f"{text}; run again because: {reason.strip().rstrip('.')}" if reason.strip() else text

    def no_records(self) -> str:
        """Return that the records held no entry when this was printed."""
        return "no entry yet"

    def changed_by_lab(self, names: str) -> str:
        """Return which templates the laboratory changed."""
        return f"changed by the laboratory: {names}" if names else "as shipped"

    def terms(self) -> tuple[tuple[str, str], ...]:
        """Return what the words of the report mean."""
        return (
            (
                "batch, line, sample, reading",
                "A reading is one value of the instrument; readings belong to a "
                "sample, samples to a batch, batches to a line. What counts as n is named on page 1.",
            ),
            (
                "margin",
                "The smallest difference that matters, set in the plan by people who know the product.",
            ),
            (
                "range, all pairs at once",
                "An interval for the difference of two means; all of them together "
                "hold the true differences in 95 of 100 such comparisons at the usual level.",
            ),
            (
                "p, all pairs",
                "How often a difference at least this clear would appear somewhere among all pairs "
                "if there were none.",
            ),
            ("beyond the margin", "The whole range lies beyond the margin."),
            ("differs; margin open", "The range excludes no difference and reaches across the margin."),
            ("not settled", "The range holds both no difference and differences beyond the margin."),
            ("within the margin", "The whole range lies inside the margin."),
            ("mean, s, n", "Arithmetic mean, standard deviation with n − 1, number of independent results."),
            ("spread", "How far results scatter about their own mean."),
            ("flagged", "Outlying by a named test; kept in the comparison unless a person leaves it out."),
            ("sealed", "Integrity and origin of the file, by the laboratory’s service key."),
            ("signed", "A person’s name, time and meaning, by that person’s own key."),
            ("run k of n", "How often this export had been compared when this report was printed."),
        )

    def seal_text(self, fingerprint: str) -> str:
        """Return what the seal's box says."""
        return f"Sealed by the laboratory’s service key; fingerprint {fingerprint}"

    def roles(self) -> tuple[tuple[str, str], ...]:
        """Return the personal fields: role with its meaning, description."""
        return (
            (
                "Reviewed for correctness",
                "Signature of the reviewer: name, meaning, time with zone",
            ),
            (
                "Authorised for issue",
                "Signature of the authoriser: name, meaning, time with zone",
            ),
        )

    def entries(self) -> tuple[str, ...]:
        """Return the ruled entries of a signature box."""
        return "name", "meaning", "time, zone"

    def seal_description(self) -> str:
        """Return the seal field for readers who do not see it."""
        return "Seal of the laboratory’s service key"

    def checking_intro(self) -> str:
        """Return what the steps need."""
        return "Common tools are enough: a PDF reader, and for the command lines poppler and openssl."

    def terms_intro(self) -> str:
        """Return what the table of terms is."""
        return "The words of this report, as it uses them."

    def check_steps(self, number: str, export_file: str) -> tuple[tuple[str, str], ...]:
        """Return the steps an auditor takes with common tools."""
        file = f"{number}.pdf"
        return (
            (
                "Open the file in any PDF reader that shows signatures. The seal covers the report; each "
                "signature names a person, a time and a meaning. Compare the fingerprint of the sealing "
                "certificate with the one the laboratory publishes and with the one below.",
                "",
            ),
            ("Or on a command line; read its text, not its exit code.", f"pdfsig {file}"),
            (
                "Check the seal by itself: write the signatures out, cut the signed bytes as "
                "/ByteRange says, "
                "and hold them against the laboratory’s published certificate.",
                f"pdfsig -dump {file}\nopenssl cms -verify -binary -inform DER -in {file}.sig0 "
                "-content signed-bytes -CAfile laboratory.pem -purpose any -out checked",
            ),
            (
                "Save the attached files and compare their digests with those under Where this comes from. "
                "Take them from the revision that the seal covers.",
                f"pdfdetach -saveall {file}\nsha256sum {export_file} plan.toml layout.toml rules.toml",
            ),
            (
                "Open the export, compare values and cells with Data, cell by cell, and redo the line of "
                "arithmetic with a printed table.",
                "",
            ),
        )

    def attachments_intro(self) -> str:
        """Return the head of the list of attachments."""
        return "Attached inside this file"

    def attachments(self, export_file: str) -> tuple[tuple[str, str], ...]:
        """Return the attachments with what they are."""
        return (
            (export_file, "the export, byte for byte as received"),
            ("plan.toml", "what was compared and against which margin"),
            ("layout.toml", "how the export was read"),
            ("rules.toml", "the rules table that chose the procedure"),
            ("context.json", "what came from outside these files: laboratory, number, time, run, records"),
            ("result.json", "every number at full precision"),
        )

    def fingerprint_line(self) -> str:
        """Return the name of the fingerprint to compare."""
        return "fingerprint to compare (SHA-256 of the sealing certificate)"

    def own_check(self, number: str) -> str:
        """Return how the software itself checks."""
        return (
            f"With the software, qcreport verify {number}.pdf reads the export again and computes the "
            "report anew."
        )
