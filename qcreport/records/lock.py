"""One process at a time: an advisory lock on a file, freed by the system when its process ends."""

from __future__ import annotations

import fcntl
import os
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path

from qcreport.durable import failed
from qcreport.errors import EnvironmentFailedError


@contextmanager
def exclusive(
    path: Path, *, busy: str, note: bytes = b"", tries: int = 1, pause: Callable[[], None] = lambda: None
) -> Iterator[None]:
    """Hold the lock on `path` while the block runs.

    Parameters
    ----------
    path : Path
        The lock file; made where missing, never removed (removing it would let two processes in).
    busy : str
        What to tell where another process holds the lock; `{holder}` stands for that process's note.
    note : bytes
        Left in the file for others to read.
    tries : int
        How often to try; `pause` is called between two tries.

    Raises
    ------
    EnvironmentFailedError
        Where another process holds the lock, or the file cannot be opened.
    """
    try:
        descriptor = os.open(path, os.O_RDWR | os.O_CREAT | os.O_NOFOLLOW | os.O_CLOEXEC, 0o644)
    except OSError as error:
        raise failed(f"The lock {path} could not be opened", error) from error
    try:
        if not _taken(descriptor, tries, pause):
            raise EnvironmentFailedError(busy.replace("{holder}", _holder(descriptor)))
        os.ftruncate(descriptor, 0)
        os.pwrite(descriptor, note, 0)
        yield
    finally:
        os.close(descriptor)


def _taken(descriptor: int, tries: int, pause: Callable[[], None]) -> bool:
    for attempt in range(tries):
        if attempt:
            pause()
        try:
            fcntl.flock(descriptor, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except BlockingIOError:
            continue
        return True
    return False


def _holder(descriptor: int) -> str:
    text = os.pread(descriptor, 500, 0).decode("utf-8", "replace")
    return "".join(c for c in text if c.isprintable()) or "another process"
