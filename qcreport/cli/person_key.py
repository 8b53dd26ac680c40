"""A person's credentials at the command line: the key's file and its passphrase, asked anew each time."""

from __future__ import annotations

import sys
from datetime import datetime
from getpass import getpass
from pathlib import Path

from qcreport.errors import SigningDeniedError, UsageError
from qcreport.settings.keys import read_bytes
from qcreport.signing.key_checks import check_key_file_mode
from qcreport.signing.keys import SigningKey, load_signing_key
from qcreport.signing.passphrase import find_passphrase


def key_file(named: str | None) -> Path:
    """Return the file that was named, else the one that the person at the terminal names."""
    if named is not None:
        return Path(named)
    if not sys.stdin.isatty():
        raise UsageError("Name your key with --key FILE; nobody is at the terminal to ask.")
    print("File of your key: ", end="", file=sys.stderr, flush=True)
    typed = sys.stdin.readline().strip()
    if not typed:
        raise UsageError("No key was named; nothing was signed.")
    return Path(typed)


def open_key(path: Path, passphrase_file: str | None, now: datetime) -> SigningKey:
    """Return a person's key; the passphrase comes from a file or the terminal, never from the environment.

    Raises
    ------
    SigningDeniedError
        Wrong passphrase or none; a key that opens without one; expired, not yet valid, mismatched or weak; a
        file that others may read.
    UsageError
        Where the file is not there.
    """
    data = read_bytes(path, "the key")
    check_key_file_mode(path)
    if _opens_without(data, now):
        raise SigningDeniedError(
            f"{path.name} opens without a passphrase, so holding the file would be enough to sign. "
            "Protect it with one."
        )
    file = None if passphrase_file is None else Path(passphrase_file)
    prompt = (lambda: getpass(f"Passphrase of {path.name}: ")) if sys.stdin.isatty() else None
    passphrase = find_passphrase(file, {}, prompt)
    if passphrase is None:
        raise SigningDeniedError("No passphrase was given; nothing was signed. Give --passphrase-file FILE.")
    return load_signing_key(data, passphrase=passphrase, now=now)


def _opens_without(data: bytes, now: datetime) -> bool:
    try:
        load_signing_key(data, passphrase=None, now=now)
    except SigningDeniedError:
        return False
    return True
