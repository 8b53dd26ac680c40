"""`qcreport config approve PLAN --key FILE`."""

from __future__ import annotations

import argparse
import sys
from getpass import getpass
from pathlib import Path

from qcreport.canonical import in_groups_of_eight
from qcreport.cli.now import now
from qcreport.cli.run import DONE, printable
from qcreport.pipeline.approving import approve
from qcreport.pipeline.opened import opened
from qcreport.settings import Site, find_plan, load_site
from qcreport.settings.keys import read_bytes
from qcreport.signing.key_checks import check_key_file_mode
from qcreport.signing.keys import SigningKey, fingerprint, load_certificates, load_signing_key
from qcreport.signing.passphrase import find_passphrase


def run(arguments: argparse.Namespace) -> int:
    """Approve a plan with its layout and rules as they are now, by a person's key."""
    site = load_site(Path(arguments.site))
    settings = find_plan(site, arguments.plan)
    key = _key(arguments)
    with opened(site, now, workers=1) as work:
        entry = approve(
            work.records,
            settings,
            key,
            service_fingerprint=_service_fingerprint(site),
            reason=arguments.reason or "",
            at=now(),
        )
    print(
        printable(
            f"Plan {settings.plan.name} with {settings.layout_file.name} and {settings.rules_file.name}"
        )
    )
    print(printable(f"approved by {key.subject}, ledger entry {entry.sequence}."))
    print(f"Key:          {in_groups_of_eight(key.fingerprint_sha256)} (SHA-256)")
    print("Any change of these files needs a new approval; reports say whether there is one.")
    print(f"Next: qcreport compare EXPORT --plan {settings.plan.name} --site {arguments.site}")
    return DONE


def _key(arguments: argparse.Namespace) -> SigningKey:
    """Load the person's key; its passphrase comes from a file or a prompt, never from the environment."""
    path = Path(arguments.key)
    data = read_bytes(path, "the key")
    check_key_file_mode(path)
    file = None if arguments.passphrase_file is None else Path(arguments.passphrase_file)
    prompt = (lambda: getpass(f"Passphrase of {path.name}: ")) if sys.stdin.isatty() else None
    return load_signing_key(data, passphrase=find_passphrase(file, {}, prompt), now=now())


def _service_fingerprint(site: Site) -> str:
    if site.seal.key is None:
        return ""
    certificate = read_bytes(site.seal.key.with_suffix(".crt"), "the service certificate")
    return fingerprint(load_certificates(certificate)[0])
