"""`qcreport records list`."""

from __future__ import annotations

import argparse
import json
from pathlib import Path

from qcreport.cli.now import now
from qcreport.cli.run import printable
from qcreport.records.facade import Records
from qcreport.records.listing import OpenRefusal, ReportRow
from qcreport.settings import load_site


def run(arguments: argparse.Namespace) -> int:
    """Print one line a report, then the refusals nobody has mended yet."""
    site = load_site(Path(arguments.site))
    records = Records.open(site.folders.records, now, archive_folder=site.folders.archive)
    reports, refusals = records.reports(), records.open_refusals()
    if arguments.json:
        document = {"reports": [_json(r) for r in reports], "refused": [_refusal_json(r) for r in refusals]}
        print(json.dumps(document, ensure_ascii=False, indent=1))
        return 0
    if not reports and not refusals:
        print("No report yet.")
    for row in reports:
        answers = ", ".join(f"{name}: {code}" for name, code in row.answers) or "-"
        print(printable(f"{row.number}  {row.state}  {row.export_name}  {row.plan_name}  {answers}"))
    for refusal in refusals:
        print(printable(f"refused    {refusal.name}  {refusal.code}  {refusal.folder}"))
    return 0


def _json(row: ReportRow) -> dict[str, object]:
    return {
        "number": row.number,
        "received_at": row.received_at,
        "export": {"name": row.export_name, "sha256": row.export_sha256},
        "plan": row.plan_name,
        "run": {"k": row.k, "n": row.n, "reason": row.reason},
        "answers": [{"characteristic": name, "answer": code} for name, code in row.answers],
        "state": str(row.state),
        "report": row.report_name,
        "sealed_at": row.sealed_at,
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
