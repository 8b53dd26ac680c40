"""A site's records in a temporary folder, with a clock that the test sets."""

from __future__ import annotations

import datetime as dt
import shutil
from pathlib import Path

import pytest

from qcreport.records.facade import Records

from .example import Handling


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


@pytest.fixture(scope="session")
def finished_folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Make a site with two sealed reports and a reserved number, once; tests work on copies."""
    folder = tmp_path_factory.mktemp("site")
    records = Records.open(folder / "records", SetClock())
    Handling(records).whole(folder / "reports")
    Handling(records, claim="job-2", data=b"second").whole(folder / "reports")
    begun = Handling(records, claim="job-3", data=b"third")
    begun.receive()
    begun.reserve()
    return folder


@pytest.fixture
def site(finished_folder: Path, tmp_path: Path, clock: SetClock) -> Records:
    """Return a copy of that site's records; its reports are in `tmp_path / "site/reports"`."""
    shutil.copytree(finished_folder, tmp_path / "site")
    return Records.open(tmp_path / "site/records", clock)
