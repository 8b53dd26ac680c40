"""What lies in the inbox, and since when it has been still.

Listings decide, events never do. Everything but `scan` is pure: the time comes in as a number.
"""

from __future__ import annotations

import os
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path

_HALF_WRITTEN = (
    ".part",
    ".partial",
    ".tmp",
    ".temp",
    ".crdownload",
    ".download",
    ".filepart",
    ".upload",
    ".lock",
    ".lck",
    ".swp",
    "~",
)
_MADE_BY_SYSTEMS = frozenset({"thumbs.db", "desktop.ini"})


@dataclass(frozen=True, slots=True, kw_only=True)
class Seen:
    """One file as a listing shows it."""

    name: str
    """File name; bytes that are no UTF-8 as surrogates."""
    size: int
    """Bytes."""
    mtime_ns: int
    """Time of the last change, as the file system tells it."""
    inode: int
    """Number of the file in its file system."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Still:
    """A file and the time at which it was first seen in this state."""

    seen: Seen
    """The file."""
    since_s: float
    """On the clock that the caller uses, seconds."""


Snapshot = tuple[Still, ...]
"""An inbox at one moment, by name."""


def ignored_name(name: str) -> bool:
    """Return whether a name is one of a hidden, lock or half-written file, or of one that systems leave."""
    folded = name.casefold()
    return folded.startswith((".", "~$", "~")) or folded.endswith(_HALF_WRITTEN) or folded in _MADE_BY_SYSTEMS


def scan(folder: Path) -> tuple[Seen, ...]:
    """List the plain files of a folder that may be exports, by name.

    Folders, links, pipes and sockets are left alone, like the names of `ignored_name`.

    Raises
    ------
    OSError
        Where the folder cannot be listed.
    """
    found = []
    with os.scandir(folder) as entries:
        for entry in entries:
            if ignored_name(entry.name):
                continue
            try:
                if not entry.is_file(follow_symlinks=False):
                    continue
                found.append(seen_of(entry.name, entry.stat(follow_symlinks=False)))
            except FileNotFoundError:
                continue  # gone since the listing: the next one decides
    return tuple(sorted(found, key=lambda seen: seen.name))


def seen_of(name: str, status: os.stat_result) -> Seen:
    """Return a file as its status shows it."""
    return Seen(name=name, size=status.st_size, mtime_ns=status.st_mtime_ns, inode=status.st_ino)


def observe(previous: Snapshot, listing: Iterable[Seen], now_s: float) -> Snapshot:
    """Return the snapshot that follows: a file that did not change keeps its time, any other is new."""
    since = {still.seen: still.since_s for still in previous}
    return tuple(Still(seen=seen, since_s=since.get(seen, now_s)) for seen in listing)


def ready(snapshot: Snapshot, quiet_s: float, now_s: float) -> tuple[Still, ...]:
    """Return the files that have been still for the quiet time."""
    return tuple(still for still in snapshot if now_s - still.since_s >= quiet_s)
