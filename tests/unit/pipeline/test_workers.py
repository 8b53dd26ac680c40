"""Workers: no secret comes with them, and one that dies is replaced."""

from __future__ import annotations

import os
import signal
from pathlib import Path

import pytest

from qcreport.errors import EnvironmentFailedError, UsageError
from qcreport.pipeline.workers import PASSPHRASE_VARIABLE, Workers

# Functions for a worker must be found by name in the standard library: a worker imports nothing of the tests.


def test_work_comes_back_and_errors_too() -> None:
    with Workers(1) as workers:
        assert workers.run(abs, -3) == 3
        with pytest.raises(ValueError, match="invalid literal"):
            workers.run(int, "x")
        assert workers.run(abs, -4) == 4


def test_a_worker_holds_no_passphrase_and_one_thread(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv(PASSPHRASE_VARIABLE, "secret")
    with Workers(1) as workers:
        assert workers.run(os.getenv, PASSPHRASE_VARIABLE) is None
        assert workers.run(os.getenv, "OPENBLAS_NUM_THREADS") == "1"
        assert workers.run(signal.getsignal, signal.SIGINT) == signal.SIG_IGN


def die_once(flag: str) -> str:
    path = Path(flag)
    if not path.exists():
        path.touch()
        os.kill(os.getpid(), signal.SIGKILL)
    return "done"


def test_a_killed_worker_is_replaced_and_its_job_tried_again(tmp_path: Path) -> None:
    with Workers(1) as workers:
        assert workers.run(die_once, str(tmp_path / "flag")) == "done"
        assert workers.run(abs, -5) == 5


def test_a_job_that_kills_every_worker_is_told(tmp_path: Path) -> None:
    with Workers(1) as workers:
        with pytest.raises(EnvironmentFailedError, match="died twice"):
            workers.run(os._exit, 9)
        assert workers.run(abs, -6) == 6, "the next job has a new pool"


def test_our_own_errors_keep_their_kind() -> None:
    with Workers(1) as workers, pytest.raises(UsageError, match="not so"):
        workers.run(raise_usage, "not so")


def raise_usage(text: str) -> None:
    raise UsageError(text)
