"""`qcreport watch [--once]`."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path

from qcreport.cli.now import now
from qcreport.cli.tell import TerminalAudience
from qcreport.pipeline.opened import opened
from qcreport.service.serve import serve
from qcreport.settings import load_plans, load_site


def run(arguments: argparse.Namespace) -> int:
    """Serve the inbox; done also when files were refused."""
    site = load_site(Path(arguments.site))
    load_plans(site)  # a faulty plan is told at once, not at the first export
    with opened(site, now, workers=site.workers) as work:
        if not arguments.once:
            print(f"Watching {site.folders.inbox}; stop with Ctrl-C.", file=sys.stderr, flush=True)
        counts = serve(work, now, TerminalAudience(), once=arguments.once)
    print(f"{counts.done} done, {counts.refused} refused, {counts.failed} failed.")
    return 0
