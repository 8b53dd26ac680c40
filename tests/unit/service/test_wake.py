"""What ends the waiting early."""

from __future__ import annotations

import sys
import threading
import time
from pathlib import Path

import pytest

from qcreport.service.wake import Wake, watch_folder


def waited(wake: Wake, timeout_s: float) -> float:
    begun = time.monotonic()
    wake.wait(timeout_s)
    return time.monotonic() - begun


def test_a_pull_ends_one_waiting_however_often_it_came() -> None:
    settled: list[int] = []
    wake = Wake(settle=lambda: settled.append(1))
    for _ in range(100_000):
        wake.pull()
    assert waited(wake, 60) < 30
    assert waited(wake, 0) < 30
    assert settled == [1]
    wake.close()
    wake.pull()


def test_another_thread_may_pull() -> None:
    wake = Wake(settle=lambda: None)
    thread = threading.Thread(target=wake.pull)
    thread.start()
    assert waited(wake, 60) < 30
    thread.join()
    wake.close()


def test_files_in_the_folder_pull_and_our_own_reading_does_not(tmp_path: Path) -> None:
    pulled = threading.Event()
    (tmp_path / "before.xlsx").write_bytes(b"x")
    watching = watch_folder(tmp_path, pulled.set)
    assert watching is not None
    try:
        (tmp_path / "before.xlsx").read_bytes()
        assert len(list(tmp_path.iterdir())) == 1
        assert not pulled.wait(0.3)
        (tmp_path / "a.xlsx").write_bytes(b"x")
        assert pulled.wait(30)
    finally:
        watching.stop()


def test_a_folder_that_cannot_be_watched_is_no_error(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    assert watch_folder(tmp_path / "gone", lambda: None) is None
    monkeypatch.setitem(sys.modules, "watchdog.observers", None)
    assert watch_folder(tmp_path, lambda: None) is None
