"""What a signed copy adds, and every way in which it may add more or less."""

from __future__ import annotations

import datetime as dt
import re

import pytest

from qcreport.errors import NotOurReportError, SigningDeniedError
from qcreport.signing import copy_in_child
from qcreport.signing.copy_in_child import added_signature_in_child
from qcreport.signing.countersign import countersign, free_field
from qcreport.signing.keys import SigningKey
from qcreport.signing.limits import VerifyLimits
from qcreport.signing.signed_copy import added_signature, is_extension

from .appending import countersigned, with_changed_page
from .conftest import LATER
from .keys_fixture import NOW, key_of


@pytest.fixture(scope="module")
def reviewed(sealed: bytes, person_key: SigningKey) -> bytes:
    return countersign(sealed, person_key, role="reviewed", name="A. Reviewer", at=NOW, location="Here")


def denied(original: bytes, copy: bytes, at: dt.datetime = LATER) -> str:
    with pytest.raises(SigningDeniedError) as caught:
        added_signature(original, copy, at=at)
    return caught.value.text


def test_one_signature_is_told(sealed: bytes, reviewed: bytes, person_key: SigningKey) -> None:
    added = added_signature(sealed, reviewed, at=LATER)
    assert (added.role, added.field, added.meaning) == ("reviewed", "Reviewed", "reviewed")
    assert (added.signer, added.signed_at) == ("A. Reviewer", NOW)
    assert added.fingerprint_sha256 == person_key.fingerprint_sha256
    assert added_signature_in_child(sealed, reviewed, at=LATER) == added


def test_the_field_is_free_once(sealed: bytes, reviewed: bytes, person_key: SigningKey) -> None:
    assert free_field(sealed, "reviewed").width_pt == 200.0
    with pytest.raises(SigningDeniedError, match="is reviewed already"):
        free_field(reviewed, "reviewed")
    with pytest.raises(SigningDeniedError, match="is reviewed already"):
        countersign(reviewed, person_key, role="reviewed", name="A. Reviewer", at=NOW)


def test_only_an_extension_is_a_copy(sealed: bytes, reviewed: bytes) -> None:
    assert is_extension(reviewed, sealed)
    assert not is_extension(sealed, sealed)
    assert "not the report as filed" in denied(sealed, sealed)
    assert "not the report as filed" in denied(reviewed, sealed)


def test_more_or_less_than_one_signature(sealed: bytes, reviewed: bytes) -> None:
    other = key_of("B. Authoriser", purpose="person")
    both = countersign(reviewed, other, role="authorised", name="B. Authoriser", at=NOW)
    assert "adds 2 signatures" in denied(sealed, both)
    assert added_signature(reviewed, both, at=LATER).role == "authorised"
    assert "adds no signature" in denied(sealed, with_changed_page(sealed))


def test_a_signature_with_something_else(sealed: bytes, person_key: SigningKey) -> None:
    changed_before = countersigned(with_changed_page(sealed), person_key, "Reviewed")
    assert "changed by more than a signature" in denied(sealed, changed_before)
    changed_after = with_changed_page(countersigned(sealed, person_key, "Reviewed"))
    assert "changed by more than a signature" in denied(sealed, changed_after)


def test_a_signature_that_does_not_hold(sealed: bytes, reviewed: bytes) -> None:
    changed = bytearray(reviewed)
    *_, last = re.finditer(rb"/Contents ?<([0-9a-fA-F]{200,})>", reviewed)
    changed[last.start(1) + 700] ^= 1
    with pytest.raises((SigningDeniedError, NotOurReportError)):
        added_signature(sealed, bytes(changed), at=LATER)


def test_times_that_cannot_be(sealed: bytes, person_key: SigningKey) -> None:
    early = key_of("A. Reviewer", purpose="person", start=NOW - dt.timedelta(days=9))

    def at(moment: dt.datetime, key: SigningKey = person_key) -> bytes:
        return countersign(sealed, key, role="reviewed", name="A. Reviewer", at=moment)

    assert "before the report was sealed" in denied(sealed, at(NOW - dt.timedelta(hours=1), early))
    assert "lies ahead" in denied(sealed, at(LATER + dt.timedelta(hours=1)))


def test_a_certificate_that_is_not_valid_today(sealed: bytes) -> None:
    short = key_of("A. Reviewer", purpose="person", days=1)
    copy = countersign(sealed, short, role="reviewed", name="A. Reviewer", at=NOW)
    assert "expired" in denied(sealed, copy, LATER + dt.timedelta(days=5))
    with pytest.raises(SigningDeniedError, match="expired"):
        countersign(sealed, short, role="reviewed", name="A. Reviewer", at=LATER + dt.timedelta(days=5))


def test_a_copy_that_costs_too_much_is_denied(sealed: bytes, reviewed: bytes) -> None:
    with pytest.raises(SigningDeniedError, match="MB of memory"):
        added_signature_in_child(sealed, reviewed, at=LATER, limits=VerifyLimits(memory_bytes=60 << 20))
    assert copy_in_child.VerifyLimits().cpu_s < 600
