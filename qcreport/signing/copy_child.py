"""The process in which a signed copy is looked at: `python -I -m qcreport.signing.copy_child`.

Standard input holds one line of JSON (limits, the moment, the length of the report as filed), then the report
as filed, then the copy. Standard output gets one JSON document.
"""

from __future__ import annotations

import sys
from collections.abc import Mapping
from datetime import datetime
from typing import Any

from qcreport.signing.answering import answer_order


def main() -> int:
    """Look at the copy on standard input and print what it adds."""
    return answer_order(_preload, _respond)


def _preload(order: Mapping[str, Any]) -> tuple[str, ...]:
    return ("qcreport.signing.signed_copy", "qcreport.signing.judge", "qcreport.signing.keys")


def _respond(order: Mapping[str, Any], given: bytes) -> dict[str, Any]:
    from qcreport.signing.signed_copy import added_signature

    length = order["original_bytes"]
    added = added_signature(given[:length], given[length:], at=datetime.fromisoformat(order["now"]))
    return {
        "role": added.role,
        "field": added.field,
        "signer": added.signer,
        "fingerprint_sha256": added.fingerprint_sha256,
        "signed_at": added.signed_at.isoformat(),
        "meaning": added.meaning,
    }


if __name__ == "__main__":
    sys.exit(main())
