"""The archive: once, read-only, and checked whenever it is read."""

from __future__ import annotations

import errno
import os
from pathlib import Path

import pytest

from qcreport.canonical import sha256_hex
from qcreport.durable import clear_temporaries, make_folder
from qcreport.errors import EnvironmentFailedError, LedgerError
from qcreport.records.archive import Archive

DIGEST = sha256_hex(b"data")


@pytest.fixture
def archive(tmp_path: Path) -> Archive:
    return Archive(tmp_path / "archive")


def test_bytes_are_kept_once_under_their_digest_read_only(archive: Archive) -> None:
    path = archive.store(b"data")
    assert path == archive.root / DIGEST[:2] / f"{DIGEST[2:]}.bin"
    before = path.stat()
    assert before.st_mode & 0o777 == 0o444
    assert archive.store(b"data") == path
    assert path.stat().st_ino == before.st_ino
    assert archive.read(DIGEST) == b"data"
    assert [p.name for p in path.parent.iterdir()] == [path.name]


def test_a_file_that_was_changed_is_neither_read_nor_rewritten(archive: Archive) -> None:
    path = archive.store(b"data")
    path.chmod(0o644)
    path.write_bytes(b"other")
    with pytest.raises(LedgerError, match="no longer matches"):
        archive.read(DIGEST)
    with pytest.raises(LedgerError, match="no longer matches"):
        archive.store(b"data")
    assert path.read_bytes() == b"other"


def test_what_is_missing_or_no_plain_file_is_told(archive: Archive) -> None:
    with pytest.raises(LedgerError, match="lacks"):
        archive.read(DIGEST)
    path = archive.path_of(DIGEST)
    path.parent.mkdir(parents=True)
    path.symlink_to("/etc/hostname")
    with pytest.raises(LedgerError, match="not a plain file"):
        archive.read(DIGEST)
    path.unlink()
    path.mkdir()
    with pytest.raises(LedgerError, match="not a plain file"):
        archive.read(DIGEST)
    path.rmdir()
    os.mkfifo(path)
    with pytest.raises(LedgerError, match="no longer matches"):
        archive.read(DIGEST)


@pytest.mark.parametrize("name", ["", "../../etc/passwd", DIGEST.upper(), DIGEST[:-1], DIGEST + "\n"])
def test_only_digests_are_looked_up(archive: Archive, name: str) -> None:
    with pytest.raises(LedgerError, match="is not a SHA-256"):
        archive.read(name)


@pytest.mark.parametrize("step", ["open", "fsync", "replace"])
def test_a_disk_that_refuses_leaves_nothing_half_written(
    archive: Archive, monkeypatch: pytest.MonkeyPatch, step: str
) -> None:
    def refuse(*_: object, **__: object) -> None:
        raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))

    make_folder(archive.path_of(DIGEST).parent)
    with monkeypatch.context() as patch:
        patch.setattr(Path if step == "replace" else os, step, refuse)
        with pytest.raises(EnvironmentFailedError, match="No space left"):
            archive.store(b"data")
    assert list(archive.path_of(DIGEST).parent.iterdir()) == []
    archive.store(b"data")


def test_a_file_that_cannot_be_read_is_the_machines_failure(
    archive: Archive, monkeypatch: pytest.MonkeyPatch
) -> None:
    def refuse(*_: object, **__: object) -> None:
        raise OSError(errno.EIO, os.strerror(errno.EIO))

    archive.store(b"data")
    monkeypatch.setattr(os, "open", refuse)
    with pytest.raises(EnvironmentFailedError, match="Input/output error"):
        archive.read(DIGEST)


def test_a_folder_in_the_way_is_told(tmp_path: Path) -> None:
    (tmp_path / "file").write_bytes(b"")
    with pytest.raises(EnvironmentFailedError, match="could not be made"):
        make_folder(tmp_path / "file")


def test_only_old_leftovers_of_killed_processes_are_cleared(
    archive: Archive, monkeypatch: pytest.MonkeyPatch
) -> None:
    kept = archive.store(b"data")
    old, young, link = (kept.with_name(name) for name in (".old.tmp", ".young.tmp", ".link.tmp"))
    for path, changed in ((old, 1000), (young, 3000)):
        path.write_bytes(b"half")
        os.utime(path, (changed, changed))
    link.symlink_to(kept)
    with monkeypatch.context() as patch:
        patch.setattr(Path, "unlink", _refuse)
        assert clear_temporaries(archive.root, before_s=2000) == 0
    assert clear_temporaries(archive.root, before_s=2000) == 1
    assert {path.name for path in kept.parent.iterdir()} == {kept.name, young.name, link.name}
    assert archive.read(DIGEST) == b"data"


def _refuse(_path: Path) -> None:
    raise PermissionError
