"""What people decide about reports, values and settings, as entries of the ledger."""

from __future__ import annotations

from collections.abc import Mapping

from sqlalchemy import Connection, delete, insert, select, update

from qcreport.analysis.provenance import Change
from qcreport.canonical import sha256_hex
from qcreport.errors import UsageError
from qcreport.records import ledger, runs
from qcreport.records.chain import Entry, Kind
from qcreport.records.facts import clean_text
from qcreport.records.ledger import Step
from qcreport.records.run import Run
from qcreport.records.settings_diff import settings_changes
from qcreport.records.standing import ReportState, Standing, standings
from qcreport.records.tables import SETTING_FILE
from qcreport.records.writing import Writer


class Decisions(Writer):
    """Withdrawing, leaving out, and the watch over settings."""

    def withdraw(self, number: str, *, reason: str, actor: str) -> Entry:
        """Record that a report is withdrawn; the report itself stays as it is.

        Raises
        ------
        UsageError
            Where there is no such report, or it is withdrawn or replaced already, or no reason is given.
        """
        if not reason.strip():
            raise UsageError('Say why the report is withdrawn: --reason "…".')
        with self._moment() as (connection, now):
            run, standing = self._standing_report(connection, number)
            if standing is not None and standing.state is ReportState.WITHDRAWN:
                raise UsageError(f"{number} was withdrawn already, on {standing.at[:10]}: {standing.reason}")
            if standing is not None and standing.state is ReportState.REPLACED:
                raise UsageError(f"{number} was replaced by {standing.replaced_by}; withdraw that one.")
            facts = {"number": number, "plan": run.plan_name, "reason": reason.strip()}
            return self._append(connection, now, Kind.WITHDRAWN, facts, actor)

    def require_replaceable(self, number: str, *, by_key: str) -> Run:
        """Return the report that a run with this key may replace.

        Raises
        ------
        UsageError
            Where there is no such report, or another one has replaced it already.
        """
        with self.database.read() as connection:
            run, standing = self._standing_report(connection, number)
            if standing is None or standing.state is not ReportState.REPLACED:
                return run
            newer = runs.by_number(connection, standing.replaced_by)
            if newer is not None and newer.key == by_key:
                return run
            raise UsageError(f"{number} was replaced already, by {standing.replaced_by}; replace that one.")

    def leave_out(
        self, claim: str, *, run_key: str, values: tuple[tuple[str, str], ...], reason: str, actor: str
    ) -> Entry:
        """Record which values, as (cell, text), a person leaves out of a run; once for each run key."""
        facts: dict[str, object] = {"claim": claim, "run_key": run_key, "reason": reason}
        facts |= {"values": [{"cell": cell, "text": text} for cell, text in values]}
        return self.note(Kind.LEFT_OUT, facts, actor=actor, step=Step(claim=run_key, subject="left out"))

    def settings_seen(self, files: Mapping[str, bytes], *, actor: str) -> tuple[Entry, ...]:
        """Hold the settings files against those seen last, and record what changed, one entry a file.

        Parameters
        ----------
        files : mapping
            Every settings file of the site by its name inside the site.
        actor : str
            Who saw the change; who made it the file does not tell.
        """
        digests = {clean_text(name): sha256_hex(data) for name, data in files.items()}
        with self.database.read() as connection:
            if _seen(connection) == digests:
                return ()
        for data in files.values():
            self.archive.store(data)
        by_name = {clean_text(name): data for name, data in files.items()}
        with self._moment() as (connection, now):
            seen = _seen(connection)
            first = not seen
            return tuple(
                self._setting_changed(connection, now, name, seen.get(name), by_name.get(name), actor, first)
                for name in sorted({*seen, *digests})
                if seen.get(name) != digests.get(name)
            )

    def _setting_changed(
        self,
        connection: Connection,
        now: str,
        name: str,
        old_sha256: str | None,
        data: bytes | None,
        actor: str,
        first: bool,
    ) -> Entry:
        old = None if old_sha256 is None else self.archive.read(old_sha256)
        new_sha256 = None if data is None else sha256_hex(data)
        what = "first seen" if first else "new" if old is None else "removed" if data is None else "changed"
        facts: dict[str, object] = {
            "file": name,
            "what": what,
            "old_sha256": old_sha256,
            "new_sha256": new_sha256,
        }
        if old is not None and data is not None:
            facts["changes"] = changes_facts(settings_changes("setting", old, data))
        entry = self._append(connection, now, Kind.SETTINGS_CHANGED, facts, actor)
        c = SETTING_FILE.c
        if new_sha256 is None:
            connection.execute(delete(SETTING_FILE).where(c.name == name))
        elif old_sha256 is None:
            connection.execute(insert(SETTING_FILE).values(name=name, sha256=new_sha256))
        else:
            connection.execute(update(SETTING_FILE).where(c.name == name).values(sha256=new_sha256))
        return entry

    def _standing_report(self, connection: Connection, number: str) -> tuple[Run, Standing | None]:
        run = runs.by_number(connection, number)
        if run is None or run.sealing is None:
            raise UsageError(f"There is no report {number}. See: qcreport records list")
        return run, standings(connection).get(number)

    def approve(self, facts: Mapping[str, object], *, actor: str) -> Entry:
        """Record an approval as its signer made it; the same one again is written once."""
        step = Step(claim=str(facts["statement"]), subject=str(facts["fingerprint_sha256"]))
        return self.note(Kind.APPROVED, facts, actor=actor, step=step)

    def approvals(self, digests: Mapping[str, str]) -> tuple[Entry, ...]:
        """Return the approvals of exactly these plan, layout and rules, oldest first."""
        with self.database.read() as connection:
            found = tuple(ledger.entries(connection, kind=Kind.APPROVED))
        return tuple(
            e for e in found if all(e.facts_object().get(name) == value for name, value in digests.items())
        )


def changes_facts(changes: tuple[Change, ...]) -> list[dict[str, str | None]]:
    """Return changes as facts of a ledger entry."""
    return [{"what": c.what, "key": c.key, "old": c.before, "new": c.after} for c in changes]


def _seen(connection: Connection) -> dict[str, str]:
    rows = connection.execute(select(SETTING_FILE.c.name, SETTING_FILE.c.sha256))
    return {row.name: row.sha256 for row in rows}
