"""Names of files that are no exports."""

from __future__ import annotations


def is_ignored_name(name: str) -> bool:
    """Return whether a file is left alone: lock files of spreadsheet programs and hidden files."""
    return not name or name.startswith((".", "~$", ".~lock."))
