"""`qcreport keys new --for service|person "NAME"`."""

from __future__ import annotations

import argparse
import os
import sys
from getpass import getpass
from pathlib import Path

from qcreport.canonical import in_groups_of_eight
from qcreport.cli.now import now
from qcreport.errors import UsageError
from qcreport.settings.keys import KeyFiles, key_files, write_key
from qcreport.settings.people import PEOPLE_FILE, person_block
from qcreport.settings.site import Site, load_site, require_folders
from qcreport.signing.new_key import new_key
from qcreport.signing.passphrase import find_passphrase

LONGEST_DAYS = 3660


def run(arguments: argparse.Namespace) -> int:
    """Make a key; a service key is also entered in site.toml."""
    if not 1 <= arguments.days <= LONGEST_DAYS:
        raise UsageError(f"A key is made for 1 to {LONGEST_DAYS} days, not {arguments.days}.")
    site = load_site(Path(arguments.site))
    require_folders(site)
    files = key_files(site, arguments.purpose, arguments.name)
    made = new_key(
        arguments.name,
        purpose=arguments.purpose,
        organisation=site.laboratory.name,
        now=now(),
        days=arguments.days,
        demonstration=site.demonstration,
        passphrase=_passphrase(arguments),
    )
    write_key(site, files, made, arguments.passphrase_file)
    print(f"Key:          {files.key}")
    print(f"Certificate:  {files.certificate}")
    print(f"Fingerprint:  {in_groups_of_eight(made.fingerprint_sha256)} (SHA-256)")
    print(f"Valid for:    {arguments.days} days")
    print(_next(site, files, arguments, made.fingerprint_sha256))
    return 0


def _passphrase(arguments: argparse.Namespace) -> bytes:
    """Return the passphrase from the file, the environment (service only) or two equal prompts."""
    path = None if arguments.passphrase_file is None else Path(arguments.passphrase_file)
    environment = os.environ if arguments.purpose == "service" else {}
    prompt = _ask_twice if sys.stdin.isatty() else None
    found = find_passphrase(path, environment, prompt)
    if not found:
        raise UsageError(
            "A key needs a passphrase and nobody is at the terminal to ask. Give --passphrase-file FILE "
            "(mode 600)" + ("" if arguments.purpose == "person" else " or set QCREPORT_KEY_PASSPHRASE") + "."
        )
    return found


def _ask_twice() -> str:
    first, second = getpass("New passphrase: "), getpass("Once more: ")
    if first != second:
        raise UsageError("The two passphrases differ; no key was made.")
    return first


def _next(site: Site, files: KeyFiles, arguments: argparse.Namespace, fingerprint_sha256: str) -> str:
    if arguments.purpose == "service":
        return (
            "Publish the certificate and the fingerprint, so that auditors can get them from you.\n"
            f"Next: qcreport config check --site {arguments.site}"
        )
    return (
        f"Give {files.key.name} to this person and to nobody else. For {site.root / PEOPLE_FILE}:\n\n"
        f"{person_block(arguments.name, fingerprint_sha256)}\n\n"
        f"Next: add these lines, then qcreport config check --site {arguments.site}"
    )
