"""What the service takes, when, and what it makes of trouble."""

from __future__ import annotations

import errno
import os
from itertools import pairwise
from pathlib import Path

import pytest

from qcreport.errors import ConfigError, EnvironmentFailedError, ExportRefusedError, Fault, LedgerError
from qcreport.intake.claim import Claims
from qcreport.intake.exports import ClaimedExport
from qcreport.intake.listing import Seen, scan
from qcreport.service.model import Event, EventKind, Outcome, OutcomeKind
from qcreport.service.stopping import StopNowError

from .world import NOON, World


@pytest.fixture
def world(tmp_path: Path) -> World:
    return World(tmp_path)


def left(world: World) -> list[str]:
    """Return what is still claimed."""
    return sorted(path.name for path in (world.root / "work/claims").iterdir())


def test_a_file_is_taken_after_the_quiet_time(world: World) -> None:
    world.at(10, lambda: world.drop("a.xlsx"))
    taken_at: list[float] = []

    def process(export: ClaimedExport) -> Outcome:
        taken_at.append(world.now_s)
        return world.report(export)

    world.process = process
    counts = world.run(until_s=60)
    assert world.handled == [("a.xlsx", b"data")]
    assert 15 <= taken_at[0] <= 19
    assert (counts.done, counts.waiting, counts.seen) == (1, 0, 1)
    assert world.kinds() == [EventKind.STARTED, EventKind.HANDLED, EventKind.STOPPED]
    assert left(world) == []


def test_a_file_that_grows_is_taken_when_it_is_whole(world: World) -> None:
    def grow(data: bytes) -> None:
        with (world.inbox / "a.xlsx").open("ab") as stream:
            stream.write(data)

    world.drop("a.xlsx", b"1")
    for second in range(2, 20, 2):
        world.at(second, lambda second=second: grow(str(second % 10).encode()))
    world.run(until_s=60)
    assert world.handled == [("a.xlsx", b"1246802468")]


def test_a_still_file_that_is_incomplete_waits_for_the_grace_time(world: World) -> None:
    world.drop("a.xlsx", b"half")
    world.run(until_s=60)
    assert world.handled == []
    assert world.counts[-1].waiting == 1
    world.stop.requested = False
    world.run(until_s=200)
    assert world.handled == [("a.xlsx", b"half")]


def test_an_incomplete_file_that_is_filled_later_is_taken_whole(world: World) -> None:
    path = world.drop("a.xlsx", b"half")
    world.at(30, lambda: path.write_bytes(b"full"))
    world.run(until_s=60)
    assert world.handled == [("a.xlsx", b"full")]


def test_once_takes_whole_files_at_once_and_ends(world: World) -> None:
    for name in ("b.xlsx", "a.xlsx", ".hidden", "x.part"):
        world.drop(name)
    counts = world.run(once=True)
    assert [name for name, _ in world.handled] == ["a.xlsx", "b.xlsx"]
    assert counts.done == 2
    assert world.now_s < 1
    assert world.watching.started == 0


def test_once_takes_incomplete_files_after_the_quiet_time(world: World) -> None:
    world.drop("a.xlsx", b"half")
    world.run(once=True)
    assert world.handled == [("a.xlsx", b"half")]
    assert 5 <= world.now_s < 10


def test_once_with_an_empty_inbox_ends(world: World) -> None:
    assert world.run(once=True).seen == 0
    assert world.kinds() == [EventKind.STARTED, EventKind.STOPPED]


def test_a_check_that_fails_on_odd_bytes_leaves_them_to_the_reader(world: World) -> None:
    def fails(_data: bytes) -> bool:
        raise RuntimeError("odd")

    world.looks_complete = fails
    world.drop("a.xlsx")
    world.run(once=True)
    assert len(world.handled) == 1


