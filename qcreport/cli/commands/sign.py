"""`qcreport sign [REPORT …]`."""

from __future__ import annotations

import argparse
import json
import re
from pathlib import Path

from qcreport.canonical import in_groups_of_eight, sha256_hex
from qcreport.cli.account import account
from qcreport.cli.now import now
from qcreport.cli.person_key import key_file, open_key
from qcreport.cli.run import ANSWER_IS_NO, DONE, print_error, printable
from qcreport.cli.words import answer_lines
from qcreport.errors import NotOurReportError, SigningDeniedError, UsageError
from qcreport.issuing.sign import sign_report
from qcreport.issuing.signing import Filed, SigningDesk
from qcreport.records.facade import Records
from qcreport.records.listing import ReportRow
from qcreport.settings import Site, load_site
from qcreport.settings.files import settings_files
from qcreport.settings.keys import read_bytes
from qcreport.settings.people import load_people

_NUMBER = re.compile(r"\d{4}-\d{4,}")


def run(arguments: argparse.Namespace) -> int:
    """Sign or return reports; without any, list what waits for a signature."""
    site = load_site(Path(arguments.site))
    records = Records.open(site.folders.records, now, archive_folder=site.folders.archive)
    desk = SigningDesk(
        records=records, reports=site.folders.reports, people=load_people(site.root), clock=now
    )
    desk.settle()
    if not arguments.reports:
        return _list(desk, arguments)
    if arguments.returned == (arguments.role is not None):
        raise UsageError("Say either --as reviewed, --as authorised, or --return --reason TEXT.")
    numbers = [_number(records, named) for named in dict.fromkeys(arguments.reports)]
    records.settings_seen(settings_files(site), actor=account())
    try:
        if arguments.returned:
            return _return(records, desk, numbers, arguments)
        return _sign(site, records, desk, numbers, arguments)
    except SigningDeniedError as error:  # a person's key or right: the answer is no
        print_error(error, arguments)
        return ANSWER_IS_NO


def _list(desk: SigningDesk, arguments: argparse.Namespace) -> int:
    if arguments.role is not None or arguments.returned:
        raise UsageError("Name a report. Those that wait: qcreport sign")
    waiting = desk.waiting()
    if arguments.json:
        rows = [{"number": w.number, "export": w.export_name, "missing": list(w.missing)} for w in waiting]
        print(json.dumps({"waiting": rows}, ensure_ascii=False, indent=1))
        return DONE
    for row in waiting:
        print(printable(f"{row.number}  not yet {' and not yet '.join(row.missing)}  {row.export_name}"))
    if not waiting:
        print("No report waits for a signature.")
    else:
        print(f"Next: qcreport sign {waiting[0].number} --as {waiting[0].missing[0]} --key FILE")
    return DONE


def _number(records: Records, named: str) -> str:
    """Return the number of a report that was named by it or by its file."""
    if _NUMBER.fullmatch(named):
        return named
    number = records.number_of_version(sha256_hex(read_bytes(Path(named), "the report")))
    if number is None:
        raise NotOurReportError(
            f"{named} is no report of this site as it was recorded. Name the report by its number."
        )
    return number


def _sign(
    site: Site, records: Records, desk: SigningDesk, numbers: list[str], arguments: argparse.Namespace
) -> int:
    """Sign each; the passphrase is asked for anew at every one, after its answers were shown."""
    path = None
    filed: list[Filed] = []
    for number in numbers:
        if not arguments.json:
            print("\n".join(_shown(records, desk, number)), flush=True)
        path = key_file(arguments.key) if path is None else path
        moment = now()
        key = open_key(path, arguments.passphrase_file, moment)
        signed = sign_report(
            desk,
            number,
            key,
            role=arguments.role,
            at=moment,
            time_zone=site.time_zone,
            location=site.seal.location,
        )
        filed.append(signed)
        if not arguments.json:
            print("\n".join(_signed_lines(signed, desk)), flush=True)
    if arguments.json:
        print(json.dumps({"signed": [_json(f) for f in filed]}, ensure_ascii=False, indent=1))
    return DONE


def _shown(records: Records, desk: SigningDesk, number: str) -> list[str]:
    """Return what a person signs: the answers, what was left out, which run this is, who signed before."""
    run = records.require_open(number)
    row = next(r for r in records.reports() if r.number == number)
    path, _ = desk.current(number)
    lines = [f"Report {number}, run {row.k} of {row.n} over these data"]
    if run.result_sha256 is not None:
        lines += answer_lines(json.loads(records.archive.read(run.result_sha256)))
    lines += [printable(line) for line in _circumstances(row)]
    for version in records.versions_of(number):
        if version.signature is not None:
            lines.append(printable(f"  {version.signature.role} by {version.signature.name}"))
    lines.append(f"  {path}")
    return lines


def _circumstances(row: ReportRow) -> list[str]:
    lines = [f"  left out by a person: {', '.join(row.left_out)}"] if row.left_out else []
    if row.reason:
        lines.append(f"  why it was run: {row.reason}")
    if row.replaces:
        lines.append(f"  replaces {row.replaces}")
    return lines


def _signed_lines(filed: Filed, desk: SigningDesk) -> list[str]:
    lines = [
        printable(f"Signed as {filed.role} by {filed.person.name}, ledger entry {filed.entry.sequence}."),
        f"Certificate:  {in_groups_of_eight(filed.person.certificate_sha256)} (SHA-256)",
    ]
    if filed.issued:
        lines.append(f"{filed.number} is issued.")
    else:
        missing = desk.missing(filed.number)
        lines.append(f"Next: somebody else signs it as {missing[0]}; until then it is a draft.")
    return lines


def _json(filed: Filed) -> dict[str, object]:
    return {
        "number": filed.number,
        "report": str(filed.path),
        "as": filed.role,
        "name": filed.person.name,
        "fingerprint_sha256": filed.person.certificate_sha256,
        "issued": filed.issued,
        "ledger_entry": filed.entry.sequence,
    }


def _return(records: Records, desk: SigningDesk, numbers: list[str], arguments: argparse.Namespace) -> int:
    """Record that reports are returned; in a person's name where a key is given, else in the account's."""
    actor, fingerprint = account(), ""
    if arguments.key is not None:
        key = open_key(Path(arguments.key), arguments.passphrase_file, now())
        actor, fingerprint = desk.person_of(key.fingerprint_sha256).name, key.fingerprint_sha256
    for number in numbers:
        entry = records.return_report(
            number, reason=arguments.reason or "", actor=actor, fingerprint_sha256=fingerprint
        )
        if not arguments.json:
            print(printable(f"{number} is returned (ledger entry {entry.sequence}): {arguments.reason}"))
    if arguments.json:
        print(json.dumps({"returned": numbers}, indent=1))
    else:
        print('Next: qcreport compare EXPORT --replaces NUMBER --reason "…"')
    return DONE
