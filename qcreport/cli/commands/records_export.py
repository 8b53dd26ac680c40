"""`qcreport records export --from DAY --to DAY DIR`."""

from __future__ import annotations

import argparse
from pathlib import Path

from qcreport.cli.now import now
from qcreport.cli.period import day_begins, day_ends
from qcreport.cli.run import ANSWER_IS_NO, DONE, printable
from qcreport.errors import UsageError
from qcreport.records.export import Period, export_period
from qcreport.records.export_page import PAGE_NAME
from qcreport.records.facade import Records
from qcreport.settings import load_site


def run(arguments: argparse.Namespace) -> int:
    """Write a period as one folder for an auditor; days are those of the site's zone, both included."""
    site = load_site(Path(arguments.site))
    period = Period(
        since=day_begins(arguments.since, site.time_zone), until=day_ends(arguments.until, site.time_zone)
    )
    if period.since >= period.until:
        raise UsageError(f"--from {arguments.since} is after --to {arguments.until}.")
    records = Records.open(site.folders.records, now, archive_folder=site.folders.archive)
    target = Path(arguments.dir)
    found = export_period(records, site.folders.reports, target, period, laboratory=site.laboratory.name)
    print(
        f"{found.n_reports} reports, {found.n_originals} exports, {found.n_entries} ledger entries: {target}"
    )
    if found.signed_up_to:
        print(f"The ledger is signed up to its entry {found.signed_up_to}, the last one of this export.")
    else:
        print("No signed checkpoint covers this period.")
    for problem in found.problems:
        print(printable(problem))
    print(f"Next: give the whole folder to the auditor; {PAGE_NAME} in it says how to check it.")
    return ANSWER_IS_NO if found.problems else DONE
