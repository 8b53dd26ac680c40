"""`qcreport records withdraw NUMBER`."""

from __future__ import annotations

import argparse
from pathlib import Path

from qcreport.cli.account import account
from qcreport.cli.now import now
from qcreport.cli.run import DONE
from qcreport.pipeline.opened import opened
from qcreport.settings import load_site


def run(arguments: argparse.Namespace) -> int:
    """Record that a report is withdrawn; the report itself stays where and as it is."""
    site = load_site(Path(arguments.site))
    with opened(site, now, workers=1) as work:
        entry = work.records.withdraw(arguments.number, reason=arguments.reason, actor=account())
    print(
        f"{arguments.number} is withdrawn (ledger entry {entry.sequence}). Its file stays as it was sealed."
    )
    print("Tell those who have it. A corrected report names it: qcreport compare EXPORT --replaces NUMBER")
    return DONE
