"""Reading single files so that a link or a pipe in the way does no harm."""

from __future__ import annotations

import os
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