def test_a_file_that_cannot_be_looked_into_waits_and_stops_nobody(
    world: World, monkeypatch: pytest.MonkeyPatch
) -> None:
    def stale(*_: object) -> bytes:
        raise OSError(errno.ESTALE, "Stale file handle")

    monkeypatch.setattr("qcreport.service.loop.copy_of", stale)
    world.drop("a.xlsx")
    world.run(until_s=50)
    assert world.handled == []
    assert EventKind.PAUSED not in world.kinds()


def test_refusals_are_put_and_counted(world: World) -> None:
    world.drop("empty.xlsx", b"")
    world.drop("large.xlsx", b"x" * 1001)
    world.drop("odd.xlsx", b"odd")

    def process(export: ClaimedExport) -> Outcome:
        raise ExportRefusedError(
            "error_cells", file=export.name, where="A1", found="#N/A", expected="a number", next_step="mend"
        )

    world.process = process
    counts = world.run(once=True)
    assert (counts.done, counts.refused, counts.seen) == (0, 3, 3)
    refusals = [e.refusal.code for e in world.events if e.refusal is not None]
    assert sorted(refusals) == ["empty_file", "error_cells", "too_large"]
    assert len(list(world.refused.glob("20261102-????????/why.txt"))) == 3
    assert left(world) == []


def test_a_refusal_written_by_the_work_itself_is_counted(world: World) -> None:
    world.process = lambda _export: Outcome(kind=OutcomeKind.REFUSED, text="refused by two plans")
    world.drop("a.xlsx")
    assert world.run(once=True).refused == 1
    assert not world.refused.exists()


@pytest.mark.parametrize(
    "error", [ValueError("a fault"), OSError(errno.ENOENT, "No such file"), LedgerError("x")]
)
def test_a_fault_sets_one_file_aside_and_the_rest_goes_on(world: World, error: Exception) -> None:
    world.drop("a.xlsx", b"bad")
    world.drop("b.xlsx")

    def process(export: ClaimedExport) -> Outcome:
        if export.data == b"bad":
            raise error
        return world.report(export)

    world.process = process
    counts = world.run(once=True)
    assert (counts.done, counts.failed) == (1, 1)
    (folder,) = (world.root / "work/failed").iterdir()
    assert (folder / "original").read_bytes() == b"bad"
    assert type(error).__name__ in (folder / "reason.txt").read_text()
    (event,) = [e for e in world.events if e.kind is EventKind.FAILED]
    assert event.folder == folder
    assert left(world) == []


@pytest.mark.parametrize(
    "error",
    [
        EnvironmentFailedError("disk full"),
        ConfigError((Fault(text="wrong", file="site.toml"),)),
        OSError(errno.ENOSPC, "No space left on device"),
    ],
)
def test_a_failure_of_the_machine_pauses_and_is_tried_again(world: World, error: Exception) -> None:
    world.drop("a.xlsx")
    tries: list[float] = []

    def process(export: ClaimedExport) -> Outcome:
        tries.append(world.now_s)
        if len(tries) < 4:
            raise error
        return world.report(export)

    world.process = process
    counts = world.run(until_s=200)
    assert len(tries) == 4
    assert all(later - earlier >= 30 for earlier, later in pairwise(tries))
    assert counts.done == 1
    assert world.kinds().count(EventKind.PAUSED) == 1
    assert world.kinds().count(EventKind.RESUMED) == 1


def test_once_tells_a_failure_of_the_machine_and_keeps_the_file(world: World) -> None:
    def full(_export: ClaimedExport) -> Outcome:
        raise EnvironmentFailedError("disk full")

    world.process = full
    world.drop("a.xlsx")
    with pytest.raises(EnvironmentFailedError, match="disk full"):
        world.run(once=True)
    assert len(left(world)) == 1
    world.process = None
    world.run(once=True)
    assert world.handled == [("a.xlsx", b"data")]


def test_a_full_disk_is_noticed_before_anything_is_taken(world: World) -> None:
    world.drop("a.xlsx")
    world.free = 1000
    world.at(100, lambda: setattr(world, "free", 1 << 40))
    world.run(until_s=90)
    assert (world.inbox / "a.xlsx").exists()
    world.stop.requested = False
    world.run(until_s=300)
    assert world.handled == [("a.xlsx", b"data")]


