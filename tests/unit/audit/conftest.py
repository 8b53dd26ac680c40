"""A sealed report whose attachments agree, and the keys of the session."""

from __future__ import annotations

import pytest
from signing.keys_fixture import key_of

from qcreport.signing.keys import SigningKey

from .example import attachments, sealed_with


@pytest.fixture(scope="session")
def service_key() -> SigningKey:
    return key_of("QC reports")


@pytest.fixture(scope="session")
def person_key() -> SigningKey:
    return key_of("A. Reviewer", purpose="person")


@pytest.fixture(scope="session")
def files(service_key: SigningKey) -> dict[str, bytes]:
    return attachments(service_key)


@pytest.fixture(scope="session")
def report(files: dict[str, bytes], service_key: SigningKey) -> bytes:
    return sealed_with(files, service_key)
