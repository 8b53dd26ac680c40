"""How long listing and checking take with 10,000 reports and 1,000,000 measurements in the store.

Run: python tests/benchmarks/records_bench.py [REPORTS MEASUREMENTS]. The store is made in a temporary folder
first (some minutes), then each question is asked in a fresh process, which tells its time and its memory.
"""

from __future__ import annotations

import datetime as dt
import json
import subprocess
import sys
import tempfile
import time
from pathlib import Path

from sqlalchemy import Connection, insert

from qcreport.canonical import sha256_hex
from qcreport.records import ledger
from qcreport.records.chain import Kind
from qcreport.records.facade import Records
from qcreport.records.run import RunInputs, run_key
from qcreport.records.tables import EXPORT, MEASUREMENT, REFUSAL, RUN, RUN_GROUP

NOW = "2026-11-02T06:12:00Z"
QUESTIONS = {
    "list, all reports": ("records.reports()", 1.0),
    "list, one batch": ("records.reports(Wanted(batch='B77'))", 1.0),
    "open refusals": ("records.open_refusals()", 1.0),
    "check of the chain": ("chain(records)", 10.0),
    "an export of 600 values against the store": ("records.survey(export())", 2.0),
}
"""Each question, how it is asked, and the seconds it may take."""
_ASK = """
import datetime, json, pathlib, resource, sys, time
from qcreport.measurements import CellRef, Measurement, MeasurementSet
from qcreport.records import ledger
from qcreport.records.chain_walk import walk_chain
from qcreport.records.facade import Records
from qcreport.records.listing import Wanted

def chain(records):
    with records.database.read() as connection:
        walked = walk_chain(lambda: ledger.entries(connection))
    assert walked.problems == (), walked.problems
    return walked.n_entries

def export():
    return MeasurementSet(export_name="x", export_sha256="f" * 64, layout_name="rig", measurements=tuple(
        Measurement(characteristic="c", batch=f"B{i % 6}", line=None, sample=f"s{i}", reading=None, value=1.0,
            text="1.0", decimals=1, unit="u", censored=None, status=None, time=None,
            cell=CellRef(sheet="S", row=i + 2, column=1)) for i in range(600)))

records = Records.open(pathlib.Path(sys.argv[1]), lambda: datetime.datetime.now(datetime.UTC))
before = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
started = time.perf_counter()
eval(sys.argv[2])
print(json.dumps({"seconds": time.perf_counter() - started,
    "mib_more": (resource.getrusage(resource.RUSAGE_SELF).ru_maxrss - before) / 1024}))
"""


def digest(text: str) -> str:
    return sha256_hex(text.encode())


def fill(records: Records, reports: int, measurements: int) -> None:
    """Write rows of the form that reports leave, many in one transaction."""
    each = measurements // reports
    with records.database.write() as connection:
        for place in range(reports):
            _report(connection, place, each)
        for place in range(100):
            _refused(connection, place)


def _report(connection: Connection, place: int, each: int) -> None:
    export, number = digest(f"export {place}"), f"2026-{place + 1:04d}"
    inputs = RunInputs(
        export_sha256=export,
        plan_sha256=digest("plan"),
        layout_sha256=digest("layout"),
        rules_sha256=digest("rules"),
        templates=(("footer.html", digest("t")),),
    )
    name = f"lap-shear-{place}.xlsx"
    connection.execute(insert(EXPORT).values(sha256=export, name=name, size=9000, received_at=NOW))
    head = ledger.head(connection)
    plain = {"claim": str(place), "name": name, "export_sha256": export}
    for kind in (Kind.RECEIVED, Kind.READ, Kind.COMPARED, Kind.SEALED):
        facts = plain | {"plan": "p", "number": number, "inputs": inputs.to_json(), "measurements": each}
        ledger.append(connection, at=NOW, actor="service", kind=kind, facts=facts)
    connection.execute(
        insert(RUN).values(
            number=number,
            year=2026,
            serial=place + 1,
            run_key=run_key(inputs),
            export_sha256=export,
            export_name=name,
            plan_name="p",
            inputs=json.dumps(inputs.to_json()),
            k=1,
            reason="",
            made_at=NOW,
            ledger_sequence=head.sequence,
            ledger_hash=head.entry_hash,
            context_sha256=digest("context"),
            result_sha256=digest("result"),
            answers='[["c","matters"]]',
            report_name=f"{number} x.pdf",
            report_sha256=digest(number),
            sealed_at=NOW,
        )
    )
    connection.execute(
        insert(RUN_GROUP).values(number=number, characteristic="c", line="", batch=f"B{place}")
    )
    row = {"version": 1, "layout": "rig", "line": None, "batch": f"B{place}", "reading": None}
    row |= {"characteristic": "c", "value": 1.0, "text": "1.0", "decimals": 1, "unit": "u", "censored": None}
    row |= {"status": None, "time": None, "marks": "[]", "factors": "[]", "export_sha256": export}
    row |= {"number": number, "recorded_at": NOW}
    rows = [
        row | {"identity": digest(f"{place} {i}"), "sample": f"s{i}", "cell": f"Results!E{i + 2}"}
        for i in range(each)
    ]
    connection.execute(insert(MEASUREMENT), rows)


def _refused(connection: Connection, place: int) -> None:
    facts = {"name": f"bad-{place}.xlsx", "code": "damaged_or_incomplete"}
    entry = ledger.append(connection, at=NOW, actor="service", kind=Kind.REFUSED, facts=facts)
    row = {"sequence": entry.sequence, "name": facts["name"], "plan": "", "code": facts["code"]}
    connection.execute(insert(REFUSAL).values(row | {"text": "x", "folder": "f", "refused_at": NOW}))


def main(reports: int, measurements: int) -> int:
    """Make the store, ask every question, and return 1 where one took too long."""
    late = 0
    with tempfile.TemporaryDirectory() as folder:
        root = Path(folder) / "records"
        started = time.perf_counter()
        fill(Records.open(root, lambda: dt.datetime.now(dt.UTC)), reports, measurements)
        size = (root / "records.sqlite3").stat().st_size / 2**20
        spent = time.perf_counter() - started
        print(f"{reports} reports, {measurements} measurements: {size:.0f} MiB, made in {spent:.0f} s")
        for question, (asked, most) in QUESTIONS.items():
            ran = subprocess.run(
                [sys.executable, "-c", _ASK, str(root), asked], capture_output=True, text=True, check=True
            )
            found = json.loads(ran.stdout)
            late += found["seconds"] > most
            verdict = "late" if found["seconds"] > most else "in time"
            spent, more = found["seconds"], found["mib_more"]
            print(f"{question:<44}{spent:7.2f} s of {most:4.1f}  +{more:5.1f} MiB  {verdict}", flush=True)
    return 1 if late else 0


if __name__ == "__main__":
    sys.exit(main(*(int(text) for text in sys.argv[1:] or ("10000", "1000000"))))
