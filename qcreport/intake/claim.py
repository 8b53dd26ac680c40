"""Taking files out of the inbox, so that each is handled once whatever happens in between.

A claim is a folder `work/claims/ID/`. Its journal is written before the file is moved in, so a kill leaves
either a file in the inbox or a claim that start-up finds. The file is read once; that copy is what is hashed,
archived and parsed, whatever a late writer still does to the original.
"""

from __future__ import annotations

import datetime as dt
import errno
import secrets
import shutil
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

from qcreport.canonical import sha256_hex
from qcreport.durable import sync_folder, write_whole
from qcreport.intake.exports import ClaimedExport, copy_of, read_claimed
from qcreport.intake.files import system_errors
from qcreport.intake.journal import COPY, ORIGINAL, Claim, ClaimMode, read_journal, write_journal
from qcreport.intake.listing import Seen, seen_of
from qcreport.intake.taken import Taken

_CANNOT_MOVE = frozenset({errno.EXDEV, errno.EACCES, errno.EPERM, errno.EROFS})
_GONE = ".gone-"


def new_claim_id(now: dt.datetime) -> str:
    """Return an id that sorts by time and owes nothing to the file's name."""
    return f"{now.astimezone(dt.UTC):%Y%m%dT%H%M%S%f}-{secrets.token_hex(4)}"


class Claims:
    """The claims of one site, in its `work/` folder.

    Parameters
    ----------
    work : Path
        The site's `work/`.
    max_bytes : int
        Files above this are refused unread.
    clock : callable
        Returns the aware current time.
    new_id : callable
        Returns a fresh id for a time.
    """

    def __init__(
        self,
        work: Path,
        *,
        max_bytes: int,
        clock: Callable[[], dt.datetime],
        new_id: Callable[[dt.datetime], str] = new_claim_id,
    ) -> None:
        self._folder = work / "claims"
        self._failed = work / "failed"
        self._max_bytes = max_bytes
        self._clock = clock
        self._new_id = new_id
        with system_errors(f"{work} cannot be used"):
            for folder in (work, self._folder, self._failed):
                folder.mkdir(mode=0o700, parents=True, exist_ok=True)
            self._taken = Taken(work / "taken")

    def is_taken(self, seen: Seen) -> bool:
        """Return whether a file that cannot be moved away was taken already in this state."""
        return self._taken.knows(seen)

    def forget_others(self, listing: tuple[Seen, ...]) -> None:
        """Forget what was copied from files that are no longer in the inbox."""
        with system_errors("The memory of copied files cannot be kept"):
            self._taken.forget_others(seen.name for seen in listing)

    def take(self, inbox: Path, seen: Seen) -> Claim | None:
        """Take one file; None where it went away, changed, or was taken already.

        It is moved where the inbox is on the same file system and may be written to, else copied and
        remembered.
        """
        source = inbox / seen.name
        with system_errors(f"{seen.name!r} cannot be taken from the inbox"):
            if not _is_still(source, seen):
                return None
            claim = self._begin(seen)
            try:
                source.rename(claim.original)
            except FileNotFoundError:
                shutil.rmtree(claim.folder)
                return None
            except OSError as error:
                if error.errno not in _CANNOT_MOVE:
                    raise
                return self._copy(source, claim)
            sync_folder(claim.folder)
            return claim

    def load(self, claim: Claim) -> ClaimedExport:
        """Return a claimed file with its bytes.

        Raises
        ------
        StillChangingError
            Where somebody still writes to it; load it again after the quiet time.
        """
        with system_errors(f"The claimed file {claim.name!r} cannot be read"):
            return read_claimed(claim, self._max_bytes)

    def leftovers(self) -> tuple[Claim, ...]:
        """Return the claims that an earlier process left, oldest first, and clear away what is none."""
        found = []
        with system_errors(f"{self._folder} cannot be listed"):
            for folder in sorted(path for path in self._folder.iterdir() if path.is_dir()):
                if folder.name.startswith(_GONE):
                    shutil.rmtree(folder)
                    continue
                claim = self._leftover(folder)
                if claim is not None:
                    found.append(claim)
        return tuple(found)

    def finish(self, claim: Claim) -> Claim | None:
        """Remove a claim that was handled; an original that was written to since is returned as a new one."""
        with system_errors(f"The claim {claim.id} cannot be removed"):
            successor = self._successor(claim)
            gone = claim.folder.with_name(_GONE + claim.id)
            claim.folder.rename(gone)
            sync_folder(self._folder)
            shutil.rmtree(gone)
            return successor

    def set_aside(self, claim: Claim, reason: str) -> Path:
        """Move a claim that met a fault of the program to `work/failed/ID` with the reason beside it."""
        with system_errors(f"The claim {claim.id} cannot be set aside"):
            return self._set_aside(claim.folder, reason)

    def _begin(self, seen: Seen) -> Claim:
        now = self._clock().astimezone(dt.UTC)
        name = self._new_id(now)
        claim = Claim(
            id=name,
            name=seen.name,
            claimed_at=now.strftime("%Y-%m-%dT%H:%M:%SZ"),
            mode=ClaimMode.MOVED,
            seen=seen,
            folder=self._folder / name,
        )
        claim.folder.mkdir(mode=0o700)
        write_journal(claim)
        sync_folder(self._folder)
        return claim

    def _copy(self, source: Path, begun: Claim) -> Claim | None:
        """Copy a file that cannot be moved; it is remembered by its state and digest."""
        claim = replace(begun, mode=ClaimMode.COPIED)
        data = copy_of(source, claim.seen, self._max_bytes)
        if data is None or self._taken.digest_of(claim.name) == sha256_hex(data):
            shutil.rmtree(claim.folder)
            if data is not None:
                self._taken.remember(claim.seen, sha256_hex(data))
            return None
        write_journal(claim)
        write_whole(claim.copy, data, mode=0o400)
        self._taken.remember(claim.seen, sha256_hex(data))
        return claim

    def _leftover(self, folder: Path) -> Claim | None:
        original, copy = folder / ORIGINAL, folder / COPY
        if not (copy.exists() or original.is_symlink() or original.exists()):
            shutil.rmtree(folder)  # killed before the move: the file is still in the inbox
            return None
        try:
            claim = read_journal(folder)
        except ValueError as error:
            self._set_aside(folder, str(error))
            return None
        if claim.mode is ClaimMode.COPIED:
            self._taken.remember(claim.seen, sha256_hex(claim.copy.read_bytes()))
        return claim

    def _successor(self, claim: Claim) -> Claim | None:
        if claim.mode is ClaimMode.COPIED or not claim.copy.exists():
            return None
        try:
            seen = seen_of(claim.name, claim.original.lstat())
        except FileNotFoundError:
            return None
        if seen == claim.seen:
            return None
        successor = self._begin(seen)
        claim.original.rename(successor.original)
        return successor

    def _set_aside(self, folder: Path, reason: str) -> Path:
        write_whole(folder / "reason.txt", reason.encode("utf-8", "backslashreplace"))
        target = self._failed / folder.name
        folder.rename(target)
        sync_folder(self._failed)
        sync_folder(self._folder)
        return target


def _is_still(path: Path, seen: Seen) -> bool:
    try:
        return seen_of(seen.name, path.lstat()) == seen
    except FileNotFoundError:
        return False
