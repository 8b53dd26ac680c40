"""A site whose time moves only while the service waits; a script says what happens meanwhile."""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable
from dataclasses import dataclass, field
from pathlib import Path

from qcreport.intake.exports import ClaimedExport
from qcreport.intake.listing import Seen, scan
from qcreport.service.loop import Service
from qcreport.service.model import Counts, Event, EventKind, Outcome, OutcomeKind, ServiceSettings
from qcreport.service.stopping import Stop
from qcreport.service.wake import Watching

NOON = dt.datetime(2026, 11, 2, 12, 0, 0, tzinfo=dt.UTC)
LAST_WAIT = 400


class NoWatching:
    """A watcher that only counts."""

    def __init__(self) -> None:
        self.started = 0
        self.stopped = 0

    def stop(self) -> None:
        self.stopped += 1


@dataclass
class World:
    """The service's surroundings; `at` adds what happens when the time has come."""

    root: Path
    mounted: bool = False
    free: int = 1 << 40
    now_s: float = 0.0
    waits: int = 0
    stop: Stop = field(default_factory=Stop)
    watching: NoWatching = field(default_factory=NoWatching)
    script: list[tuple[float, Callable[[], object]]] = field(default_factory=list)
    handled: list[tuple[str, bytes]] = field(default_factory=list)
    events: list[Event] = field(default_factory=list)
    counts: list[Counts] = field(default_factory=list)
    process: Callable[[ClaimedExport], Outcome] | None = None
    listing: Callable[[Path], tuple[Seen, ...]] = scan
    looks_complete: Callable[[bytes], bool] = lambda data: not data.startswith(b"half")

    def __post_init__(self) -> None:
        self.inbox.mkdir(parents=True, exist_ok=True)

    @property
    def inbox(self) -> Path:
        return self.root / "inbox"

    @property
    def refused(self) -> Path:
        return self.root / "refused"

    def at(self, second: float, happens: Callable[[], object]) -> None:
        """Let something happen at a second."""
        self.script.append((second, happens))

    def drop(self, name: str, data: bytes = b"data") -> Path:
        """Drop a file now."""
        path = self.inbox / name
        path.write_bytes(data)
        return path

    def run(self, *, once: bool = False, until_s: float = 1000.0) -> Counts:
        """Run a new service, as a process that just started; without `once` until the time given."""
        self.at(until_s, self.stop.request)
        service = Service(
            ServiceSettings(
                inbox=self.inbox,
                refused=self.refused,
                work=self.root / "work",
                max_bytes=1000,
            ),
            process=self.process or self.report,
            tell=self.tell,
            looks_complete=self.looks_complete,
            wait=self.wait,
            pull=lambda: None,
            stop=self.stop,
            clock=lambda: NOON + dt.timedelta(seconds=self.now_s),
            monotonic=lambda: self.now_s,
            progress=self.counts.append,
            listing=lambda folder: self.listing(folder),
            is_mount=lambda _folder: self.mounted,
            free_bytes=lambda _folder: self.free,
            watch=self.watch,
        )
        return service.run(once=once)

    def report(self, export: ClaimedExport) -> Outcome:
        assert export.data is not None
        self.handled.append((export.name, export.data))
        return Outcome(kind=OutcomeKind.REPORTED, text=f"{export.shown_name} was reported.")

    def tell(self, event: Event) -> None:
        self.events.append(event)

    def kinds(self) -> list[EventKind]:
        return [event.kind for event in self.events]

    def wait(self, timeout_s: float) -> None:
        """Let time pass, up to the next thing in the script."""
        self.waits += 1
        assert self.waits < LAST_WAIT, "the service waits for ever"
        self.now_s += timeout_s
        due = [entry for entry in self.script if entry[0] <= self.now_s]
        for entry in sorted(due, key=lambda e: e[0]):
            self.script.remove(entry)
            entry[1]()

    def watch(self, _folder: Path, _pull: Callable[[], None]) -> Watching | None:
        self.watching.started += 1
        return self.watching
