"""Writing and reading single files so that a kill, a link or a pipe in the way does no harm."""

from __future__ import annotations

import os
import secrets
import stat
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from qcreport.errors import EnvironmentFailedError


class NotPlainFileError(Exception):
    """What stands under a name is a link, a pipe, a socket or a folder."""


@contextmanager
def system_errors(what: str) -> Iterator[None]:
    """Turn what the system refuses inside the block into the error that says so to people."""
    try:
        yield
    except OSError as error:
        reason = error.strerror or str(error)
        raise EnvironmentFailedError(f"{what}: {reason}. Mend that; nothing is lost.") from error


def write_durably(path: Path, data: bytes, *, mode: int = 0o644) -> None:
    """Write `data` under `path` by temporary file, fsync, rename and fsync of the folder."""
    temporary = path.with_name(f".{secrets.token_hex(8)}.tmp")
    flags = os.O_WRONLY | os.O_CREAT | os.O_EXCL | os.O_NOFOLLOW | os.O_CLOEXEC
    try:
        with os.fdopen(os.open(temporary, flags, mode), "wb") as stream:
            stream.write(data)
            stream.flush()
            os.fsync(stream.fileno())
        temporary.replace(path)
    finally:
        temporary.unlink(missing_ok=True)
    sync_folder(path.parent)


def sync_folder(path: Path) -> None:
    """Make renames in a folder durable."""
    descriptor = os.open(path, os.O_RDONLY | os.O_DIRECTORY | os.O_CLOEXEC)
    try:
        os.fsync(descriptor)
    finally:
        os.close(descriptor)


@contextmanager
def open_plain(path: Path) -> Iterator[int]:
    """Open a plain file for reading and nothing else: links are not followed, pipes do not block.

    Raises
    ------
    NotPlainFileError
        Where something else stands under the name.
    OSError
        Where the system refuses.
    """
    flags = os.O_RDONLY | os.O_NOFOLLOW | os.O_NONBLOCK | os.O_CLOEXEC
    if stat.S_ISLNK(path.lstat().st_mode):
        raise NotPlainFileError
    descriptor = os.open(path, flags)
    try:
        if not stat.S_ISREG(os.fstat(descriptor).st_mode):
            raise NotPlainFileError
        yield descriptor
    finally:
        os.close(descriptor)


def read_at_most(descriptor: int, size: int) -> bytes:
    """Return up to `size` bytes from where the descriptor stands."""
    parts = []
    while size > 0:
        part = os.read(descriptor, min(size, 1 << 20))
        if not part:
            break
        parts.append(part)
        size -= len(part)
    return b"".join(parts)
