"""The process in which one report is checked: `python -I -m qcreport.audit.child`.

Standard input holds one line of JSON (limits, trust roots as PEM, trusted people, the moment, whether to
compute anew, the laboratory's templates) and then the PDF. Standard output gets one JSON document:
`{"answer": …}`, `{"error": {"kind", "text"}}`, or `{"stopped": "memory"}`.
"""

from __future__ import annotations

import sys
from collections.abc import Iterator, Mapping
from datetime import datetime
from typing import Any

from qcreport.signing.answering import answer_order


def main() -> int:
    """Check the report on standard input and print the answer."""
    return answer_order(_preload, _respond)


def _preload(order: Mapping[str, Any]) -> Iterator[str]:
    yield from ("pikepdf", "qcreport.audit.verify", "qcreport.signing.judge", "qcreport.signing.keys")
    if order["recompute"]:
        yield "qcreport.analysis"


def _respond(order: Mapping[str, Any], pdf: bytes) -> dict[str, Any]:
    from base64 import b64decode

    from qcreport.analysis.context import Signer
    from qcreport.audit.verify import verify_report
    from qcreport.signing.keys import load_certificates

    roots, templates = order["roots"], order["templates"]
    status = verify_report(
        pdf,
        roots=None if roots is None else tuple(load_certificates(r.encode("ascii"))[0] for r in roots),
        now=datetime.fromisoformat(order["now"]),
        recompute=order["recompute"],
        people=tuple(Signer(**{**item, "may": tuple(item["may"])}) for item in order["people"]),
        templates=None if templates is None else {n: b64decode(t) for n, t in templates.items()},
    )
    return status.to_json()


if __name__ == "__main__":
    sys.exit(main())
