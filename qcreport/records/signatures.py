"""Persons' signatures on reports: signed, issued once both are there, returned."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

from sqlalchemy import Connection

from qcreport.canonical import sha256_hex
from qcreport.errors import SigningDeniedError, UsageError
from qcreport.records import ledger, runs
from qcreport.records.chain import Entry, Kind
from qcreport.records.ledger import Step
from qcreport.records.run import Run, Sealing
from qcreport.records.standing import ReportState, Standing, standings
from qcreport.records.writing import Writer

COMPLETE: Final = 2
"""Signatures that make a report an issued one."""
_CLOSED: Final = (ReportState.RETURNED, ReportState.WITHDRAWN, ReportState.REPLACED)


@dataclass(frozen=True, slots=True, kw_only=True)
class Signature:
    """One signature as recorded, or as about to be."""

    role: str
    """`reviewed` or `authorised`."""
    field: str
    """Its field in the report."""
    name: str
    """The person, as people.toml names them."""
    fingerprint_sha256: str
    """SHA-256 of the certificate, hexadecimal."""
    signed_at: str
    """UTC; stated in the signature."""
    meaning: str
    """Reason stated in the signature."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Version:
    """One version of a report: as sealed, or with one signature more."""

    sha256: str
    """Digest of the file; it is in the archive, but for the sealed one while nobody has signed."""
    signature: Signature | None
    """What it adds to the version before; None for the report as sealed."""


class Signatures(Writer):
    """Signing and returning."""

    def versions_of(self, number: str) -> tuple[Version, ...]:
        """Return the versions of a sealed report, as sealed first.

        Raises
        ------
        UsageError
            Where there is no such report.
        """
        with self.database.read() as connection:
            _, sealing = _sealed_run(connection, number)
            return _versions(connection, number, sealing)

    def number_of_version(self, sha256: str) -> str | None:
        """Return the number of the report that has this version."""
        with self.database.read() as connection:
            run = runs.by_report(connection, sha256)
            if run is not None:
                return run.number
            found = (f for _, f in signed_facts(connection) if f.get("report_sha256") == sha256)
            return next((str(facts["number"]) for facts in found), None)

    def require_open(self, number: str) -> Run:
        """Return a report that may be signed or returned.

        Raises
        ------
        UsageError
            Where there is no such report.
        SigningDeniedError
            Where it was returned, withdrawn or replaced.
        """
        with self.database.read() as connection:
            run, _ = _sealed_run(connection, number)
            _require_open(number, standings(connection).get(number))
            return run

    def sign(self, number: str, signature: Signature, *, before: bytes, after: bytes, via: str) -> Entry:
        """Record a signature, and that the report is issued where it is the second; keep both versions.

        Parameters
        ----------
        number : str
            The report.
        signature : Signature
            As checked by the caller: person, right and certificate.
        before, after : bytes
            The version that was signed and the signed one; both go into the archive.
        via : str
            How it was signed: `sign`, or `inbox`.

        Raises
        ------
        SigningDeniedError
            Where the report was returned, withdrawn or replaced, has this signature, or `before` is not its
            newest version.
        """
        for data in (before, after):
            self.archive.store(data)
        with self._moment() as (connection, now):
            run, sealing = _sealed_run(connection, number)
            _require_open(number, standings(connection).get(number))
            versions = _versions(connection, number, sealing)
            if versions[-1].sha256 != sha256_hex(before):
                raise SigningDeniedError(
                    f"{number} was signed by somebody else meanwhile; sign the newest one."
                )
            if any(v.signature is not None and v.signature.role == signature.role for v in versions):
                raise SigningDeniedError(f"{number} is {signature.role} already.")
            facts: dict[str, object] = {"number": number, "plan": run.plan_name, "via": via}
            facts |= {name: getattr(signature, name) for name in _FACTS}
            facts |= {"before_sha256": versions[-1].sha256, "report_sha256": sha256_hex(after)}
            step = Step(claim=f"sign {number}", subject=signature.role)
            entry = self._append(connection, now, Kind.SIGNED, facts, signature.name, step)
            if len(versions) == COMPLETE:
                issued = {"number": number, "plan": run.plan_name, "report_sha256": sha256_hex(after)}
                self._append(
                    connection, now, Kind.ISSUED, issued, signature.name, Step(claim=f"sign {number}")
                )
            return entry

    def return_report(self, number: str, *, reason: str, actor: str, fingerprint_sha256: str = "") -> Entry:
        """Record that a report is returned instead of signed.

        Raises
        ------
        UsageError
            Where there is no such report, or no reason is given.
        SigningDeniedError
            Where it was returned, withdrawn or replaced before, or is issued: that one is withdrawn.
        """
        if not reason.strip():
            raise UsageError('Say why the report is returned: --reason "…".')
        with self._moment() as (connection, now):
            run, _ = _sealed_run(connection, number)
            standing = standings(connection).get(number)
            _require_open(number, standing)
            if standing is not None and standing.state is ReportState.ISSUED:
                raise SigningDeniedError(
                    f"{number} is issued and can no longer be returned. Withdraw it: "
                    f"qcreport records withdraw {number}"
                )
            facts = {"number": number, "plan": run.plan_name, "reason": reason.strip()}
            if fingerprint_sha256:
                facts["fingerprint_sha256"] = fingerprint_sha256
            return self._append(connection, now, Kind.RETURNED, facts, actor)


_FACTS: Final = ("role", "field", "name", "fingerprint_sha256", "signed_at", "meaning")


def signed_facts(connection: Connection) -> Sequence[tuple[Entry, dict[str, object]]]:
    """Return the entries of signatures with their facts, in order; entries that do not hold are left out."""
    found = ledger.entries(connection, kind=Kind.SIGNED)
    return [(e, e.facts_object()) for e in found if e.intact_as(e.sequence)]


def _versions(connection: Connection, number: str, sealing: Sealing) -> tuple[Version, ...]:
    signed = [facts for _, facts in signed_facts(connection) if facts.get("number") == number]
    return (
        Version(sha256=sealing.report_sha256, signature=None),
        *(
            Version(
                sha256=str(facts["report_sha256"]),
                signature=Signature(**{name: str(facts[name]) for name in _FACTS}),
            )
            for facts in signed
        ),
    )


def _sealed_run(connection: Connection, number: str) -> tuple[Run, Sealing]:
    run = runs.by_number(connection, number)
    if run is None or run.sealing is None:
        raise UsageError(f"There is no report {number}. See: qcreport records list")
    return run, run.sealing


def _require_open(number: str, standing: Standing | None) -> None:
    if standing is None or standing.state not in _CLOSED:
        return
    why = f": {standing.reason}" if standing.reason else ""
    raise SigningDeniedError(
        f"{number} was {standing.words()} on {standing.at[:10]}{why}. It is signed no more."
    )


def newest_versions(connection: Connection) -> dict[str, str]:
    """Return the digest of the newest version of every report that somebody signed, by number."""
    return {str(f["number"]): str(f["report_sha256"]) for _, f in signed_facts(connection)}
