"""Writing a file so that it is either whole under its name or not there at all."""

from __future__ import annotations

import os
import secrets
import stat
from pathlib import Path

from qcreport.errors import EnvironmentFailedError


def write_durably(path: Path, data: bytes, *, mode: int = 0o644) -> None:
    """Write `data` under `path` so that after a kill or a power cut it is whole or not there.

    Raises
    ------
    EnvironmentFailedError
        Where the disk is full, the folder missing or not writable.
    """
    try:
        write_whole(path, data, mode=mode)
    except OSError as error:
        raise failed(f"{path} could not be written", error) from error


def write_whole(path: Path, data: bytes, *, mode: int = 0o644) -> None:
    """Do the same for a caller that answers the system's own errors: temporary file, fsync, rename, fsync."""
    # A short name: the file's own may be as long as the system allows.
    temporary = path.with_name(f".{secrets.token_hex(8)}.tmp")
    try:
        _write_new(temporary, data, mode)
        temporary.replace(path)
        sync_folder(path.parent)
    finally:
        temporary.unlink(missing_ok=True)


def _write_new(path: Path, data: bytes, mode: int) -> None:
    descriptor = os.open(path, os.O_WRONLY | os.O_CREAT | os.O_EXCL | os.O_NOFOLLOW | os.O_CLOEXEC, mode)
    with os.fdopen(descriptor, "wb") as stream:
        stream.write(data)
        stream.flush()
        os.fsync(stream.fileno())


def make_folder(path: Path, *, mode: int = 0o755) -> None:
    """Make a folder and its parents, durable before this returns."""
    if path.is_dir():
        return
    make_folder(path.parent, mode=mode)
    try:
        path.mkdir(mode=mode, exist_ok=True)
        sync_folder(path.parent)
    except OSError as error:
        raise failed(f"The folder {path} could not be made", error) from error


def sync_folder(path: Path) -> None:
    """Make renames in a folder durable."""
    descriptor = os.open(path, os.O_RDONLY | os.O_DIRECTORY | os.O_CLOEXEC)
    try:
        os.fsync(descriptor)
    finally:
        os.close(descriptor)


def clear_temporaries(folder: Path, *, before_s: float) -> int:
    """Remove what `write_durably` left behind in killed processes, below a folder, and return how many.

    Only files last changed before `before_s` (seconds since the epoch) go: a younger one may belong to a
    process at work.
    """
    cleared = 0
    for path in _temporaries(folder):
        try:
            status = path.lstat()
            if stat.S_ISREG(status.st_mode) and status.st_mtime < before_s:
                path.unlink()
                cleared += 1
        except OSError:
            continue  # gone meanwhile, or not ours to remove: it is hidden and does no harm
    return cleared


def _temporaries(folder: Path) -> list[Path]:
    try:
        return list(folder.rglob(".*.tmp"))
    except OSError:
        return []  # a folder went away while it was listed: clearing can wait


def failed(what: str, error: OSError) -> EnvironmentFailedError:
    """Return the error that tells people what the system refused."""
    reason = error.strerror or str(error)
    return EnvironmentFailedError(f"{what}: {reason}. Mend that and try again; nothing is lost.")
