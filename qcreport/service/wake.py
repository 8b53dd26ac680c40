"""What ends the service's waiting early: an event in the inbox, or a signal.

Events are hints. A watcher only pulls the string; whether there is anything to take, the next listing
decides. The string is a pipe, because a signal handler may write to one at any moment, whereas the standard
events and conditions can deadlock when a signal meets the thread that waits on them.
"""

from __future__ import annotations

import contextlib
import os
import select
import time
from collections.abc import Callable
from pathlib import Path
from typing import Protocol

_SETTLE_S = 0.1
_TELLING = frozenset({"created", "modified", "moved", "closed"})


class Wake:
    """A string that any thread, and a signal handler, may pull."""

    def __init__(self, settle: Callable[[], None] = lambda: time.sleep(_SETTLE_S)) -> None:
        self._read_end, self._write_end = os.pipe()
        os.set_blocking(self._read_end, False)
        os.set_blocking(self._write_end, False)
        self._settle = settle

    def pull(self) -> None:
        """End the waiting; harmless when nobody waits, and after `close`."""
        with contextlib.suppress(OSError):  # full: it is pulled already
            os.write(self._write_end, b"!")

    def wait(self, timeout_s: float) -> None:
        """Wait until pulled, or for the time given.

        A burst of events ends one waiting only: a writer at work must not make the service spin.
        """
        readable, _, _ = select.select([self._read_end], [], [], max(0.0, timeout_s))
        if readable:
            self._settle()
            with contextlib.suppress(BlockingIOError):
                while os.read(self._read_end, 4096):
                    pass

    def close(self) -> None:
        """Give the pipe back."""
        os.close(self._read_end)
        os.close(self._write_end)


class Watching(Protocol):
    """A watcher at work."""

    def stop(self) -> None:
        """End it."""


class _FolderWatch:
    def __init__(self, folder: Path, pull: Callable[[], None]) -> None:
        from watchdog.events import FileSystemEvent, FileSystemEventHandler
        from watchdog.observers import Observer

        class Handler(FileSystemEventHandler):
            # Our own reading of the inbox gives events too (opened, closed without writing): not these.
            def on_any_event(self, event: FileSystemEvent) -> None:
                if event.event_type in _TELLING:
                    pull()

        self._observer = Observer()
        self._observer.daemon = True
        self._observer.schedule(Handler(), str(folder), recursive=False)
        self._observer.start()

    def stop(self) -> None:
        self._observer.stop()
        self._observer.join(timeout=2.0)


def watch_folder(folder: Path, pull: Callable[[], None]) -> Watching | None:
    """Pull at every event in a folder; None where the system cannot watch it, so only polling is left."""
    try:
        return _FolderWatch(folder, pull)
    except Exception:  # noqa: BLE001  a missing library, inotify limits, odd file systems: none may stop us
        return None
