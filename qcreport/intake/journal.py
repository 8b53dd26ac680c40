"""The note beside a claimed file: under which name it was dropped, in which state it was taken."""

from __future__ import annotations

import json
from dataclasses import dataclass, replace
from enum import StrEnum
from pathlib import Path

from qcreport.durable import write_whole
from qcreport.intake.listing import Seen

JOURNAL = "journal.json"
ORIGINAL = "original"
COPY = "export.bin"


class ClaimMode(StrEnum):
    """How a file came out of the inbox."""

    MOVED = "moved"
    COPIED = "copied"


@dataclass(frozen=True, slots=True, kw_only=True)
class Claim:
    """One file taken into work, under an id of our own."""

    id: str
    """Begins with the time, so that ids sort by it."""
    name: str
    """File name as dropped; bytes that are no UTF-8 as surrogates."""
    claimed_at: str
    """UTC time, ISO 8601 with Z."""
    mode: ClaimMode
    """Moved out of the inbox, or copied where that cannot be."""
    seen: Seen
    """State in which it was last seen; the original must still be in it when it is read."""
    folder: Path
    """Holds the journal, the original where it was moved, and our own copy."""

    @property
    def original(self) -> Path:
        """Where the file itself is, if it was moved."""
        return self.folder / ORIGINAL

    @property
    def copy(self) -> Path:
        """Where our own copy is, once it was read."""
        return self.folder / COPY

    def seen_as(self, seen: Seen) -> Claim:
        """Return the claim with its file in another state."""
        return replace(self, seen=seen)


def write_journal(claim: Claim) -> None:
    """Write the note of a claim, durably."""
    document = {
        "id": claim.id,
        "name": claim.name,
        "claimed_at": claim.claimed_at,
        "mode": claim.mode.value,
        "size": claim.seen.size,
        "mtime_ns": claim.seen.mtime_ns,
        "inode": claim.seen.inode,
    }
    # json.dumps escapes what is no ASCII, lone surrogates included, so any name comes back as it was.
    write_whole(claim.folder / JOURNAL, json.dumps(document).encode("ascii"))


def read_journal(folder: Path) -> Claim:
    """Return the claim of a folder.

    Raises
    ------
    ValueError
        Where the note is missing or damaged.
    """
    try:
        document = json.loads((folder / JOURNAL).read_bytes())
        name = str(document["name"])
        return Claim(
            id=folder.name,
            name=name,
            claimed_at=str(document["claimed_at"]),
            mode=ClaimMode(document["mode"]),
            seen=Seen(
                name=name,
                size=int(document["size"]),
                mtime_ns=int(document["mtime_ns"]),
                inode=int(document["inode"]),
            ),
            folder=folder,
        )
    except (OSError, ValueError, KeyError, TypeError) as error:
        raise ValueError(f"{JOURNAL} of {folder.name} is missing or damaged: {error}") from None