def test_a_pause_that_cannot_even_be_told_stops_nobody(world: World) -> None:
    world.drop("a.xlsx")
    told = world.tell

    def tell(event: Event) -> None:
        if event.kind is EventKind.PAUSED:
            raise EnvironmentFailedError("the ledger's disk is full too")
        told(event)

    def process(export: ClaimedExport) -> Outcome:
        if world.now_s < 60:
            raise EnvironmentFailedError("disk full")
        return world.report(export)

    world.tell = tell  # type: ignore[method-assign]
    world.process = process
    assert world.run(until_s=200).done == 1


def test_a_vanished_inbox_is_an_alarm_once_and_its_return_too(world: World) -> None:
    away = world.root / "away"
    world.drop("a.xlsx")
    world.at(3, lambda: world.inbox.rename(away))
    world.at(60, lambda: away.rename(world.inbox))
    world.run(until_s=100)
    assert world.kinds().count(EventKind.SHARE_LOST) == 1
    assert world.kinds().count(EventKind.SHARE_BACK) == 1
    assert world.handled == [("a.xlsx", b"data")]
    assert (world.watching.started, world.watching.stopped) == (2, 2)


def test_an_unmounted_share_is_lost_and_not_empty(world: World) -> None:
    world.mounted = True
    world.at(10, lambda: setattr(world, "mounted", False))
    world.at(20, lambda: setattr(world, "mounted", True))
    world.run(until_s=40)
    assert [k for k in world.kinds() if "share" in k] == [EventKind.SHARE_LOST, EventKind.SHARE_BACK]


def test_once_without_an_inbox_is_an_error(world: World) -> None:
    world.inbox.rmdir()
    with pytest.raises(EnvironmentFailedError, match="cannot be listed"):
        world.run(once=True)


def test_only_one_service_a_site(world: World) -> None:
    other = World(world.root)
    refusal: list[str] = []

    def second() -> None:
        with pytest.raises(EnvironmentFailedError) as error:
            other.run(once=True)
        refusal.append(error.value.text)

    world.at(3, second)
    world.run(until_s=10)
    assert f"process {os.getpid()}, since 2026-11-02T12:00:00Z" in refusal[0]
    assert other.events == []
    other.run(once=True)


def test_a_stop_between_two_files_leaves_the_second_in_the_inbox(world: World) -> None:
    for name in ("a.xlsx", "b.xlsx"):
        world.drop(name)

    def process(export: ClaimedExport) -> Outcome:
        world.stop.request()
        return world.report(export)

    world.process = process
    world.run(once=True)
    assert [path.name for path in world.inbox.iterdir()] == ["b.xlsx"]
    assert world.kinds()[-1] is EventKind.STOPPED


def test_a_stop_in_the_middle_keeps_the_claim_for_the_next_start(world: World) -> None:
    def broken_off(_export: ClaimedExport) -> Outcome:
        raise StopNowError

    world.process = broken_off
    world.drop("a.xlsx")
    world.run()
    assert world.kinds()[-1] is EventKind.STOPPED
    assert len(left(world)) == 1
    next_start = World(world.root)
    next_start.drop("b.xlsx")
    next_start.run(once=True)
    assert next_start.handled == [("a.xlsx", b"data"), ("b.xlsx", b"data")]


def test_a_stop_between_two_claims_of_an_earlier_process_keeps_the_second(world: World) -> None:
    earlier = Claims(world.root / "work", max_bytes=1000, clock=lambda: NOON)
    for name in ("a.xlsx", "b.xlsx"):
        world.drop(name)
        assert earlier.take(world.inbox, scan(world.inbox)[0]) is not None

    def process(export: ClaimedExport) -> Outcome:
        world.stop.request()
        return world.report(export)

    world.process = process
    world.run()
    assert len(world.handled) == 1
    assert len(left(world)) == 1


