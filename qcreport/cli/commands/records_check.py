"""`qcreport records check`."""

from __future__ import annotations

import argparse
import json
from pathlib import Path

from qcreport.cli.now import now
from qcreport.cli.run import ANSWER_IS_NO, DONE, printable
from qcreport.errors import SigningDeniedError, UsageError
from qcreport.measurements import MeasurementSet
from qcreport.pipeline.checkpoint import checkpoint_signer
from qcreport.records.check import CheckOptions, RecordsStatus, check
from qcreport.records.check_checkpoints import Trust
from qcreport.records.check_values import Reread
from qcreport.records.facade import Records
from qcreport.settings import Site, load_site
from qcreport.settings.keys import read_bytes
from qcreport.signing.keys import fingerprint, load_certificates
from qcreport.workbook.read_in_child import read_in_child


def run(arguments: argparse.Namespace) -> int:
    """Check chain, checkpoints, measurements, archive and reports; print what does not hold."""
    site = load_site(Path(arguments.site))
    records = Records.open(site.folders.records, now, archive_folder=site.folders.archive)
    status = check(records, site.folders.reports, _options(arguments, site))
    if arguments.json:
        print(json.dumps(_json(status), ensure_ascii=False, indent=1))
    else:
        print("\n".join(_lines(status)))
    return DONE if status.ok else ANSWER_IS_NO


def _options(arguments: argparse.Namespace, site: Site) -> CheckOptions:
    files = tuple(Path(name) for name in arguments.checkpoint or ())
    for file in files:
        read_bytes(file, "the checkpoint")
    return CheckOptions(
        trust=Trust(signer=checkpoint_signer, fingerprints=_site_keys(site)),
        checkpoint_files=files,
        reread=None if arguments.reread is None else _reread(arguments.reread, site),
    )


def _reread(text: str, site: Site) -> Reread:
    if text != "all" and not text.isascii():
        raise _no_number(text)
    if text != "all" and (not text.isdigit() or int(text) < 1):
        raise _no_number(text)

    def read(export: bytes, name: str, layout: bytes) -> MeasurementSet:
        return read_in_child(
            export, name=name, layout_bytes=layout, layout_file="layout.toml", limits=site.limits
        )

    return Reread(read=read, most=None if text == "all" else int(text))


def _no_number(text: str) -> UsageError:
    return UsageError(f"--reread takes a number of exports or all, not {text!r}.")


def _site_keys(site: Site) -> frozenset[str]:
    """Return the fingerprints of the certificates in the site's keys, present and earlier ones."""
    found = set()
    for path in sorted(site.folders.keys.glob("*.crt")):
        try:
            found |= {fingerprint(c) for c in load_certificates(read_bytes(path, "the certificate"))}
        except SigningDeniedError:
            continue
    return frozenset(found)


def _json(status: RecordsStatus) -> dict[str, object]:
    return {
        "ok": status.ok,
        "entries": status.n_entries,
        "archived": status.n_archived,
        "reports": status.n_reports,
        "head": {"sequence": status.head.sequence, "hash": status.head.entry_hash},
        "signed_up_to": status.covered,
        "reread": status.n_reread,
        "problems": list(status.problems),
    }


def _lines(status: RecordsStatus) -> list[str]:
    lines = [
        f"{status.n_entries} ledger entries, {status.n_archived} archived files, "
        f"{status.n_reports} reports; head {status.head.sequence} {status.head.entry_hash[:16]}",
        f"signed by the service key up to entry {status.covered}"
        + (f"; {status.n_reread} exports read again" if status.n_reread else ""),
    ]
    lines += [printable(problem) for problem in status.problems]
    lines.append("Everything holds together." if status.ok else f"{len(status.problems)} problems found.")
    return lines
