"""`qcreport extract REPORT.pdf DIR`."""

from __future__ import annotations

import argparse
from pathlib import Path

from qcreport.audit.extract import extract_report, write_extracted
from qcreport.settings.keys import read_bytes


def run(arguments: argparse.Namespace) -> int:
    """Write the attachments of the sealed revision; nothing is overwritten."""
    files = extract_report(read_bytes(Path(arguments.report), "the report"))
    for path in write_extracted(files, Path(arguments.dir)):
        print(path)
    print("These are the files as sealed. Whether the seal holds says: qcreport verify")
    return 0
