"""The memory of what was copied from an inbox that nothing can be moved out of."""

from __future__ import annotations

import json
import os
from collections.abc import Iterable
from pathlib import Path

from qcreport.canonical import sha256_hex
from qcreport.durable import write_whole
from qcreport.intake.listing import Seen


class Taken:
    """Names with the state and digest in which each was taken, one small file a name under `folder`."""

    def __init__(self, folder: Path) -> None:
        self._folder = folder
        self._known: dict[str, tuple[Seen, str]] = {}
        for path in sorted(folder.glob("*.json")):
            entry = _loaded(path)
            if entry is not None:
                self._known[entry[0].name] = entry

    def knows(self, seen: Seen) -> bool:
        """Return whether a file was taken in exactly this state."""
        entry = self._known.get(seen.name)
        return entry is not None and entry[0] == seen

    def digest_of(self, name: str) -> str | None:
        """Return the digest that was taken under a name, or None."""
        entry = self._known.get(name)
        return None if entry is None else entry[1]

    def remember(self, seen: Seen, sha256: str) -> None:
        """Keep that a file was taken, durably."""
        document = {
            "name": seen.name,
            "size": seen.size,
            "mtime_ns": seen.mtime_ns,
            "inode": seen.inode,
            "sha256": sha256,
        }
        self._folder.mkdir(parents=True, exist_ok=True)
        write_whole(self._path(seen.name), json.dumps(document).encode("ascii"))
        self._known[seen.name] = (seen, sha256)

    def forget_others(self, names: Iterable[str]) -> None:
        """Forget every file that is no longer there."""
        for name in set(self._known) - set(names):
            del self._known[name]
            self._path(name).unlink(missing_ok=True)

    def _path(self, name: str) -> Path:
        return self._folder / f"{sha256_hex(os.fsencode(name))}.json"


def _loaded(path: Path) -> tuple[Seen, str] | None:
    """Return a remembered file; a damaged memory is none, and the file is then taken again as a duplicate."""
    try:
        document = json.loads(path.read_bytes())
        seen = Seen(
            name=str(document["name"]),
            size=int(document["size"]),
            mtime_ns=int(document["mtime_ns"]),
            inode=int(document["inode"]),
        )
        return seen, str(document["sha256"])
    except (OSError, ValueError, KeyError, TypeError):
        return None
