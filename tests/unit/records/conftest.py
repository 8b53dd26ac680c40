"""A site's records in a temporary folder, with a clock that the test sets."""

from __future__ import annotations

import datetime as dt
from pathlib import Path

import pytest

from qcreport.records.facade import Records


class SetClock:
    """A clock that moves only when told."""

    def __init__(self) -> None:
        self.now = dt.datetime(2026, 11, 2, 6, 12, 0, tzinfo=dt.UTC)

    def __call__(self) -> dt.datetime:
        return self.now

    def advance(self, seconds: float) -> None:
        self.now += dt.timedelta(seconds=seconds)


@pytest.fixture
def clock() -> SetClock:
    return SetClock()


@pytest.fixture
def records(tmp_path: Path, clock: SetClock) -> Records:
    return Records.open(tmp_path / "records", clock)
