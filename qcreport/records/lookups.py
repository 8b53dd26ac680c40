"""What can be asked of the records without writing to them."""

from __future__ import annotations

from collections.abc import Sequence

from qcreport.measurements import Measurement, MeasurementSet
from qcreport.records import ledger, listing, runs, same_data, store
from qcreport.records.archive import Archive
from qcreport.records.chain import Entry, Head, Kind
from qcreport.records.database import Database
from qcreport.records.listing import EVERYTHING, OpenRefusal, ReportRow, Wanted
from qcreport.records.past import past_measurements
from qcreport.records.run import Run, RunInputs
from qcreport.records.standing import Standing, standings
from qcreport.records.store import Survey


class Lookups:
    """Questions to the records of one site, each answered from one unchanging state."""

    def __init__(self, *, database: Database, archive: Archive) -> None:
        self.database = database
        self.archive = archive

    def head(self) -> Head:
        """Return the ledger's head."""
        with self.database.read() as connection:
            return ledger.head(connection)

    def entries(
        self, *, kind: Kind | None = None, since: str | None = None, until: str | None = None
    ) -> tuple[Entry, ...]:
        """Return ledger entries in order: of one kind, with `since` <= time < `until` (UTC, ISO 8601)."""
        with self.database.read() as connection:
            return tuple(ledger.entries(connection, kind=kind, since=since, until=until))

    def run_of_key(self, key: str) -> Run | None:
        """Return the run of a run key."""
        with self.database.read() as connection:
            return runs.by_key(connection, key)

    def run_of_number(self, number: str) -> Run | None:
        """Return the run of a report number."""
        with self.database.read() as connection:
            return runs.by_number(connection, number)

    def run_of_report(self, report_sha256: str) -> Run | None:
        """Return the run whose sealed report has this digest."""
        with self.database.read() as connection:
            return runs.by_report(connection, report_sha256)

    def runs_of_export(self, export_sha256: str, plan_name: str | None = None) -> tuple[Run, ...]:
        """Return the runs over an export, by one plan or by all, in order of number."""
        with self.database.read() as connection:
            return runs.of_export(connection, export_sha256, plan_name)

    def runs_over_data(self, export_sha256: str, plan_name: str) -> tuple[Run, ...]:
        """Return the runs by a plan over an export and over every other that holds the same, by k."""
        with self.database.read() as connection:
            return same_data.runs_over(connection, export_sha256, plan_name)

    def trials_over_data(self, inputs: RunInputs, plan_name: str) -> int:
        """Return under how many other settings the same data were computed by a plan without a report."""
        with self.database.read() as connection:
            return same_data.trials_over(connection, inputs, plan_name)

    def content_of(self, export_sha256: str, layout_sha256: str) -> str | None:
        """Return the digest of what an export holds as a layout reads it, or None."""
        with self.database.read() as connection:
            return same_data.content_of(connection, export_sha256, layout_sha256)

    def standings(self) -> dict[str, Standing]:
        """Return what became of each report after its seal, where anything did."""
        with self.database.read() as connection:
            return standings(connection)

    def survey(self, measurements: MeasurementSet) -> Survey:
        """Return what of an export is new, known or changed."""
        with self.database.read() as connection:
            return store.survey(connection, measurements)

    def past(
        self, measurements: MeasurementSet, characteristics: Sequence[str], *, by_line: bool
    ) -> tuple[Measurement, ...]:
        """Return the recorded values of earlier batches by the same layout, oldest first."""
        with self.database.read() as connection:
            return past_measurements(connection, measurements, characteristics, by_line=by_line)

    def reports(self, wanted: Wanted = EVERYTHING) -> tuple[ReportRow, ...]:
        """Return one row a run, in order of number; of all, or of those wanted."""
        with self.database.read() as connection:
            return listing.reports(connection, wanted)

    def open_refusals(self) -> tuple[OpenRefusal, ...]:
        """Return the refusals that nobody has mended yet, oldest first."""
        with self.database.read() as connection:
            return listing.open_refusals(connection)