def test_a_file_that_changes_while_it_is_looked_at_is_taken_later(world: World) -> None:
    path = world.drop("a.xlsx", b"first")
    looks: list[bytes] = []

    def looks_complete(data: bytes) -> bool:
        if not looks:
            path.write_bytes(b"and more")
        looks.append(data)
        return True

    world.looks_complete = looks_complete
    world.run(once=True)
    assert world.handled == [("a.xlsx", b"and more")]
    assert looks == [b"first", b"and more"]


def test_a_late_writer_gets_its_file_handled_again(world: World) -> None:
    stream = world.drop("a.xlsx", b"first").open("ab")

    def process(export: ClaimedExport) -> Outcome:
        if not world.handled:
            stream.write(b" and second")
            stream.close()
        return world.report(export)

    world.process = process
    counts = world.run(once=True)
    assert world.handled == [("a.xlsx", b"first"), ("a.xlsx", b"first and second")]
    assert (counts.done, counts.waiting) == (2, 0)


def test_a_writer_that_goes_on_while_the_file_is_claimed_is_waited_for(world: World) -> None:
    path = world.drop("a.xlsx", b"first")
    stream = path.open("ab")
    listed = scan(world.inbox)

    def then_write(_folder: Path) -> tuple[Seen, ...]:
        return listed if path.exists() else ()

    real = Path.rename

    def rename(self: Path, target: Path) -> Path:
        real(self, target)
        if self == path:
            stream.write(b" more")
            stream.close()
        return target

    world.listing = then_write
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(Path, "rename", rename)
        world.run(once=True)
    assert world.handled == [("a.xlsx", b"first more")]
    assert world.now_s >= 5


def test_a_copied_file_is_handled_once_and_does_not_keep_once_waiting(
    world: World, monkeypatch: pytest.MonkeyPatch
) -> None:
    real = Path.rename

    def rename(self: Path, target: Path) -> Path:
        if self.parent == world.inbox:
            raise OSError(errno.EROFS, "Read-only file system")
        return real(self, target)

    monkeypatch.setattr(Path, "rename", rename)
    world.drop("a.xlsx")
    world.run(once=True)
    world.run(once=True)
    assert world.handled == [("a.xlsx", b"data")]
    assert (world.inbox / "a.xlsx").exists()


def test_without_a_watcher_the_inbox_is_polled(world: World, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(world, "watch", lambda _folder, _pull: None)
    world.drop("a.xlsx")
    world.run(until_s=30)
    assert EventKind.POLLING_ONLY in world.kinds()
    assert len(world.handled) == 1


class Killed(BaseException):
    """The process ends here."""


@pytest.mark.parametrize("refuses", [False, True])
@pytest.mark.parametrize("point", ["before", "after", "told", "finish"])
def test_a_kill_around_the_work_repeats_it_for_the_same_claim(
    world: World, monkeypatch: pytest.MonkeyPatch, point: str, refuses: bool
) -> None:
    claims: list[str] = []
    killed = [False]

    def kill(at: str) -> None:
        if at == point and not killed[0]:
            killed[0] = True
            raise Killed

    def process(export: ClaimedExport) -> Outcome:
        kill("before")
        claims.append(export.claim.id)
        kill("after")
        if refuses:
            raise ExportRefusedError("x", file="a", where="", found="", expected="", next_step="")
        return world.report(export)

    def tell(event: Event) -> None:
        world.events.append(event)
        if event.claim is not None:
            kill("told")

    def finish(self: object, claim: object) -> None:
        kill("finish")
        return real(self, claim)

    real = Claims.finish
    monkeypatch.setattr(Claims, "finish", finish)
    world.process = process
    world.tell = tell  # type: ignore[method-assign]
    world.drop("a.xlsx")
    with pytest.raises(Killed):
        world.run(once=True)
    world.run(once=True)
    assert len(set(claims)) == 1
    assert left(world) == []
    assert len(list(world.refused.glob("*/why.txt"))) == (1 if refuses else 0)
    assert list(world.inbox.iterdir()) == []
