"""What counts as a file in the inbox, and when it is still."""

from __future__ import annotations

import os
import socket
from pathlib import Path

import pytest

from qcreport.intake.listing import Seen, ignored_name, observe, ready, scan


def seen(name: str, size: int = 10, mtime_ns: int = 1, inode: int = 7) -> Seen:
    return Seen(name=name, size=size, mtime_ns=mtime_ns, inode=inode)


@pytest.mark.parametrize(
    "name",
    [
        ".hidden.xlsx",
        "~$open.xlsx",
        "~wrl0003.tmp",
        "x.xlsx.part",
        "x.xlsx.PARTIAL",
        "x.tmp",
        "x.xlsx.crdownload",
        "x.xlsx~",
        "Thumbs.db",
        "desktop.ini",
        "x.xlsx.filepart",
    ],
)
def test_hidden_lock_and_half_written_names_are_left_alone(name: str) -> None:
    assert ignored_name(name)


@pytest.mark.parametrize("name", ["x.xlsx", "part.xlsx", "tmp.csv", "a~b.xlsx", "LAP.XLSX", "no ending"])
def test_other_names_are_exports(name: str) -> None:
    assert not ignored_name(name)


def test_only_plain_files_are_listed(tmp_path: Path) -> None:
    (tmp_path / "b.xlsx").write_bytes(b"12345")
    (tmp_path / "a.xlsx").write_bytes(b"1")
    (tmp_path / ".x").write_bytes(b"1")
    (tmp_path / "folder.xlsx").mkdir()
    (tmp_path / "link.xlsx").symlink_to(tmp_path / "b.xlsx")
    os.mkfifo(tmp_path / "pipe.xlsx")
    with socket.socket(socket.AF_UNIX) as s:
        s.bind(str(tmp_path / "s.xlsx"))
        found = scan(tmp_path)
    assert [(f.name, f.size) for f in found] == [("a.xlsx", 1), ("b.xlsx", 5)]
    assert found[0].inode == (tmp_path / "a.xlsx").stat().st_ino


def test_a_folder_that_is_gone_is_an_error_and_not_an_empty_one(tmp_path: Path) -> None:
    with pytest.raises(FileNotFoundError):
        scan(tmp_path / "gone")


def test_a_file_gone_since_the_listing_is_left_out(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    class Vanishing:
        name = "gone.xlsx"

        def is_file(self, *, follow_symlinks: bool) -> bool:
            return True

        def stat(self, *, follow_symlinks: bool) -> os.stat_result:
            raise FileNotFoundError

    class Listing(list[Vanishing]):
        def __enter__(self) -> Listing:
            return self

        def __exit__(self, *_: object) -> None: ...

    monkeypatch.setattr("os.scandir", lambda _folder: Listing([Vanishing()]))
    assert scan(tmp_path) == ()


def test_a_file_is_ready_when_it_has_been_still_for_the_quiet_time() -> None:
    first = observe((), [seen("a")], 100.0)
    assert ready(first, 5.0, 104.9) == ()
    second = observe(first, [seen("a"), seen("b")], 104.0)
    assert [s.seen.name for s in ready(second, 5.0, 105.0)] == ["a"]


@pytest.mark.parametrize(
    "changed", [seen("a", size=11), seen("a", mtime_ns=0), seen("a", mtime_ns=2), seen("a", inode=8)]
)
def test_any_change_begins_the_quiet_time_anew_even_a_time_that_goes_back(changed: Seen) -> None:
    first = observe((), [seen("a")], 100.0)
    second = observe(first, [changed], 104.0)
    assert ready(second, 5.0, 106.0) == ()
    assert ready(second, 5.0, 109.0) != ()


def test_a_file_that_goes_and_comes_back_is_new() -> None:
    first = observe((), [seen("a")], 100.0)
    back = observe(observe(first, [], 101.0), [seen("a")], 102.0)
    assert back[0].since_s == 102.0
