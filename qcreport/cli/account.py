"""Who runs a command, as the operating system knows it."""

from __future__ import annotations

import getpass


def account() -> str:
    """Return the name of the account, for the ledger."""
    try:
        return getpass.getuser()
    except (OSError, KeyError):
        return "unknown account"
