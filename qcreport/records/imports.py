"""Past exports taken into the store without reports."""

from __future__ import annotations

from sqlalchemy import insert, select

from qcreport.canonical import sha256_hex
from qcreport.measurements import MeasurementSet
from qcreport.records import ledger, runs, store
from qcreport.records.chain import Kind
from qcreport.records.facts import clean_text
from qcreport.records.ledger import Step
from qcreport.records.same_data import note_content
from qcreport.records.store import Survey
from qcreport.records.tables import EXPORT
from qcreport.records.writing import Writer


class Imports(Writer):
    """Importing: archive, store, one ledger entry an export."""

    def imported(self, export_sha256: str, layout_sha256: str) -> bool:
        """Return whether an export was imported, or sealed in a report, by this layout before."""
        with self.database.read() as connection:
            step = _step(export_sha256, layout_sha256)
            if ledger.entry_of(connection, Kind.IMPORTED, step) is not None:
                return True
            return any(
                run.sealing is not None and run.inputs.layout_sha256 == layout_sha256
                for run in runs.of_export(connection, export_sha256)
            )

    def import_export(
        self,
        data: bytes,
        *,
        name: str,
        layout: bytes,
        measurements: MeasurementSet,
        content: str | None,
        actor: str,
    ) -> Survey:
        """Take the measurements of a past export into the store, once for each layout."""
        self.archive.store(data)
        self.archive.store(layout)
        export_sha256, layout_sha256 = measurements.export_sha256, sha256_hex(layout)
        step = _step(export_sha256, layout_sha256)
        with self._moment() as (connection, now):
            if ledger.entry_of(connection, Kind.IMPORTED, step) is not None:
                return store.survey(connection, measurements)
            query = select(EXPORT.c.sha256).where(EXPORT.c.sha256 == export_sha256)
            if connection.execute(query).first() is None:
                row = {"sha256": export_sha256, "name": clean_text(name), "size": len(data)}
                connection.execute(insert(EXPORT).values(row | {"received_at": now}))
            note_content(connection, export_sha256, layout_sha256, content)
            found = store.record(connection, measurements, number=None, at=now)
            digest = store.digest_of_import(connection, export_sha256, measurements.layout_name)
            facts = {"name": name, "export_sha256": export_sha256, "size": len(data)}
            facts |= {"layout": measurements.layout_name, "layout_sha256": layout_sha256}
            facts |= {"measurements": len(measurements.measurements), "new": found.new}
            facts |= {"known": found.known, "changed": len(found.changed)}
            facts |= {"retests": len(found.retests), "measurements_sha256": digest}
            self._append(connection, now, Kind.IMPORTED, facts, actor, step)
            return found


def _step(export_sha256: str, layout_sha256: str) -> Step:
    return Step(claim=f"import-{export_sha256}", subject=layout_sha256)
