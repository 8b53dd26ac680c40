"""The command line: parse, call, print, exit code; no logic of its own."""

from __future__ import annotations

import sys
from collections.abc import Sequence


def main(argv: Sequence[str] | None = None) -> int:
    """Run one command and return its exit code."""
    from qcreport.cli.run import run

    return run(list(sys.argv[1:] if argv is None else argv))
