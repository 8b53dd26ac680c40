"""The process in which one report is checked: `python -I -m qcreport.audit.child`.

Standard input holds one line of JSON (limits, trust roots as PEM, the moment, whether to compute anew) and
then the PDF. Standard output gets one JSON document: `{"verdict": …}`, `{"error": {"kind", "text"}}`, or
`{"stopped": "memory"}`.
"""

from __future__ import annotations

import importlib
import json
import sys
from datetime import datetime
from typing import Any

from qcreport.audit.limits import apply_limits
from qcreport.errors import QcReportError


def main() -> int:
    """Check the report on standard input and print the answer."""
    order = json.loads(sys.stdin.buffer.readline())
    _preload(order["recompute"])
    apply_limits(order["memory_bytes"], order["cpu_s"])
    try:
        answer = _answer(order, sys.stdin.buffer.read())
    except MemoryError:
        answer = {"stopped": "memory"}
    except QcReportError as error:
        answer = {"error": {"kind": error.kind, "text": error.text}}
    sys.stdout.write(json.dumps(answer, allow_nan=False) + "\n")
    return 0


def _preload(recompute: bool) -> None:
    """Import our own libraries before the limits count: only what the file needs may exceed them."""
    names = ["pikepdf", "qcreport.audit.verify", "qcreport.signing.judge", "qcreport.signing.keys"]
    if recompute:
        names.append("qcreport.analysis")
    for name in names:
        importlib.import_module(name)


def _answer(order: dict[str, Any], pdf: bytes) -> dict[str, Any]:
    from qcreport.audit.verify import verify_report
    from qcreport.signing.keys import load_certificates

    roots = order["roots"]
    status = verify_report(
        pdf,
        roots=None if roots is None else tuple(load_certificates(r.encode("ascii"))[0] for r in roots),
        now=datetime.fromisoformat(order["now"]),
        recompute=order["recompute"],
    )
    return {"verdict": status.to_json()}


if __name__ == "__main__":
    sys.exit(main())
