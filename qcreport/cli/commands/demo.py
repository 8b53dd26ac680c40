"""`qcreport demo [DIR]`: the main job on examples, from inbox to verified reports."""

from __future__ import annotations

import argparse
import secrets
import time
from pathlib import Path

from qcreport.audit.in_child import verify_in_child
from qcreport.audit.words import verdict_lines
from qcreport.cli.now import now
from qcreport.cli.run import ANSWER_IS_NO, DONE
from qcreport.cli.tell import TerminalAudience
from qcreport.durable import write_durably
from qcreport.errors import UsageError
from qcreport.pipeline.opened import opened
from qcreport.pipeline.outcome import Reported
from qcreport.service.serve import serve
from qcreport.settings import Site, load_site
from qcreport.settings.keys import key_files, read_bytes, write_key
from qcreport.settings.new_site import NewSite, make_site
from qcreport.settings.shipped import shipped_files
from qcreport.settings.site import SITE_FILE, no_key
from qcreport.signing.keys import load_certificates
from qcreport.signing.new_key import new_key

KEY_NAME = "Halden Adhesives QC, demonstration seal"
ANSWERS = NewSite(
    name="Halden Adhesives, QC laboratory (example)",
    address="Fjord Road 12, Halden (invented)",
    time_zone="Europe/Oslo",
    language="en",
    demonstration=True,
)


def run(arguments: argparse.Namespace) -> int:
    """Make a demo site or take up an earlier one, run the service over the examples, verify every report."""
    started = time.monotonic()
    root = Path(arguments.dir)
    site = _demo_site(root)
    print(
        "A demonstration: invented laboratory and data, sealed with a demonstration key. Not for release.\n"
    )
    examples = shipped_files("inbox_example", "*.xlsx")
    for name, data in examples.items():
        write_durably(site.folders.inbox / name, data)
    print(f"{len(examples)} exports dropped into {site.folders.inbox}\n")
    audience = TerminalAudience()
    with opened(site, now, workers=site.workers) as work:
        counts = serve(work, now, audience, once=True)
    reports = [o for h in audience.handled_exports for o in h.outcomes if isinstance(o, Reported)]
    all_hold = _verify_all(site, reports)
    print(
        f"\n{len(reports)} reports, {len(audience.refused)} refused, {counts.failed} failed, "
        f"{time.monotonic() - started:.0f} s."
    )
    print("Open:")
    for report in reports:
        print(f"  {report.path}")
    for _, folder in audience.refused:
        print(f"  {folder}/why.txt")
    print(f"Next: drop an export into {root}/inbox and run qcreport watch --once --site {root}")
    print(f"      or change a plan in {root}/config/plans; a reported export then needs a reason:")
    print(f'      qcreport compare EXPORT --reason "…" --site {root}')
    return DONE if all_hold and not counts.failed else ANSWER_IS_NO


def _demo_site(root: Path) -> Site:
    """Make the site with its key; an earlier demo site is used again, anything else is left alone."""
    if (root / SITE_FILE).is_file():
        site = load_site(root)
        if not site.demonstration:
            raise UsageError(f"{root} is a real site. Name a new folder for the demonstration.")
        if site.seal.key is not None:
            return site
    else:
        site = make_site(root, ANSWERS)
    passphrase = secrets.token_urlsafe(24)
    passphrase_file = site.folders.keys / "passphrase"
    write_durably(passphrase_file, passphrase.encode() + b"\n", mode=0o600)
    made = new_key(
        KEY_NAME,
        purpose="service",
        organisation=site.laboratory.name,
        now=now(),
        days=730,
        demonstration=True,
        passphrase=passphrase.encode(),
    )
    write_key(site, key_files(site, "service", KEY_NAME), made, str(passphrase_file))
    return load_site(root)


def _verify_all(site: Site, reports: list[Reported]) -> bool:
    if site.seal.key is None:
        raise no_key(site)
    roots = load_certificates(read_bytes(site.seal.key.with_suffix(".crt"), "the certificate"))
    print("Verifying each report from its file alone, against the demonstration certificate:")
    all_hold = True
    for report in reports:
        verdict = verify_in_child(read_bytes(report.path, "the report"), roots=roots, now=now())
        holds = bool(verdict["valid"]) and verdict["trusted"] is not False
        all_hold = all_hold and holds
        lines = verdict_lines(verdict)
        print(f"  {report.number}  {lines[1] if holds else ' '.join(lines)}", flush=True)
    return all_hold
