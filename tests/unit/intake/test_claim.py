"""Taking files out of the inbox: once, whole, and whatever happens in between."""

from __future__ import annotations

import errno
import os
import shutil
from collections.abc import Callable
from pathlib import Path

import pytest

from qcreport.canonical import sha256_hex
from qcreport.errors import EnvironmentFailedError
from qcreport.intake.claim import Claims, new_claim_id
from qcreport.intake.exports import StillChangingError
from qcreport.intake.files import read_at_most
from qcreport.intake.journal import Claim, ClaimMode
from qcreport.intake.listing import scan

from .conftest import NOON, make_claims, only


def drop(inbox: Path, data: bytes, name: str = "export.xlsx") -> Path:
    path = inbox / name
    path.write_bytes(data)
    return path


def taken(claims: Claims, inbox: Path) -> Claim:
    claim = claims.take(inbox, only(inbox))
    assert claim is not None
    return claim


def cannot_move(monkeypatch: pytest.MonkeyPatch, number: int = errno.EXDEV) -> None:
    """Let renames out of the inbox fail as between two file systems; renames elsewhere work."""
    real = Path.rename

    def rename(self: Path, target: Path) -> Path:
        if self.parent.name == "inbox":
            raise OSError(number, os.strerror(number))
        return real(self, target)

    monkeypatch.setattr(Path, "rename", rename)


def test_a_claim_moves_the_file_and_reads_it_once(claims: Claims, inbox: Path) -> None:
    drop(inbox, b"data")
    claim = taken(claims, inbox)
    assert list(inbox.iterdir()) == []
    assert (claim.name, claim.mode, claim.claimed_at) == (
        "export.xlsx",
        ClaimMode.MOVED,
        "2026-11-02T12:00:00Z",
    )
    export = claims.load(claim)
    assert (export.data, export.sha256, export.size) == (b"data", sha256_hex(b"data"), 4)
    assert export.label == sha256_hex(b"data")[:8]
    assert export.refusal is None
    assert claim.copy.stat().st_mode & 0o777 == 0o400
    assert claim.folder.stat().st_mode & 0o777 == 0o700


def test_a_finished_claim_leaves_nothing(claims: Claims, inbox: Path, tmp_path: Path) -> None:
    drop(inbox, b"data")
    claim = taken(claims, inbox)
    claims.load(claim)
    assert claims.finish(claim) is None
    assert list((tmp_path / "work/claims").iterdir()) == []


def test_a_file_that_changed_or_went_since_the_listing_is_not_taken(claims: Claims, inbox: Path) -> None:
    path = drop(inbox, b"data")
    seen = only(inbox)
    path.write_bytes(b"data and more")
    assert claims.take(inbox, seen) is None
    path.unlink()
    assert claims.take(inbox, seen) is None
    assert claims.leftovers() == ()


