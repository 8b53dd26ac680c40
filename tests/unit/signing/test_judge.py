"""Corners of judging one signature."""

from __future__ import annotations

import pytest
from cryptography import x509
from cryptography.hazmat.primitives import hashes
from cryptography.hazmat.primitives.asymmetric import ec
from cryptography.x509.oid import NameOID

from qcreport.errors import NotOurReportError
from qcreport.signing import judge
from qcreport.signing.boundary import reading_pdf
from qcreport.signing.cms_form import element, fills
from qcreport.signing.inspect import inspect_pdf
from qcreport.signing.keys import SigningKey, load_signing_key
from qcreport.signing.seal import seal
from qcreport.signing.stamping import HeldKeySigner

from .conftest import LATER
from .keys_fixture import NOW
from .test_keys import dt, pem


@pytest.mark.parametrize(
    ("content", "length"),
    [
        (b"\x30\x03abc", 5),
        (b"\x30\x82\x01\x00" + b"x" * 256 + b"\0\0", 260),
        (b"\x30\x80abc\0\0", None),
        (b"\x30", None),
        (b"", None),
    ],
)
def test_the_used_room_is_read_from_the_outermost_element(content: bytes, length: int | None) -> None:
    found = element(content, 0)
    assert (None if found is None else found[1]) == length


@pytest.mark.parametrize(
    ("content", "whole"),
    [
        (bytes.fromhex("3006 0201 01 a001 05"), True),
        (bytes.fromhex("3007 0201 01 a001 05 00"), False),
        (bytes.fromhex("3005 0201 01 a001 05"), False),
        (bytes.fromhex("3006 0201 01 a080 05"), False),
        (b"", False),
    ],
    ids=["exact", "room left over", "child too long", "no definite length", "nothing"],
)
def test_the_last_element_ends_where_its_parent_does(content: bytes, whole: bool) -> None:
    assert fills(content, 1) is whole


@pytest.mark.parametrize("names", [("First name", "Second name"), ()])
def test_unusual_subjects_still_give_a_name(rendered: bytes, names: tuple[str, ...]) -> None:
    private = ec.generate_private_key(ec.SECP256R1())
    parts = [x509.NameAttribute(NameOID.COMMON_NAME, name) for name in names]
    subject = x509.Name(parts or [x509.NameAttribute(NameOID.ORGANIZATION_NAME, "Only a laboratory")])
    certificate = (
        x509.CertificateBuilder()
        .subject_name(subject)
        .issuer_name(subject)
        .public_key(private.public_key())
        .serial_number(x509.random_serial_number())
        .not_valid_before(NOW)
        .not_valid_after(NOW + dt.timedelta(days=9))
        .sign(private, hashes.SHA256())
    )
    key = load_signing_key(pem(private, certificate), passphrase=None, now=NOW)
    pdf = seal(rendered, key, at=NOW, reason="Sealed", location="Here")
    signer = inspect_pdf(pdf, roots=None, at=LATER).seal.signer
    assert signer is not None
    assert (names[0] if names else "Only a laboratory") in signer


def test_only_sha256_is_signed_over(service_key: SigningKey) -> None:
    with pytest.raises(ValueError, match="SHA-256"):
        HeldKeySigner(service_key).sign_raw(b"data", "sha1")


@pytest.mark.parametrize("where", ["async_validate_pdf_signature", "oddities"])
def test_want_of_memory_is_not_taken_for_damage(
    sealed: bytes, monkeypatch: pytest.MonkeyPatch, where: str
) -> None:
    def exhausted(*_: object, **__: object) -> None:
        raise MemoryError

    monkeypatch.setattr(judge, where, exhausted)
    with pytest.raises(MemoryError):
        inspect_pdf(sealed, roots=None, at=LATER)


def test_any_failure_while_reading_becomes_one_sentence() -> None:
    with pytest.raises(NotOurReportError, match="damaged"), reading_pdf():
        raise RecursionError
