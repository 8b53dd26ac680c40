"""The site's service key, loaded once and kept in the parent only."""

from __future__ import annotations

import os
import sys
from collections.abc import Callable
from datetime import datetime
from getpass import getpass
from pathlib import Path

from qcreport.errors import EnvironmentFailedError, SigningDeniedError
from qcreport.pipeline.workers import PASSPHRASE_VARIABLE
from qcreport.settings.site import SITE_FILE, Site, no_key
from qcreport.signing.key_checks import check_key_file_mode
from qcreport.signing.keys import SigningKey, load_signing_key
from qcreport.signing.passphrase import find_passphrase

_WHERE_FROM = (
    f"A passphrase comes from [seal] passphrase_file in {SITE_FILE}, from {PASSPHRASE_VARIABLE}, or from a "
    "person at the terminal."
)


def load_service_key(site: Site, now: datetime) -> SigningKey:
    """Return the key that seals this site's reports.

    The passphrase comes from the file that site.toml names, from QCREPORT_KEY_PASSPHRASE, or from a prompt at
    a terminal; it is taken out of the environment so that no child inherits it.

    Raises
    ------
    ConfigError
        Where the site has no key yet.
    SigningDeniedError
        Wrong passphrase; expired, not yet valid, mismatched or weak key; file readable by others.
    EnvironmentFailedError
        Where the key's file cannot be read.
    """
    if site.seal.key is None:
        raise no_key(site)
    path = site.seal.key
    check_key_file_mode(path)
    passphrase = find_passphrase(site.seal.passphrase_file, os.environ, _prompt(path))
    os.environ.pop(PASSPHRASE_VARIABLE, None)
    try:
        return load_signing_key(_read(path), passphrase=passphrase, now=now)
    except SigningDeniedError as error:
        if passphrase is None:
            raise SigningDeniedError(f"{error.text} {_WHERE_FROM}", file=str(path)) from None
        raise


def _read(path: Path) -> bytes:
    try:
        return path.read_bytes()
    except OSError as error:
        raise EnvironmentFailedError(
            f"the service key {path} cannot be read: {error.strerror}", file=str(path)
        ) from None


def _prompt(path: Path) -> Callable[[], str] | None:
    if not sys.stdin.isatty():
        return None
    return lambda: getpass(f"Passphrase of {path.name}: ")
