"""The bytes of a claimed file: read once, under the limit, and only when nobody writes to them."""

from __future__ import annotations

import os
from dataclasses import dataclass
from pathlib import Path

from qcreport.canonical import sha256_hex
from qcreport.durable import write_whole
from qcreport.errors import ExportRefusedError
from qcreport.intake.files import NotPlainFileError, open_plain, read_at_most
from qcreport.intake.journal import Claim, write_journal
from qcreport.intake.listing import Seen, seen_of
from qcreport.intake.names import one_line

_HEAD_BYTES = 1 << 20


class StillChangingError(Exception):
    """Somebody still writes to a claimed file; it is read after another quiet time."""

    def __init__(self, claim: Claim) -> None:
        super().__init__(claim.name)
        self.claim = claim


@dataclass(frozen=True, slots=True, kw_only=True)
class ClaimedExport:
    """One export in our hands."""

    claim: Claim
    """Its id, name and folder."""
    data: bytes | None
    """Its bytes; None where it was refused unread."""
    sha256: str | None
    """Digest of its bytes; None where it was refused unread."""
    size: int
    """Bytes."""
    label: str
    """Eight characters for the name of its folder if refused: of its digest, or of size and beginning."""
    refusal: ExportRefusedError | None
    """Why it is refused without looking inside, or None."""

    @property
    def name(self) -> str:
        """Return the file name as dropped, for matching and records."""
        return self.claim.name

    @property
    def shown_name(self) -> str:
        """Return the file name as people may be shown it."""
        return one_line(self.claim.name)


def read_claimed(claim: Claim, max_bytes: int) -> ClaimedExport:
    """Return a claimed file; its copy is made on the first reading and is all that is read later.

    Raises
    ------
    StillChangingError
        Where the original is not in the state in which it was taken, or changed while it was read. The
        journal then has the new state, so that the next reading compares with that.
    """
    if claim.copy.exists():
        data = claim.copy.read_bytes()
        if claim.seen.size > max_bytes:
            return _unread(claim, data, _too_large(claim, max_bytes))
        whole = len(data) == claim.seen.size
        return _whole(claim, data) if whole else _unread(claim, data, _unreadable(claim))
    try:
        with open_plain(claim.original) as descriptor:
            data = _settled(claim, descriptor, max_bytes)
    except NotPlainFileError:
        return _unread(claim, claim.id.encode("ascii"), _not_plain(claim))
    except PermissionError:
        return _unread(claim, claim.id.encode("ascii"), _unreadable(claim))
    if claim.seen.size > max_bytes:
        return _unread(claim, data, _too_large(claim, max_bytes))
    write_whole(claim.copy, data, mode=0o400)
    return _whole(claim, data)


def copy_of(source: Path, seen: Seen, max_bytes: int) -> bytes | None:
    """Return the bytes of a file that stays where it is, its beginning where it is too large.

    None where it is no plain file, went away, or is not in the state `seen`; empty where it must not be read.
    """
    try:
        with open_plain(source) as descriptor:
            return _read_still(descriptor, seen, max_bytes)
    except (NotPlainFileError, FileNotFoundError):
        return None
    except PermissionError:
        return b""


def _settled(claim: Claim, descriptor: int, max_bytes: int) -> bytes:
    data = _read_still(descriptor, claim.seen, max_bytes)
    if data is None:
        changed = claim.seen_as(seen_of(claim.name, os.fstat(descriptor)))
        write_journal(changed)
        raise StillChangingError(changed)
    return data


def _read_still(descriptor: int, seen: Seen, max_bytes: int) -> bytes | None:
    """Return a file's bytes (its beginning where too large), or None where it is not, or not only, `seen`."""
    if seen_of(seen.name, os.fstat(descriptor)) != seen:
        return None
    wanted = min(seen.size, _HEAD_BYTES) if seen.size > max_bytes else seen.size
    data = read_at_most(descriptor, wanted)
    still = seen_of(seen.name, os.fstat(descriptor)) == seen
    return data if still and len(data) == wanted else None


def _whole(claim: Claim, data: bytes) -> ClaimedExport:
    digest = sha256_hex(data)
    return ClaimedExport(
        claim=claim,
        data=data,
        sha256=digest,
        size=len(data),
        label=digest[:8],
        refusal=None if data else _empty(claim),
    )


def _unread(claim: Claim, beginning: bytes, refusal: ExportRefusedError) -> ClaimedExport:
    digest = sha256_hex(f"{claim.seen.size}\n".encode("ascii") + beginning)
    return ClaimedExport(
        claim=claim, data=None, sha256=None, size=claim.seen.size, label=digest[:8], refusal=refusal
    )


def _empty(claim: Claim) -> ExportRefusedError:
    return ExportRefusedError(
        "empty_file",
        file=one_line(claim.name),
        where="the whole file",
        found="The file holds nothing (0 bytes).",
        expected="An export with a table of results.",
        next_step="Export it again from the instrument and drop it here.",
    )


def _too_large(claim: Claim, max_bytes: int) -> ExportRefusedError:
    return ExportRefusedError(
        "too_large",
        file=one_line(claim.name),
        where="the whole file",
        found=f"The file has {claim.seen.size:,} bytes.",
        expected=f"At most {max_bytes:,} bytes (the limit of this site).",
        next_step="Export fewer results at a time, or have the limit in site.toml raised.",
    )


def _unreadable(claim: Claim) -> ExportRefusedError:
    return ExportRefusedError(
        "damaged_or_incomplete",
        file=one_line(claim.name),
        where="the whole file",
        found="The system did not let the service read this file as a whole.",
        expected="A file that the service may read.",
        next_step="Give the file the rights of the others in the inbox and drop it here again.",
    )


def _not_plain(claim: Claim) -> ExportRefusedError:
    return ExportRefusedError(
        "not_a_workbook",
        file=one_line(claim.name),
        where="the whole file",
        found="What was dropped is a link or a device, not a file.",
        expected="A file with the export in it.",
        next_step="Drop the file itself here.",
    )