def test_a_file_that_goes_while_it_is_moved_is_not_taken(
    claims: Claims, inbox: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    drop(inbox, b"data")
    cannot_move(monkeypatch, errno.ENOENT)
    assert claims.take(inbox, only(inbox)) is None


def test_a_writer_that_goes_on_after_the_move_is_waited_for(claims: Claims, inbox: Path) -> None:
    with drop(inbox, b"half").open("ab") as writer:
        claim = taken(claims, inbox)
        writer.write(b" and half")
        writer.flush()
        with pytest.raises(StillChangingError) as changing:
            claims.load(claim)
    assert claims.load(changing.value.claim).data == b"half and half"
    assert make_claims(inbox.parent).load(claims.leftovers()[0]).data == b"half and half"


def test_a_writer_that_goes_on_after_the_reading_makes_a_second_export(claims: Claims, inbox: Path) -> None:
    with drop(inbox, b"first").open("ab") as writer:
        claim = taken(claims, inbox)
        assert claims.load(claim).data == b"first"
        writer.write(b" and second")
    assert claims.load(claim).data == b"first"
    successor = claims.finish(claim)
    assert successor is not None
    assert successor.name == "export.xlsx"
    assert claims.load(successor).data == b"first and second"
    assert [left.id for left in claims.leftovers()] == [successor.id]


def test_a_name_that_is_no_utf8_comes_back_from_the_journal(claims: Claims, inbox: Path) -> None:
    name = os.fsdecode(b"caf\xe9\n.xlsx")
    drop(inbox, b"data", name)
    taken(claims, inbox)
    (left,) = make_claims(inbox.parent).leftovers()
    assert left.name == name
    assert claims.load(left).shown_name == r"caf\udce9\n.xlsx"
    assert claims.load(left).name == name


def test_an_empty_file_is_refused(claims: Claims, inbox: Path) -> None:
    drop(inbox, b"")
    export = claims.load(taken(claims, inbox))
    assert export.refusal is not None
    assert export.refusal.code == "empty_file"
    assert export.sha256 == sha256_hex(b"")


def test_a_file_over_the_limit_is_refused_unread(
    claims: Claims, inbox: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    with drop(inbox, b"x").open("r+b") as stream:
        stream.truncate(1 << 40)
    export = claims.load(taken(claims, inbox))
    assert export.refusal is not None
    assert export.refusal.code == "too_large"
    assert "1,099,511,627,776 bytes" in export.refusal.found
    assert "1,000 bytes" in export.refusal.expected
    assert (export.data, export.sha256, export.size) == (None, None, 1 << 40)
    assert len(export.label) == 8


def test_the_limit_itself_is_read(claims: Claims, inbox: Path) -> None:
    drop(inbox, b"x" * 1000)
    assert claims.load(taken(claims, inbox)).refusal is None
    drop(inbox, b"x" * 1001)
    refusal = claims.load(taken(claims, inbox)).refusal
    assert refusal is not None
    assert refusal.code == "too_large"


def _link(path: Path) -> None:
    path.symlink_to("/etc/hostname")


@pytest.mark.parametrize("replace", [_link, os.mkfifo, Path.mkdir])
def test_what_is_no_plain_file_is_neither_followed_nor_waited_for(
    claims: Claims, inbox: Path, replace: Callable[[Path], None]
) -> None:
    drop(inbox, b"data")
    claim = taken(claims, inbox)
    claim.original.unlink()
    replace(claim.original)
    refusal = claims.load(claim).refusal
    assert refusal is not None
    assert refusal.code == "not_a_workbook"


@pytest.mark.parametrize("number", [errno.EXDEV, errno.EACCES, errno.EROFS])
def test_an_inbox_that_cannot_be_moved_from_is_copied_and_remembered(
    claims: Claims, inbox: Path, monkeypatch: pytest.MonkeyPatch, number: int
) -> None:
    path = drop(inbox, b"data")
    cannot_move(monkeypatch, number)
    claim = taken(claims, inbox)
    assert claim.mode is ClaimMode.COPIED
    assert claims.load(claim).data == b"data"
    assert claims.finish(claim) is None
    assert path.read_bytes() == b"data"
    for process in (claims, make_claims(inbox.parent)):
        assert process.is_taken(only(inbox))
        assert process.leftovers() == ()


def test_a_copied_file_is_taken_again_only_with_other_content(
    claims: Claims, inbox: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = drop(inbox, b"data")
    cannot_move(monkeypatch)
    claims.finish(taken(claims, inbox))
    os.utime(path, ns=(1, 1))
    assert not claims.is_taken(only(inbox))
    assert claims.take(inbox, only(inbox)) is None
    assert claims.is_taken(only(inbox))
    path.write_bytes(b"other data")
    assert claims.load(taken(claims, inbox)).data == b"other data"


def test_the_memory_of_copied_files_ends_with_the_file(
    claims: Claims, inbox: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    drop(inbox, b"data")
    cannot_move(monkeypatch)
    seen = only(inbox)
    claims.finish(taken(claims, inbox))
    claims.forget_others(scan(inbox))
    assert claims.is_taken(seen)
    claims.forget_others(())
    assert not claims.is_taken(seen)
    assert not make_claims(inbox.parent).is_taken(seen)


def test_a_damaged_memory_is_none(claims: Claims, inbox: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    drop(inbox, b"data")
    cannot_move(monkeypatch)
    claims.finish(taken(claims, inbox))
    for path in (inbox.parent / "work/taken").iterdir():
        path.write_bytes(b"[")
    assert not make_claims(inbox.parent).is_taken(only(inbox))


def test_a_copied_file_over_the_limit_is_refused_and_its_copy_kept_small(
    claims: Claims, inbox: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    with drop(inbox, b"x").open("r+b") as stream:
        stream.truncate(1 << 40)
    cannot_move(monkeypatch)
    claim = taken(claims, inbox)
    export = claims.load(claim)
    assert export.refusal is not None
    assert export.refusal.code == "too_large"
    assert claim.copy.stat().st_size == 1 << 20


def test_other_failures_of_the_system_are_told_and_lose_nothing(
    claims: Claims, inbox: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = drop(inbox, b"data")
    with monkeypatch.context() as patch:
        cannot_move(patch, errno.ENOSPC)
        with pytest.raises(EnvironmentFailedError, match="No space left"):
            claims.take(inbox, only(inbox))
    assert path.read_bytes() == b"data"
    assert claims.leftovers() == ()
    assert claims.load(taken(claims, inbox)).data == b"data"


def test_a_claim_set_aside_is_kept_with_its_reason(claims: Claims, inbox: Path, tmp_path: Path) -> None:
    drop(inbox, b"data")
    claim = taken(claims, inbox)
    folder = claims.set_aside(claim, "Traceback \udcff")
    assert folder == tmp_path / "work/failed" / claim.id
    assert (folder / "original").read_bytes() == b"data"
    assert (folder / "reason.txt").read_text() == r"Traceback \udcff"
    assert claims.leftovers() == ()


def test_a_claim_without_a_readable_journal_is_kept_aside(
    claims: Claims, inbox: Path, tmp_path: Path
) -> None:
    drop(inbox, b"data")
    claim = taken(claims, inbox)
    (claim.folder / "journal.json").write_bytes(b"{}")
    (tmp_path / "work/claims/begun").mkdir()
    (tmp_path / "work/claims/begun/.1234.tmp").write_bytes(b"{")
    (tmp_path / "work/claims/file").write_bytes(b"")
    assert claims.leftovers() == ()
    assert (tmp_path / "work/failed" / claim.id / "original").read_bytes() == b"data"
    assert not (tmp_path / "work/claims/begun").exists()


def _denied(*_: object, **__: object) -> None:
    raise PermissionError(errno.EACCES, "Permission denied")


@pytest.mark.parametrize("copies", [False, True])
def test_a_file_that_must_not_be_read_is_refused_and_stops_nobody(
    claims: Claims, inbox: Path, monkeypatch: pytest.MonkeyPatch, copies: bool
) -> None:
    drop(inbox, b"data")
    if copies:
        cannot_move(monkeypatch)
    with monkeypatch.context() as patch:
        patch.setattr("qcreport.intake.exports.open_plain", _denied)
        export = claims.load(taken(claims, inbox))
    assert export.refusal is not None
    assert export.refusal.code == "damaged_or_incomplete"
    assert (export.data, export.size) == (None, 4)


def _remove(path: Path) -> None:
    path.unlink()


def _pipe(path: Path) -> None:
    path.unlink()
    os.mkfifo(path)


@pytest.mark.parametrize("change", [_remove, _pipe])
def test_a_file_that_goes_while_it_is_copied_is_not_taken(
    claims: Claims, inbox: Path, monkeypatch: pytest.MonkeyPatch, change: Callable[[Path], None]
) -> None:
    path = drop(inbox, b"data")

    def rename(self: Path, _target: Path) -> Path:
        change(path)
        raise OSError(errno.EXDEV, "Invalid cross-device link")

    monkeypatch.setattr(Path, "rename", rename)
    assert claims.take(inbox, only(inbox)) is None
    assert list((inbox.parent / "work/claims").iterdir()) == []


def test_a_file_that_shrinks_while_it_is_read_is_waited_for(
    claims: Claims, inbox: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    drop(inbox, b"data")
    claim = taken(claims, inbox)
    with monkeypatch.context() as patch:
        patch.setattr("qcreport.intake.exports.read_at_most", lambda _descriptor, _size: b"da")
        with pytest.raises(StillChangingError):
            claims.load(claim)
    assert claims.load(claim).data == b"data"


def test_reading_ends_where_the_file_does(inbox: Path) -> None:
    with drop(inbox, b"data").open("rb") as stream:
        assert read_at_most(stream.fileno(), 100) == b"data"


def test_copies_left_by_a_kill_are_remembered_and_what_was_handled_is_cleared(
    claims: Claims, inbox: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    drop(inbox, b"data")
    cannot_move(monkeypatch)
    claim = taken(claims, inbox)
    shutil.rmtree(inbox.parent / "work/taken")
    claim.folder.with_name(".gone-job-0").mkdir()
    again = make_claims(inbox.parent)
    assert not again.is_taken(only(inbox))
    assert [left.id for left in again.leftovers()] == [claim.id]
    assert again.is_taken(only(inbox))
    assert [path.name for path in claim.folder.parent.iterdir()] == [claim.id]


def test_an_original_that_is_gone_has_no_successor(claims: Claims, inbox: Path) -> None:
    drop(inbox, b"data")
    claim = taken(claims, inbox)
    claims.load(claim)
    claim.original.unlink()
    assert claims.finish(claim) is None


class Killed(BaseException):
    """The process ends here."""


@pytest.mark.parametrize("copies", [False, True])
@pytest.mark.parametrize("step", range(14))
def test_a_kill_at_any_step_loses_nothing_and_doubles_nothing(
    inbox: Path, monkeypatch: pytest.MonkeyPatch, step: int, copies: bool
) -> None:
    """Kill before the step-th effect on the disk, start anew, and count what was handled."""
    drop(inbox, b"data")
    site = inbox.parent
    if copies:
        cannot_move(monkeypatch)
    handled: list[str] = []

    def handle(claims: Claims, claim: Claim | None) -> None:
        if claim is not None:
            assert claims.load(claim).data == b"data"
            handled.append(claim.id)
            claims.finish(claim)

    with monkeypatch.context() as patch:
        _kill_before(patch, step)
        try:
            claims = make_claims(site)
            handle(claims, claims.take(inbox, only(inbox)))
        except Killed:
            pass
    claims = make_claims(site)
    for left in claims.leftovers():
        handle(claims, left)
    for seen in scan(inbox):
        if not claims.is_taken(seen):
            handle(claims, claims.take(inbox, seen))
    assert len(set(handled)) == 1
    assert claims.leftovers() == ()
    assert [path.name for path in inbox.iterdir()] == (["export.xlsx"] if copies else [])


def _kill_before(patch: pytest.MonkeyPatch, step: int) -> None:
    left = [step]

    def counted(real: Callable[..., object]) -> Callable[..., object]:
        def effect(*args: object, **kwargs: object) -> object:
            left[0] -= 1
            if left[0] < 0:
                raise Killed
            return real(*args, **kwargs)

        return effect

    for owner, name in (
        (Path, "mkdir"),
        (Path, "rename"),
        (Path, "replace"),
        (os, "fsync"),
        (shutil, "rmtree"),
    ):
        patch.setattr(owner, name, counted(getattr(owner, name)))


def test_ids_sort_by_time() -> None:
    assert new_claim_id(NOON) < new_claim_id(NOON.replace(hour=13))
    assert len({new_claim_id(NOON) for _ in range(50)}) == 50
