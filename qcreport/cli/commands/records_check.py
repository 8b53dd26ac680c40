"""`qcreport records check`."""

from __future__ import annotations

import argparse
import json
from pathlib import Path

from qcreport.cli.now import now
from qcreport.cli.run import ANSWER_IS_NO, DONE, printable
from qcreport.records.check import check
from qcreport.records.facade import Records
from qcreport.settings import load_site


def run(arguments: argparse.Namespace) -> int:
    """Check chain, numbers, measurements, archive and reports; print what does not hold."""
    site = load_site(Path(arguments.site))
    records = Records.open(site.folders.records, now, archive_folder=site.folders.archive)
    status = check(records, site.folders.reports)
    if arguments.json:
        document = {
            "ok": status.ok,
            "entries": status.n_entries,
            "archived": status.n_archived,
            "reports": status.n_reports,
            "head": {"sequence": status.head.sequence, "hash": status.head.entry_hash},
            "problems": list(status.problems),
        }
        print(json.dumps(document, ensure_ascii=False, indent=1))
        return DONE if status.ok else ANSWER_IS_NO
    print(
        f"{status.n_entries} ledger entries, {status.n_archived} archived files, "
        f"{status.n_reports} reports; head {status.head.sequence} {status.head.entry_hash[:16]}"
    )
    for problem in status.problems:
        print(printable(problem))
    print("Everything holds together." if status.ok else f"{len(status.problems)} problems found.")
    return DONE if status.ok else ANSWER_IS_NO
