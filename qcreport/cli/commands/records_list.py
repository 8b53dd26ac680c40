"""`qcreport records list`."""

from __future__ import annotations

import argparse
import json
from pathlib import Path

from qcreport.cli.now import now
from qcreport.cli.period import day_begins, day_ends
from qcreport.cli.run import printable
from qcreport.records.facade import Records
from qcreport.records.listing import EVERYTHING, OpenRefusal, ReportRow, Wanted
from qcreport.settings import Site, load_site


def run(arguments: argparse.Namespace) -> int:
    """Print one line a report, then, where nothing is filtered, the refusals nobody has mended yet."""
    site = load_site(Path(arguments.site))
    wanted = _wanted(arguments, site)
    records = Records.open(site.folders.records, now, archive_folder=site.folders.archive)
    reports = records.reports(wanted)
    refusals = records.open_refusals() if wanted == EVERYTHING else ()
    if arguments.json:
        document = {"reports": [_json(r) for r in reports], "refused": [_refusal_json(r) for r in refusals]}
        print(json.dumps(document, ensure_ascii=False, indent=1))
        return 0
    if not reports and not refusals:
        print("No report yet." if wanted == EVERYTHING else "No report fits.")
    for row in reports:
        print(printable(_line(row)))
    for refusal in refusals:
        print(printable(f"refused    {refusal.name}  {refusal.code}  {refusal.folder}"))
    return 0


def _wanted(arguments: argparse.Namespace, site: Site) -> Wanted:
    return Wanted(
        since=None if arguments.since is None else day_begins(arguments.since, site.time_zone),
        until=None if arguments.until is None else day_ends(arguments.until, site.time_zone),
        line=arguments.line or "",
        batch=arguments.batch or "",
        characteristic=arguments.characteristic or "",
        answer=arguments.answer or "",
        state=arguments.state or "",
    )


def _line(row: ReportRow) -> str:
    answers = ", ".join(f"{name}: {code}" for name, code in row.answers) or "-"
    line = f"{row.number}  {row.state}  {row.export_name}  {row.plan_name}  {answers}"
    more = [f"run {row.k} of {row.n}"] if row.n > 1 else []
    if row.left_out:
        more.append(f"left out {', '.join(row.left_out)}")
    if row.replaces:
        more.append(f"replaces {row.replaces}")
    if row.replaced_by:
        more.append(f"replaced by {row.replaced_by}")
    return f"{line}  ({'; '.join(more)})" if more else line


def _json(row: ReportRow) -> dict[str, object]:
    return {
        "number": row.number,
        "received_at": row.received_at,
        "export": {"name": row.export_name, "sha256": row.export_sha256},
        "plan": row.plan_name,
        "run": {"k": row.k, "n": row.n, "reason": row.reason},
        "answers": [{"characteristic": name, "answer": code} for name, code in row.answers],
        "state": str(row.state),
        "state_reason": row.state_reason,
        "report": row.report_name,
        "sealed_at": row.sealed_at,
        "left_out": list(row.left_out),
        "replaces": row.replaces or None,
        "replaced_by": row.replaced_by or None,
    }


def _refusal_json(row: OpenRefusal) -> dict[str, object]:
    return {
        "name": row.name,
        "plan": row.plan_name,
        "code": row.code,
        "text": row.text,
        "folder": row.folder,
        "refused_at": row.refused_at,
    }
