"""The folder service: lists the inbox, takes what is still and whole, and has it handled."""

from __future__ import annotations

import datetime as dt
import os.path
import shutil
import time
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

from qcreport.errors import EnvironmentFailedError, QcReportError
from qcreport.intake.claim import Claims
from qcreport.intake.exports import StillChangingError, copy_of
from qcreport.intake.journal import Claim
from qcreport.intake.listing import Seen, Snapshot, Still, observe, scan
from qcreport.service.handling import NOT_THE_FILES_FAULT, Handling, Process, Tell
from qcreport.service.instance import only_instance
from qcreport.service.model import Counts, Event, EventKind, ServiceSettings
from qcreport.service.stopping import Stop, StopNowError
from qcreport.service.wake import Watching, watch_folder

Clock = Callable[[], dt.datetime]

_SHORTEST_WAIT_S = 0.05


def _free_bytes(folder: Path) -> int:
    return shutil.disk_usage(folder).free


def _no_progress(_counts: Counts) -> None:
    return None


class Service:
    """The service of one site.

    Parameters
    ----------
    settings : ServiceSettings
        Folders and times.
    process : callable
        Handles one claimed export; every step in it may be repeated after a kill.
    tell : callable
        Told events; writes those into the ledger that belong there. What it raises counts as what the work
        raised.
    looks_complete : callable
        Returns whether bytes are a whole file.
    wait : callable
        Waits for so many seconds, or until something calls for attention (`Wake.wait`).
    pull : callable
        Ends that waiting (`Wake.pull`), given to the watcher.
    stop : Stop
        Asked between any two steps.
    clock, monotonic : callable
        The aware current time; seconds that never go back.
    progress : callable
        Told the counts after each change.
    """

    def __init__(
        self,
        settings: ServiceSettings,
        *,
        process: Process,
        tell: Tell,
        looks_complete: Callable[[bytes], bool],
        wait: Callable[[float], None],
        pull: Callable[[], None],
        stop: Stop,
        clock: Clock,
        monotonic: Callable[[], float] = time.monotonic,
        progress: Callable[[Counts], None] = _no_progress,
        listing: Callable[[Path], tuple[Seen, ...]] = scan,
        is_mount: Callable[[Path], bool] = os.path.ismount,
        free_bytes: Callable[[Path], int] = _free_bytes,
        watch: Callable[[Path, Callable[[], None]], Watching | None] = watch_folder,
    ) -> None:
        self._settings = settings
        self._tell = tell
        self._looks_complete = looks_complete
        self._wait = wait
        self._pull = pull
        self._stop = stop
        self._clock = clock
        self._monotonic = monotonic
        self._progress = progress
        self._listing = listing
        self._is_mount = is_mount
        self._free_bytes = free_bytes
        self._watch = watch
        self._claims = Claims(settings.work, max_bytes=settings.max_bytes, clock=clock)
        self._handling = Handling(settings, self._claims, process, tell)
        self._counts = Counts()
        self._snapshot: Snapshot = ()
        self._in_inbox = 0
        self._pending: list[Claim] = []
        self._not_before: dict[str, float] = {}
        self._once = False
        self._lost = False
        self._paused = False
        self._was_mount = False
        self._watching: Watching | None = None

    def run(self, *, once: bool = False) -> Counts:
        """Serve until asked to stop; with `once` until the inbox holds nothing more to take.

        Raises
        ------
        EnvironmentFailedError
            Where another service of this site runs. With `once` also where the inbox cannot be listed or the
            machine fails; without, those are told and tried again.
        """
        self._once = once
        with only_instance(self._settings.work, self._clock()):
            self._tell(Event(kind=EventKind.STARTED, text="The service started."))
            try:
                with self._stop.breakable():
                    self._serve()
            except StopNowError:
                self._stop.request()  # what was in hand stays claimed and is taken up at the next start
            finally:
                self._end_watching()
            self._tell(Event(kind=EventKind.STOPPED, text="The service stopped."))
        return self._counts

    def _serve(self) -> None:
        self._pending = list(self._claims.leftovers())
        self._was_mount = self._is_mount(self._settings.inbox)
        if not self._once:
            self._begin_watching()
        while not self._stop.requested:
            try:
                took = self._round()
            except NOT_THE_FILES_FAULT as error:
                self._pause(error)
                continue
            self._resume()
            if self._stop.requested or (self._once and not took and not self._counts.waiting):
                break
            if not took:
                self._wait(self._next_wait_s())

    def _round(self) -> bool:
        """Handle what is in hand and what is due; return whether anything was."""
        took = self._handle_pending()
        if not self._list():
            return took
        for still in self._snapshot:
            if self._stop.requested:
                break
            if self._due(still):
                self._require_space()
                claim = self._claims.take(self._settings.inbox, still.seen)
                if claim is not None:
                    self._pending.append(claim)
                    self._in_inbox -= 1
                took = self._handle_pending() or took
        self._count()
        return took

    def _handle_pending(self) -> bool:
        took = False
        for claim in tuple(self._pending):
            if self._stop.requested:
                break
            if self._not_before.get(claim.id, 0.0) <= self._monotonic():
                self._handle(claim)
                took = True
        return took

    def _handle(self, claim: Claim) -> None:
        """Handle one claim; it stays pending unless it was handled to the end."""
        try:
            ended = self._handling.handle(claim)
        except StillChangingError as changing:
            self._pending[self._pending.index(claim)] = changing.claim
            self._not_before[claim.id] = self._monotonic() + self._settings.quiet_s
            return
        successor = None if ended is EventKind.FAILED else self._claims.finish(claim)
        self._pending.remove(claim)
        self._not_before.pop(claim.id, None)
        if successor is not None:
            self._pending.append(successor)
            self._not_before[successor.id] = self._monotonic() + self._settings.quiet_s
        name = {EventKind.REFUSED: "refused", EventKind.FAILED: "failed"}.get(ended, "done")
        self._counts = replace(self._counts, **{name: getattr(self._counts, name) + 1})
        self._count()

    def _list(self) -> bool:
        """Take a new snapshot; an inbox that cannot be listed, or is unmounted, is lost and not empty."""
        inbox = self._settings.inbox
        try:
            listing = self._listing(inbox)
            unmounted = self._was_mount and not self._is_mount(inbox)
            reason = "it is no longer mounted" if unmounted else ""
        except OSError as error:
            listing, reason = (), error.strerror or str(error)
        if reason:
            self._lose(f"The inbox {inbox} cannot be listed: {reason}.")
            return False
        if self._lost:
            self._tell(Event(kind=EventKind.SHARE_BACK, text=f"The inbox {inbox} is back."))
            self._lost = False
            self._was_mount = self._is_mount(inbox)
            self._begin_watching()
        self._claims.forget_others(listing)
        waiting = [seen for seen in listing if not self._claims.is_taken(seen)]
        self._snapshot = observe(self._snapshot, waiting, self._monotonic())
        self._in_inbox = len(waiting)
        self._count()
        return True

    def _lose(self, text: str) -> None:
        if self._once:
            raise EnvironmentFailedError(f"{text} Bring the share back, or correct [folders] in site.toml.")
        if not self._lost:
            self._tell(Event(kind=EventKind.SHARE_LOST, text=text))
            self._lost = True
            self._end_watching()

    def _require_space(self) -> None:
        free = self._free_bytes(self._settings.work)
        if free < self._settings.min_free_bytes:
            text = f"The disk of {self._settings.work} has {free:,} bytes left; nothing new is taken."
            raise EnvironmentFailedError(text)

    def _due(self, still: Still) -> bool:
        """Return whether to take a file: still and whole, or still for so long that it will not become whole.

        With `once` nobody waits for a writer: what is whole is taken at once, the rest after the quiet time.
        """
        still_s = self._monotonic() - still.since_s
        quiet = still_s >= self._settings.quiet_s
        if not quiet and not self._once:
            return False
        if quiet and (self._once or still_s >= self._settings.quiet_s + self._settings.grace_s):
            return True
        if still.seen.size > self._settings.max_bytes:
            return quiet
        return self._whole(still.seen)

    def _whole(self, seen: Seen) -> bool:
        try:
            data = copy_of(self._settings.inbox / seen.name, seen, self._settings.max_bytes)
        except OSError:
            return False  # the next listing tells whether the share or only this file is the matter
        try:
            return data is not None and self._looks_complete(data)
        except Exception:  # noqa: BLE001  the reader, which is guarded, says what is wrong with such bytes
            return True

    def _next_wait_s(self) -> float:
        """Return how long nothing can become due, at most the poll interval."""
        now = self._monotonic()
        ends = [self._not_before.get(claim.id, now) for claim in self._pending]
        ends += [still.since_s + self._settings.quiet_s for still in self._snapshot]
        soonest = min((end - now for end in ends if end > now), default=self._settings.poll_s)
        return min(self._settings.poll_s, max(soonest, _SHORTEST_WAIT_S))

    def _pause(self, error: QcReportError) -> None:
        if self._once:
            raise error
        if not self._paused:
            self._paused = True
            self._try_to_tell(EventKind.PAUSED, f"Paused, and trying again: {error.text}")
        self._wait(self._settings.pause_s)

    def _resume(self) -> None:
        if self._paused:
            self._paused = False
            self._try_to_tell(EventKind.RESUMED, "The work goes on.")

    def _try_to_tell(self, kind: EventKind, text: str) -> None:
        """Tell of a pause; on a full disk even that may fail, and must not stop the service."""
        try:
            self._tell(Event(kind=kind, text=text))
        except NOT_THE_FILES_FAULT:
            return

    def _begin_watching(self) -> None:
        self._end_watching()
        self._watching = self._watch(self._settings.inbox, self._pull)
        if self._watching is None:
            text = "The system does not tell of new files here; the inbox is listed at intervals."
            self._try_to_tell(EventKind.POLLING_ONLY, text)

    def _end_watching(self) -> None:
        if self._watching is not None:
            self._watching.stop()
            self._watching = None

    def _count(self) -> None:
        waiting = self._in_inbox + len(self._pending)
        self._counts = replace(self._counts, waiting=waiting)
        self._progress(self._counts)
