"""One key, one rendered and one sealed report for all tests of the session."""

from __future__ import annotations

import datetime as dt

import pytest

from qcreport.signing.keys import SigningKey
from qcreport.signing.seal import seal

from .keys_fixture import NOW, key_of
from .report_fixture import rendered_report

ATTACHED = {
    "context.json": b'{"schema": "made up"}',
    "export.xlsx": b"PK\x03\x04" + bytes(range(256)) * 20,
    "layout.toml": b'name = "shear-rig"\n',
    "plan.toml": b'name = "lap-shear-batches"\n',
    "result.json": b"{}",
    "rules.toml": b'name = "default"\n',
}
LATER = NOW + dt.timedelta(days=1)


@pytest.fixture(scope="session")
def service_key() -> SigningKey:
    return key_of("QC reports")


@pytest.fixture(scope="session")
def person_key() -> SigningKey:
    return key_of("A. Reviewer", purpose="person")


@pytest.fixture(scope="session")
def rendered() -> bytes:
    return rendered_report(ATTACHED)


@pytest.fixture(scope="session")
def sealed(rendered: bytes, service_key: SigningKey) -> bytes:
    return seal(rendered, service_key, at=NOW, reason="Sealed on completion", location="Test Laboratory")
