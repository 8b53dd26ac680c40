"""The check of everything recorded: chain, numbers, measurements, archive, reports."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from sqlalchemy import Connection, select

from qcreport.canonical import sha256_hex
from qcreport.errors import EnvironmentFailedError, LedgerError
from qcreport.records import ledger, runs, store
from qcreport.records.archive import Archive
from qcreport.records.chain import Entry, Head, Kind, check_chain
from qcreport.records.lookups import Lookups
from qcreport.records.run import Run, Sealing, run_key
from qcreport.records.tables import EXPORT

Facts = Mapping[str, Any]


@dataclass(frozen=True, slots=True, kw_only=True)
class RecordsStatus:
    """What a check of the records found."""

    n_entries: int
    """Ledger entries."""
    n_archived: int
    """Files in the archive."""
    n_reports: int
    """Sealed reports."""
    head: Head
    """The ledger's head when it was checked."""
    problems: tuple[str, ...]
    """One sentence each; empty where everything holds."""

    @property
    def ok(self) -> bool:
        """True where nothing was found."""
        return not self.problems


def check(records: Lookups, reports_folder: Path, known: Iterable[Head] = ()) -> RecordsStatus:
    """Check everything recorded and return what was found.

    Parameters
    ----------
    records : Lookups
        The site's records.
    reports_folder : Path
        Where published reports lie.
    known : iterable of Head
        Heads kept elsewhere; those under which numbers were reserved are added.
    """
    with records.database.read() as connection:
        entries = tuple(ledger.entries(connection))
        found = runs.all_runs(connection)
        head = ledger.head(connection)
        exports = tuple(connection.execute(select(EXPORT.c.sha256)).scalars())
        # 1. The chain holds, also against the heads that stand in the reports.
        chain = check_chain(entries, [*known, *(run.ledger_head for run in found)])
        problems = [problem.text for problem in chain]
        # 2. What the tables say of sealed runs is what the ledger says.
        sealed = {facts.get("number"): facts for facts in _facts_of(entries, Kind.SEALED)}
        problems += _runs_against_ledger(connection, found, sealed)
    # 3. Every file that is referred to is in the archive, and every file there matches its digest.
    n_archived, archive_problems = _check_archive(records.archive, _referred(exports, found))
    # 4. The published reports are those that were sealed.
    reports, report_problems = _check_reports(reports_folder, sealed)
    return RecordsStatus(
        n_entries=len(entries),
        n_archived=n_archived,
        n_reports=reports,
        head=head,
        problems=(*problems, *archive_problems, *report_problems),
    )


def _facts_of(entries: Sequence[Entry], kind: Kind) -> list[Facts]:
    found: list[Facts] = []
    for entry in entries:
        if entry.kind == kind.value and entry.intact_as(entry.sequence):
            found.append(entry.facts_object())
    return found


def _runs_against_ledger(
    connection: Connection, found: Sequence[Run], sealed: Mapping[Any, Facts]
) -> list[str]:
    problems = []
    numbers = {run.number for run in found if run.sealing is not None}
    for number in sorted(str(n) for n in sealed if n not in numbers):
        problems.append(f"The ledger has {number} as sealed; the list of runs has not.")
    for run in found:
        if run_key(run.inputs) != run.key:
            problems.append(f"The inputs of {run.number} no longer match its run key.")
        if run.sealing is None:
            continue
        facts = sealed.get(run.number)
        if facts is None:
            problems.append(f"The list of runs has {run.number} as sealed; the ledger has not.")
            continue
        problems += [
            f"The {name} of {run.number} differs between the list of runs and the ledger."
            for name, value in _sealed_fields(run, run.sealing).items()
            if facts.get(name) != value
        ]
        if facts.get("measurements_sha256") != store.digest_of_run(connection, run.number):
            problems.append(f"Measurements recorded by {run.number} were changed, added or removed.")
    return problems


def _sealed_fields(run: Run, sealing: Sealing) -> dict[str, Any]:
    return {
        "run_key": run.key,
        "name": run.export_name,
        "plan": run.plan_name,
        "k": run.k,
        "reason": run.reason,
        "context_sha256": run.context_sha256,
        "result_sha256": sealing.result_sha256,
        "report_name": sealing.report_name,
        "report_sha256": sealing.report_sha256,
        "answers": [list(answer) for answer in run.answers],
    }


def _referred(exports: Iterable[str], found: Iterable[Run]) -> tuple[str, ...]:
    digests = dict.fromkeys(exports)
    for run in found:
        own = (*run.inputs.digests(), run.context_sha256, run.result_sha256)
        digests |= dict.fromkeys(digest for digest in own if digest is not None)
    return tuple(digests)


def _check_archive(archive: Archive, referred: Iterable[str]) -> tuple[int, list[str]]:
    present = {path.parent.name + path.stem for path in archive.root.glob("[0-9a-f][0-9a-f]/*.bin")}
    problems = []
    for digest in sorted(present | set(referred)):
        try:
            archive.read(digest)
        except (LedgerError, EnvironmentFailedError) as error:
            problems.append(error.text)
    return len(present), problems


def _check_reports(folder: Path, sealed: Mapping[Any, Facts]) -> tuple[int, list[str]]:
    problems = []
    for number, facts in sorted(sealed.items(), key=lambda item: str(item[0])):
        name = str(facts.get("report_name"))
        path = folder / Path(name).name
        try:
            data = path.read_bytes()
        except OSError as error:
            problems.append(f"The report {number} ({name}) cannot be read: {error.strerror or error}.")
            continue
        if sha256_hex(data) != facts.get("report_sha256"):
            problems.append(f"The report {number} ({name}) is not the one that was sealed.")
    return len(sealed), problems
