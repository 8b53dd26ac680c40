"""Signatures of persons filed: who may sign what, both versions kept, the signed report in its place."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path

from qcreport.canonical import sha256_hex
from qcreport.durable import write_durably
from qcreport.errors import EnvironmentFailedError, LedgerError, SigningDeniedError
from qcreport.records.chain import Entry
from qcreport.records.facade import Records
from qcreport.records.moments import utc_text
from qcreport.records.run import Run
from qcreport.records.signatures import Signature
from qcreport.records.standing import ReportState
from qcreport.settings.people import People, Person
from qcreport.signing.roles import ROLES
from qcreport.signing.signed_copy import AddedSignature, added_signature, is_extension

Look = Callable[[bytes, bytes, datetime], AddedSignature]
"""Returns what a copy adds to a report: (report as filed, copy, moment)."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Filed:
    """A signature that was filed."""

    number: str
    """The report."""
    path: Path
    """Where the signed report is."""
    role: str
    """What it was signed as."""
    person: Person
    """Who signed."""
    issued: bool
    """Whether this was the signature that made it an issued report."""
    entry: Entry
    """The entry in the ledger."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Waiting:
    """A report that waits for a signature."""

    number: str
    """The report."""
    export_name: str
    """File name of its export."""
    missing: tuple[str, ...]
    """What it is not signed as yet."""


class SigningDesk:
    """Takes persons' signatures for the reports of one site."""

    def __init__(
        self, *, records: Records, reports: Path, people: People, clock: Callable[[], datetime]
    ) -> None:
        self._records = records
        self._reports = reports
        self._people = people
        self._clock = clock

    def waiting(self) -> tuple[Waiting, ...]:
        """Return the reports that lack a signature and may get it, by number."""
        rows = self._records.reports()
        return tuple(
            Waiting(number=row.number, export_name=row.export_name, missing=self.missing(row.number))
            for row in rows
            if row.state in (ReportState.SEALED, ReportState.SIGNED)
        )

    def missing(self, number: str) -> tuple[str, ...]:
        """Return what a report is not signed as yet, in the order of signing."""
        there = {s.role for s in self._signatures(number)}
        return tuple(role for role in ROLES if role not in there)

    def person_of(self, fingerprint_sha256: str) -> Person:
        """Return the person of a certificate.

        Raises
        ------
        SigningDeniedError
            Where people.toml names nobody with it.
        """
        person = self._people.by_certificate(fingerprint_sha256)
        if person is None:
            raise SigningDeniedError(
                "config/people.toml names nobody with this certificate "
                f"(SHA-256 {fingerprint_sha256[:16]}…). Whoever keeps the settings enters it there."
            )
        return person

    def require_may_sign(self, number: str, role: str, person: Person) -> Run:
        """Return the report, where this person may sign it as this now.

        Raises
        ------
        UsageError
            Where there is no such report.
        SigningDeniedError
            Where the person must not: no such right, it is signed so already, by this person as the other,
            out of order, or it was returned, withdrawn or replaced.
        """
        run = self._records.require_open(number)
        there = {s.role: s for s in self._signatures(number)}
        if role in there:
            raise SigningDeniedError(f"{number} is {role} already, by {there[role].name}.")
        if role not in person.may:
            may = " and ".join(person.may)
            raise SigningDeniedError(f"{person.name} may sign as {may}, not as {role} (config/people.toml).")
        for other in there.values():
            if other.name == person.name or other.fingerprint_sha256 == person.certificate_sha256:
                raise SigningDeniedError(
                    f"{person.name} signed {number} as {other.role}; somebody else must sign it as {role}."
                )
        if self._people.reviewed_first and role != ROLES[0] and ROLES[0] not in there:
            raise SigningDeniedError(
                f"{number} is not reviewed yet; by config/people.toml that comes before it is {role}."
            )
        return run

    def current(self, number: str) -> tuple[Path, bytes]:
        """Return where a report is filed and its newest version.

        Where a process was stopped between recording a signature and putting the signed report in its place,
        that is done now.

        Raises
        ------
        LedgerError
            Where the file is none of the versions that the ledger has.
        EnvironmentFailedError
            Where it cannot be read.
        """
        run = self._records.run_of_number(number)
        if run is None or run.sealing is None:
            raise LedgerError(f"There is no report {number} in the records.")
        path = self._reports / run.sealing.report_name
        versions = self._records.versions_of(number)
        data = _read(path)
        if sha256_hex(data) == versions[-1].sha256:
            return path, data
        if sha256_hex(data) not in {v.sha256 for v in versions}:
            raise LedgerError(f"{path} is not the report that was recorded. See: qcreport records check")
        newest = self._records.archive.read(versions[-1].sha256)
        write_durably(path, newest)
        return path, newest

    def settle(self) -> None:
        """Put every signed report in its place that a stopped process left behind."""
        for row in self._records.reports():
            if row.state in (ReportState.SIGNED, ReportState.ISSUED):
                self.current(row.number)

    def file(self, number: str, copy: bytes, *, via: str, look: Look | None = None) -> Filed:
        """Check a signed copy of a report and file it in the place of the version before.

        Parameters
        ----------
        number : str
            The report.
        copy : bytes
            Its newest version with one signature added.
        via : str
            How it was signed: `sign` or `inbox`.
        look : callable, optional
            Looks at a copy that somebody else made, in a process of its own.

        Raises
        ------
        SigningDeniedError
            Where the copy is anything else, or the person must not sign it so.
        NotOurReportError
            Where it cannot be read.
        """
        path, original = self.current(number)
        now = self._clock()
        if not is_extension(copy, original):
            raise SigningDeniedError(
                f"It is not a copy of the newest version of {number}; sign that one: {path.name}."
            )
        added = look(original, copy, now) if look is not None else added_signature(original, copy, at=now)
        person = self.person_of(added.fingerprint_sha256)
        self.require_may_sign(number, added.role, person)
        signature = Signature(
            role=added.role,
            field=added.field,
            name=person.name,
            fingerprint_sha256=added.fingerprint_sha256,
            signed_at=utc_text(added.signed_at),
            meaning=added.meaning,
        )
        entry = self._records.sign(number, signature, before=original, after=copy, via=via)
        write_durably(path, copy)
        return Filed(
            number=number,
            path=path,
            role=added.role,
            person=person,
            issued=not self.missing(number),
            entry=entry,
        )

    def _signatures(self, number: str) -> tuple[Signature, ...]:
        versions = self._records.versions_of(number)
        return tuple(v.signature for v in versions if v.signature is not None)


def _read(path: Path) -> bytes:
    try:
        return path.read_bytes()
    except OSError as error:
        raise EnvironmentFailedError(
            f"the report {path} cannot be read: {error.strerror}. Bring it back from a backup.",
            file=str(path),
        ) from None
