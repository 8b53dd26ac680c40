"""The check of everything recorded: chain, numbers, measurements, archive, reports."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from sqlalchemy import Connection, select

from qcreport.canonical import sha256_hex
from qcreport.errors import EnvironmentFailedError, LedgerError
from qcreport.records import ledger, runs, store
from qcreport.records.archive import Archive
from qcreport.records.chain import Head, Kind
from qcreport.records.chain_walk import walk_chain
from qcreport.records.check_checkpoints import Judged, Trust, judge_checkpoints
from qcreport.records.check_values import Reread, reread
from qcreport.records.checkpoints import FILE_NAME
from qcreport.records.lookups import Lookups
from qcreport.records.run import Run, Sealing, run_key
from qcreport.records.signatures import newest_versions, signed_facts
from qcreport.records.tables import CONTENT, EXPORT, SETTING_FILE

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
    covered: int = 0
    """Newest entry that a signed checkpoint covers; 0 where none does."""
    n_reread: int = 0
    """Exports read again and held against the store."""

    @property
    def ok(self) -> bool:
        """True where nothing was found."""
        return not self.problems


@dataclass(frozen=True, slots=True, kw_only=True)
class CheckOptions:
    """What is checked beside the records themselves."""

    known: tuple[Head, ...] = ()
    """Heads kept elsewhere; those under which numbers were reserved are added."""
    trust: Trust | None = None
    """How checkpoints are judged; None: they are not looked at."""
    checkpoint_files: tuple[Path, ...] = ()
    """Checkpoints kept elsewhere, beside the site's own."""
    reread: Reread | None = None
    """Which exports are read again; None for none."""


PLAIN = CheckOptions()


def check(records: Lookups, reports_folder: Path, options: CheckOptions = PLAIN) -> RecordsStatus:
    """Check everything recorded and return what was found.

    Parameters
    ----------
    records : Lookups
        The site's records.
    reports_folder : Path
        Where published reports lie.
    options : CheckOptions
        Heads and checkpoints from elsewhere, and how much is read again.
    """
    signed = _checkpoints(records, options)
    with records.database.read() as connection:
        found = runs.all_runs(connection)
        # 1. The chain holds, also against the heads that stand in the reports and under signatures.
        known = [*options.known, *signed.heads, *(run.ledger_head for run in found)]
        chain = walk_chain(lambda: ledger.entries(connection), known)
        problems = [problem.text for problem in chain.problems] + list(signed.problems)
        # 2. What the tables say of sealed runs and imports is what the ledger says.
        sealed = {facts.get("number"): facts for facts in _facts_of(connection, Kind.SEALED)}
        problems += _runs_against_ledger(connection, found, sealed)
        problems += _imports_against_ledger(connection)
        referred = _referred(connection, found)
        newest = newest_versions(connection)
        # 3. The store holds what the archived exports hold.
        n_reread, values = (
            (0, []) if options.reread is None else reread(connection, records.archive, options.reread)
        )
    # 4. Every file that is referred to is in the archive, and every file there matches its digest.
    n_archived, archive_problems = _check_archive(records.archive, referred)
    # 5. The published reports are those that were sealed, as signed last, and no others.
    reports, report_problems = _check_reports(reports_folder, sealed, newest)
    return RecordsStatus(
        n_entries=chain.n_entries,
        n_archived=n_archived,
        n_reports=reports,
        head=chain.head,
        problems=(*problems, *values, *archive_problems, *report_problems),
        covered=signed.covers,
        n_reread=n_reread,
    )


def _checkpoints(records: Lookups, options: CheckOptions) -> Judged:
    if options.trust is None:
        return Judged(heads=(), count=0, problems=())
    own = records.database.path.parent / FILE_NAME
    return judge_checkpoints((own, *options.checkpoint_files), options.trust)


_NEEDED = (
    "number",
    "run_key",
    "name",
    "plan",
    "k",
    "reason",
    "context_sha256",
    "result_sha256",
    "report_name",
    "report_sha256",
    "answers",
    "measurements_sha256",
)


def _facts_of(connection: Connection, kind: Kind) -> Iterator[Facts]:
    for entry in ledger.entries(connection, kind=kind):
        if entry.intact_as(entry.sequence):
            facts = entry.facts_object()
            yield {name: facts.get(name) for name in _NEEDED}


def _imports_against_ledger(connection: Connection) -> Iterator[str]:
    for entry in ledger.entries(connection, kind=Kind.IMPORTED):
        if not entry.intact_as(entry.sequence):
            continue
        facts = entry.facts_object()
        digest = store.digest_of_import(connection, str(facts["export_sha256"]), str(facts["layout"]))
        if digest != facts.get("measurements_sha256"):
            yield f"Measurements imported from {facts.get('name')} were changed, added or removed."


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


def _referred(connection: Connection, found: Iterable[Run]) -> tuple[str, ...]:
    digests = dict.fromkeys(connection.execute(select(EXPORT.c.sha256)).scalars())
    digests |= dict.fromkeys(connection.execute(select(SETTING_FILE.c.sha256)).scalars())
    digests |= dict.fromkeys(connection.execute(select(CONTENT.c.layout_sha256)).scalars())
    for run in found:
        own = (*run.inputs.digests(), run.context_sha256, run.result_sha256)
        digests |= dict.fromkeys(digest for digest in own if digest is not None)
    for _, facts in signed_facts(connection):
        digests |= dict.fromkeys((str(facts["before_sha256"]), str(facts["report_sha256"])))
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


def _check_reports(
    folder: Path, sealed: Mapping[Any, Facts], newest: Mapping[str, str]
) -> tuple[int, list[str]]:
    problems = []
    for number, facts in sorted(sealed.items(), key=lambda item: str(item[0])):
        name = str(facts.get("report_name"))
        path = folder / Path(name).name
        try:
            data = path.read_bytes()
        except OSError as error:
            problems.append(f"The report {number} ({name}) cannot be read: {error.strerror or error}.")
            continue
        found = sha256_hex(data)
        if str(number) in newest and found == facts.get("report_sha256"):
            problems.append(f"The report {number} ({name}) lacks the signatures that the ledger has.")
        elif found != newest.get(str(number), facts.get("report_sha256")):
            last = "signed last" if str(number) in newest else "sealed"
            problems.append(f"The report {number} ({name}) is not the one that was {last}.")
    return len(sealed), problems + _unknown_reports(folder, sealed)


def _unknown_reports(folder: Path, sealed: Mapping[Any, Facts]) -> list[str]:
    """Find reports of which the ledger knows nothing: its end was cut, or recording them was interrupted."""
    known = {Path(str(facts.get("report_name"))).name for facts in sealed.values()}
    return [
        f"The report {path.name} is not in the ledger: its end was cut, or a process was stopped before it "
        "recorded the report (then compare the export again)."
        for path in sorted(folder.glob("[0-9][0-9][0-9][0-9]-*.pdf"))
        if path.name not in known
    ]
