"""An inbox and a work folder, with a clock that the test sets."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterator
from itertools import count
from pathlib import Path

import pytest

from qcreport.intake.claim import Claims
from qcreport.intake.listing import Seen, scan

NOON = dt.datetime(2026, 11, 2, 12, 0, 0, tzinfo=dt.UTC)


@pytest.fixture
def inbox(tmp_path: Path) -> Path:
    folder = tmp_path / "inbox"
    folder.mkdir()
    return folder


@pytest.fixture
def claims(tmp_path: Path) -> Claims:
    return make_claims(tmp_path)


def make_claims(site: Path, numbers: Iterator[int] | None = None) -> Claims:
    """Return the claims of a site as a process that just started sees them."""
    ids = count(len(list((site / "work/claims").glob("*"))) + 1) if numbers is None else numbers
    return Claims(site / "work", max_bytes=1000, clock=lambda: NOON, new_id=lambda _: f"job-{next(ids)}")


def only(inbox: Path) -> Seen:
    """Return the one file of an inbox."""
    (seen,) = scan(inbox)
    return seen
