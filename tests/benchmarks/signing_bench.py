"""Measure signatures: one with a key that is held, and the check of a report that carries three.

    python tests/benchmarks/signing_bench.py [rounds]

Processor time, the median over the rounds; the check is all of `verify` but computing and rendering anew.
Prints one line a goal and exits with 1 where a goal is missed.
"""

from __future__ import annotations

import statistics
import sys
import time
from collections.abc import Callable
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent.parent / "unit"))

from audit.example import attachments, sealed_with
from signing.conftest import LATER
from signing.keys_fixture import NOW, key_of

from qcreport.audit.verify import verify_report
from qcreport.report.stamp import render_stamp
from qcreport.signing.countersign import countersign, free_field

SIGN_MS = 60.0
VERIFY_MS = 1500.0


def milliseconds(work: Callable[[], object], rounds: int) -> float:
    work()
    times = []
    for _ in range(rounds):
        begun = time.process_time()
        work()
        times.append((time.process_time() - begun) * 1e3)
    return statistics.median(times)


def main(rounds: int) -> int:
    service, reviewer, authoriser = key_of("QC reports"), key_of("A. Reviewer"), key_of("B. Authoriser")
    sealed = sealed_with(attachments(service), service)
    place = free_field(sealed, "reviewed")
    stamp = render_stamp(
        "A. Reviewer", "Reviewed", "2026-11-02 07:12 +01:00", place.width_pt, place.height_pt
    )
    first = countersign(sealed, reviewer, role="reviewed", name="A. Reviewer", at=NOW, stamp=stamp)
    both = countersign(first, authoriser, role="authorised", name="B. Authoriser", at=NOW, stamp=stamp)
    roots = tuple(key.certificate for key in (service, reviewer, authoriser))

    def sign() -> object:
        return countersign(sealed, reviewer, role="reviewed", name="A. Reviewer", at=NOW, stamp=stamp)

    def verify() -> object:
        status = verify_report(both, roots=roots, now=LATER, recompute=False)
        if not status.valid or status.trusted is not True:
            raise SystemExit("the report that is measured does not verify")
        return status

    goals = [
        ("a signature with a held P-256 key", milliseconds(sign, rounds), SIGN_MS),
        ("a check of three signatures", milliseconds(verify, rounds), VERIFY_MS),
    ]
    for what, took, goal in goals:
        print(f"{'met   ' if took <= goal else 'missed'} {what}: {took:.0f} ms, at most {goal:.0f}")
    return 0 if all(took <= goal for _, took, goal in goals) else 1


if __name__ == "__main__":
    sys.exit(main(int(sys.argv[1]) if len(sys.argv) > 1 else 9))
