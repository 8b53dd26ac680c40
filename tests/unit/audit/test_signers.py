"""Who signed, by the report's own list and by the site's, and what speaks against it."""

from __future__ import annotations

import re

import pytest
from signing.appending import countersigned
from signing.conftest import LATER
from signing.keys_fixture import key_of

from qcreport.analysis.context import Signer
from qcreport.audit.verdict import VerifyStatus
from qcreport.audit.verify import verify_report
from qcreport.signing.keys import SigningKey

from .example import attachments, repeats, sealed_with

BOTH = ("reviewed", "authorised")


def named(key: SigningKey, *may: str, name: str = "A. Reviewer") -> Signer:
    return Signer(name=name, certificate_sha256=key.fingerprint_sha256, may=may)


def verified(pdf: bytes, *roots: SigningKey, people: tuple[Signer, ...] = ()) -> VerifyStatus:
    return verify_report(
        pdf,
        roots=tuple(k.certificate for k in roots) or None,
        now=LATER,
        people=people,
        recompute_with=repeats,
    )


@pytest.fixture(scope="module")
def naming(service_key: SigningKey, person_key: SigningKey) -> bytes:
    """Return a report whose seal names one reviewer."""
    signers = (named(person_key, "reviewed"),)
    return sealed_with(attachments(service_key, signers=signers), service_key)


def test_the_seal_vouches_for_those_it_names(
    naming: bytes, service_key: SigningKey, person_key: SigningKey
) -> None:
    status = verified(countersigned(naming, person_key, "Reviewed"), service_key)
    assert (status.valid, status.trusted) == (True, True)
    assert status.explained[0].text == (
        "A. Reviewer signed the report as reviewed; "
        "the laboratory vouches for that certificate under its seal"
    )


def test_a_seal_that_is_not_trusted_vouches_for_nobody(naming: bytes, person_key: SigningKey) -> None:
    signed = countersigned(naming, person_key, "Reviewed")
    assert verified(signed).trusted is None
    status = verified(signed, key_of("Somebody else"))
    assert status.trusted is False
    assert "the seal is not trusted" in status.explained[0].text


def test_a_stranger_is_not_trusted_and_said_to_be_none_of_them(
    naming: bytes, service_key: SigningKey
) -> None:
    stranger = key_of("A. Reviewer", purpose="person")
    status = verified(countersigned(naming, stranger, "Reviewed"), service_key)
    assert (status.valid, status.trusted) == (True, False)
    assert "neither the report's seal nor" in status.explained[0].text


def test_a_role_that_the_person_does_not_have(
    naming: bytes, service_key: SigningKey, person_key: SigningKey
) -> None:
    status = verified(countersigned(naming, person_key, "Authorised"), service_key)
    assert not status.valid
    assert status.problems == ("A. Reviewer signed as authorised, which that person may not",)
    later = (named(person_key, *BOTH),)
    assert verified(countersigned(naming, person_key, "Authorised"), service_key, people=later).valid


def test_the_site_pins_certificates_that_the_report_does_not_name(
    report: bytes, service_key: SigningKey, person_key: SigningKey
) -> None:
    signed = countersigned(report, person_key, "Reviewed")
    status = verified(signed, service_key, people=(named(person_key, *BOTH),))
    assert (status.valid, status.trusted) == (True, True)
    assert "the site names that certificate" in status.explained[0].text


def test_one_person_in_both_fields(report: bytes, service_key: SigningKey, person_key: SigningKey) -> None:
    twice = countersigned(countersigned(report, person_key, "Reviewed"), person_key, "Authorised")
    told = ("one person signed in both fields, Reviewed and Authorised",)
    assert verified(twice, service_key, person_key).problems == told
    renewed = key_of("A. Reviewer", purpose="person")
    pair = countersigned(countersigned(report, person_key, "Reviewed"), renewed, "Authorised")
    people = (named(person_key, *BOTH), named(renewed, *BOTH))
    assert verified(pair, service_key, people=people).problems == told


def test_the_key_of_the_seal_is_no_persons(report: bytes, service_key: SigningKey) -> None:
    status = verified(countersigned(report, service_key, "Reviewed"), service_key)
    assert status.problems == ("the key of the seal signed in the field Reviewed, where a person signs",)


def test_a_signature_that_does_not_hold_is_explained(
    report: bytes, service_key: SigningKey, person_key: SigningKey
) -> None:
    signed = bytearray(countersigned(report, person_key, "Reviewed"))
    *_, last = re.finditer(rb"/Contents ?<([0-9a-fA-F]{200,})>", signed)
    signed[last.start(1) + 600] ^= 1
    status = verified(bytes(signed), service_key, person_key)
    assert not status.valid
    assert "does not hold: " in status.explained[0].text
