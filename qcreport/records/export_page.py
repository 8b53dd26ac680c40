"""The page that goes with an exported period: how to check it without the site and without our software."""

from __future__ import annotations

PAGE_NAME = "HOW-TO-CHECK.txt"
SCRIPT_BEGINS = "----- check.py -----"
SCRIPT_ENDS = "----- end -----"

_SCRIPT = """\
import hashlib, json
before = last = None
for line in open("ledger.jsonl", encoding="utf-8"):
    entry = json.loads(line)
    last = entry.pop("entry_hash")
    text = json.dumps(entry, sort_keys=True, separators=(",", ":"), ensure_ascii=False)
    found = hashlib.sha256(b"qcreport/ledger-entry/1\\n" + text.encode("utf-8")).hexdigest()
    assert found == last, f"entry {entry['sequence']} was changed"
    assert before in (None, entry["previous_hash"]), f"before entry {entry['sequence']} something is missing"
    before = last
print("The chain holds up to entry", entry["sequence"], last)
try:
    signed = json.load(open("checkpoint.json", encoding="utf-8"))
except FileNotFoundError:
    print("No signed checkpoint comes with this export.")
else:
    assert (signed["sequence"], signed["entry_hash"]) == (entry["sequence"], last), "the end was cut"
    print("The signed checkpoint names this very entry.")
"""

_PAGE = """\
How to check this export
========================

{laboratory}: reports sealed from {since} until {until} (UTC), with what they were made from.

  reports/         the sealed reports, as they were published
  originals/       the exports, byte for byte as they came in; the name begins with their SHA-256
  ledger.jsonl     what was recorded in this time, one entry a line{up_to}
  checkpoint.*     the ledger's end, signed by the laboratory's service key
  service.crt      that key's certificate; compare its fingerprint with the one the laboratory publishes
  summary.csv      one line a report: number, export, answers, run k of n, state, what was left out
  summary.json     the same with the refusals of this time

1. Nothing was changed since this folder was written:

     sha256sum --check SHA256SUMS

2. No entry of the ledger was changed, dropped, swapped or inserted. Save the lines between the marks below as
   check.py in this folder and run: python3 check.py

3. The end of the ledger was not cut. The signature must be good, and check.py must say that the checkpoint
   names the last entry:

     openssl x509 -in service.crt -noout -fingerprint -sha256
     openssl x509 -in service.crt -noout -pubkey > service.pub
     openssl dgst -sha256 -verify service.pub -signature checkpoint.sig checkpoint.json

4. A report is the one that was recorded: its SHA-256 stands in the ledger as "report_sha256" of the entry of
   kind "sealed" with its number; so does the export's as "export_sha256".

5. The seal of a report holds: open it in any PDF reader that shows signatures, or run: pdfsig REPORT.pdf
   The last pages of each report say how its numbers can be redone.

6. Later entries about these reports (signed, withdrawn, replaced) are not in this export; the state in the
   summary is that of the day of the export.

{begins}
{script}{ends}
"""


def how_to_check(*, laboratory: str, since: str, until: str, more: bool) -> str:
    """Return the page; `more` where entries after the period lead up to the checkpoint."""
    up_to = ",\n                   and on to the entry that the checkpoint names" if more else ""
    return _PAGE.format(
        laboratory=laboratory,
        since=since,
        until=until,
        up_to=up_to,
        begins=SCRIPT_BEGINS,
        script=_SCRIPT,
        ends=SCRIPT_ENDS,
    )
