"""A period of the records as one folder that an auditor can check alone."""

from __future__ import annotations

import csv
import io
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from pathlib import Path

from qcreport.canonical import sha256_hex, to_json_bytes, to_readable_json_bytes
from qcreport.durable import make_folder, write_durably
from qcreport.errors import LedgerError, QcReportError, UsageError
from qcreport.records import ledger, listing
from qcreport.records.chain import Entry, Kind
from qcreport.records.checkpoints import FILE_NAME, Checkpoint, checkpoints
from qcreport.records.export_page import PAGE_NAME, how_to_check
from qcreport.records.facts import clean_text
from qcreport.records.listing import ReportRow
from qcreport.records.lookups import Lookups

SUMS_NAME = "SHA256SUMS"
_LONGEST_NAME = 120
_COLUMNS = (
    "number",
    "sealed (UTC)",
    "export",
    "SHA-256",
    "plan",
    "run",
    "of",
    "reason",
    "answers",
    "state",
    "left out",
    "replaces",
    "replaced by",
    "file",
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Period:
    """From when until when, as UTC texts of the records."""

    since: str
    """Entries of this time or later."""
    until: str
    """Entries before this time."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Exported:
    """What was written."""

    n_reports: int
    """Reports sealed in the period."""
    n_originals: int
    """Exports."""
    n_entries: int
    """Ledger entries."""
    signed_up_to: int
    """Entry that the checkpoint names; 0 where there is none."""
    problems: tuple[str, ...]
    """What should have been there and is not as recorded."""


def export_period(
    records: Lookups, reports_folder: Path, target: Path, period: Period, *, laboratory: str
) -> Exported:
    """Write reports, originals, ledger slice and summary of a period into a new or empty folder.

    Raises
    ------
    UsageError
        Where the folder holds something already.
    EnvironmentFailedError
        Where the disk refuses.
    """
    if target.exists() and (not target.is_dir() or any(target.iterdir())):
        raise UsageError(f"{target} is there already and not empty. Name a new folder.", file=str(target))
    with records.database.read() as connection:
        in_period = tuple(ledger.entries(connection, since=period.since, until=period.until))
        last = in_period[-1].sequence if in_period else 0
        checkpoint = _covering(records.database.path.parent / FILE_NAME, last)
        until = last if checkpoint is None else checkpoint.head.sequence
        after = (
            tuple(e for e in ledger.entries(connection, after=last) if e.sequence <= until) if last else ()
        )
        rows = tuple(r for r in listing.reports(connection) if _within(r.sealed_at, period))
    folder = _Folder(target)
    folder.write_all("ledger.jsonl", (_line(e) for e in (*in_period, *after)))
    if checkpoint is not None:
        folder.write("checkpoint.json", checkpoint.document)
        folder.write("checkpoint.sig", checkpoint.signature)
        folder.write("service.crt", checkpoint.certificate_pem)
    problems = _copy_reports(folder, reports_folder, rows, in_period)
    originals = _originals(in_period, rows)
    problems += _copy_originals(folder, records.archive.read, originals)
    folder.write("summary.csv", _csv(rows))
    folder.write("summary.json", to_readable_json_bytes(_summary(rows, in_period)))
    page = how_to_check(laboratory=laboratory, since=period.since, until=period.until, more=bool(after))
    folder.write(PAGE_NAME, page.encode("utf-8"))
    folder.write_sums()
    return Exported(
        n_reports=len(rows),
        n_originals=len(originals),
        n_entries=len(in_period) + len(after),
        signed_up_to=0 if checkpoint is None else checkpoint.head.sequence,
        problems=tuple(problems),
    )


class _Folder:
    """Writes files and remembers their digests."""

    def __init__(self, root: Path) -> None:
        self._root = root
        self._sums: dict[str, str] = {}
        make_folder(root)

    def write(self, name: str, data: bytes) -> None:
        path = self._root / name
        make_folder(path.parent)
        write_durably(path, data)
        self._sums[name] = sha256_hex(data)

    def write_all(self, name: str, pieces: Iterable[bytes]) -> None:
        self.write(name, b"".join(pieces))

    def write_sums(self) -> None:
        lines = [f"{digest}  {name}\n" for name, digest in sorted(self._sums.items())]
        write_durably(self._root / SUMS_NAME, "".join(lines).encode("utf-8"))


def _covering(path: Path, last: int) -> Checkpoint | None:
    """Return the first checkpoint of an entry at or after the last one of the period."""
    try:
        return next((c for c in checkpoints(path) if c.head.sequence >= last > 0), None)
    except ValueError as error:
        raise LedgerError(f"The checkpoints cannot be read: {error}. See: qcreport records check") from None


def _within(moment: str | None, period: Period) -> bool:
    return moment is not None and period.since <= moment < period.until


def _line(entry: Entry) -> bytes:
    document = {
        "sequence": entry.sequence,
        "at": entry.at,
        "actor": entry.actor,
        "kind": entry.kind,
        "facts": entry.facts_object(),
        "previous_hash": entry.previous_hash,
        "entry_hash": entry.entry_hash,
    }
    return to_json_bytes(document) + b"\n"


def _copy_reports(
    folder: _Folder, reports: Path, rows: Sequence[ReportRow], entries: Iterable[Entry]
) -> list[str]:
    recorded = {
        str(facts.get("number")): facts.get("report_sha256")
        for facts in (e.facts_object() for e in entries if e.kind == Kind.SEALED)
    }
    problems = []
    for row in rows:
        name = Path(row.report_name or "").name
        try:
            data = (reports / name).read_bytes()
        except OSError as error:
            problems.append(f"The report {row.number} cannot be read: {error.strerror or error}.")
            continue
        if sha256_hex(data) != recorded.get(row.number):
            problems.append(f"The report {row.number} is not the one that was sealed; it was not exported.")
            continue
        folder.write(f"reports/{name}", data)
    return problems


def _originals(entries: Iterable[Entry], rows: Iterable[ReportRow]) -> dict[str, str]:
    """Return digest and name of every export that came in or was reported in the period."""
    found = {row.export_sha256: row.export_name for row in rows}
    for entry in entries:
        if entry.kind in (Kind.RECEIVED, Kind.IMPORTED):
            facts = entry.facts_object()
            found.setdefault(str(facts["export_sha256"]), str(facts["name"]))
    return found


def _copy_originals(folder: _Folder, read: Callable[[str], bytes], originals: dict[str, str]) -> list[str]:
    problems = []
    for digest, name in sorted(originals.items()):
        safe = "".join(c if c.isalnum() or c in " ._-" else "_" for c in clean_text(name))[-_LONGEST_NAME:]
        try:
            folder.write(f"originals/{digest[:16]} {safe}", read(digest))
        except QcReportError as error:
            problems.append(error.text)
    return problems


def _csv(rows: Iterable[ReportRow]) -> bytes:
    stream = io.StringIO()
    table = csv.writer(stream, lineterminator="\r\n")
    table.writerow(_COLUMNS)
    for r in rows:
        answers = "; ".join(f"{name}: {code}" for name, code in r.answers)
        told = (r.number, r.sealed_at or "", r.export_name, r.export_sha256, r.plan_name, str(r.k), str(r.n))
        more = (r.reason, answers, str(r.state), "; ".join(r.left_out), r.replaces, r.replaced_by)
        table.writerow([_plain(text) for text in (*told, *more, r.report_name or "")])
    return stream.getvalue().encode("utf-8-sig")


def _plain(text: str) -> str:
    """Return text that a spreadsheet does not take for a formula."""
    return f"'{text}" if text.startswith(("=", "+", "-", "@", "\t", "\r")) else text


def _summary(rows: Iterable[ReportRow], entries: Iterable[Entry]) -> dict[str, object]:
    refused = [e for e in entries if e.kind == Kind.REFUSED]
    return {
        "reports": [
            {
                "number": r.number,
                "sealed_at": r.sealed_at,
                "export": {"name": r.export_name, "sha256": r.export_sha256},
                "plan": r.plan_name,
                "run": {"k": r.k, "n": r.n, "reason": r.reason},
                "answers": [{"characteristic": name, "answer": code} for name, code in r.answers],
                "state": str(r.state),
                "state_reason": r.state_reason,
                "left_out": list(r.left_out),
                "replaces": r.replaces or None,
                "replaced_by": r.replaced_by or None,
                "file": r.report_name,
            }
            for r in rows
        ],
        "refused": [{"at": e.at, **e.facts_object()} for e in refused],
    }
