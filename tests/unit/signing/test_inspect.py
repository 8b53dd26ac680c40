"""What the inspection says of sealed, countersigned and tampered reports."""

from __future__ import annotations

import datetime as dt
import socket
from io import BytesIO

import pikepdf
import pytest

from qcreport.errors import NotOurReportError
from qcreport.signing import reading
from qcreport.signing.inspect import inspect_pdf
from qcreport.signing.keys import SigningKey
from qcreport.signing.reading import open_sealed, sealed_revision
from qcreport.signing.seal import seal
from qcreport.signing.status import PdfStatus

from .appending import (
    countersigned,
    with_changed_page,
    with_moved_field,
    with_swapped_attachment,
    without_signature,
)
from .conftest import LATER
from .keys_fixture import NOW, key_of


def inspected(pdf: bytes, *keys: SigningKey, at: dt.datetime = LATER) -> PdfStatus:
    return inspect_pdf(pdf, roots=tuple(k.certificate for k in keys), at=at)


def next_digit(digit: int) -> int:
    """Return the hexadecimal digit after this one, as the signature is written."""
    digits = b"0123456789ABCDEF"
    return digits[(digits.index(digit) + 1) % 16]


def reasons_against(pdf: bytes, key: SigningKey) -> tuple[str, ...]:
    """Return why a report is not accepted: as a refusal or as a status; nothing for one that holds."""
    try:
        status = inspected(pdf, key)
    except NotOurReportError as error:
        return (error.text,)
    every = (status.seal, *status.others)
    told = (*status.problems, *(problem for s in every for problem in s.problems))
    assert bool(told) is not status.holds
    return told


def test_a_sealed_report_holds(sealed: bytes, service_key: SigningKey) -> None:
    status = inspected(sealed, service_key)
    assert status.holds
    assert status.trusted is True
    assert status.seal.ok
    assert (status.seal.signer, status.seal.signed_at) == ("QC reports", NOW)
    assert status.seal.fingerprint_sha256 == service_key.fingerprint_sha256
    assert status.seal.covers_entire_file
    assert (status.signatures, status.changed_after_seal, status.pades_level) == ((), False, "B-B")
    assert status.seal.notes == ("the time is the signer's own statement",)


def test_without_roots_trust_is_left_open(sealed: bytes, service_key: SigningKey) -> None:
    status = inspect_pdf(sealed, roots=None, at=LATER)
    assert status.holds
    assert status.trusted is None
    assert status.seal.fingerprint_sha256 == service_key.fingerprint_sha256


def test_no_root_given_means_no_root_trusted(sealed: bytes) -> None:
    assert inspected(sealed).trusted is False


def test_another_key_is_not_trusted(rendered: bytes, service_key: SigningKey) -> None:
    forged = seal(rendered, key_of("QC reports"), at=NOW, reason="Sealed", location="elsewhere")
    status = inspected(forged, service_key)
    assert status.holds
    assert status.trusted is False


def test_nothing_is_fetched(sealed: bytes, service_key: SigningKey, monkeypatch: pytest.MonkeyPatch) -> None:
    def refuse(*_: object, **__: object) -> None:
        raise AssertionError("the network was asked")

    monkeypatch.setattr(socket, "getaddrinfo", refuse)
    monkeypatch.setattr(socket.socket, "connect", refuse)
    assert inspected(sealed, service_key).trusted is True


def test_a_certificate_that_has_ended_since_is_told(sealed: bytes, service_key: SigningKey) -> None:
    status = inspected(sealed, service_key, at=NOW + dt.timedelta(days=4000))
    assert status.trusted is True
    assert any("ended on 2027-11-02" in note for note in status.seal.notes)


def test_a_seal_from_the_future_does_not_hold(sealed: bytes, service_key: SigningKey) -> None:
    status = inspected(sealed, service_key, at=NOW - dt.timedelta(days=3))
    assert not status.holds
    assert any("future" in problem for problem in status.seal.problems)


def test_countersignatures_leave_it_valid(
    sealed: bytes, service_key: SigningKey, person_key: SigningKey
) -> None:
    reviewed = countersigned(sealed, person_key, "Reviewed")
    both = countersigned(reviewed, key_of("B. Head"), "Authorised", "Release of the report")
    status = inspected(both, service_key, person_key)
    assert status.holds
    assert not status.changed_after_seal
    assert [(s.field, s.signer, s.meaning, s.trusted) for s in status.signatures] == [
        ("Reviewed", "A. Reviewer", "Review", True),
        ("Authorised", "B. Head", "Release of the report", False),
    ]
    assert status.seal.trusted is True
    assert status.trusted is False
    assert sealed_revision(both) == sealed


def test_a_flipped_byte_anywhere_is_found(sealed: bytes, service_key: SigningKey) -> None:
    """Every stretch of the file: page, attachments, the seal and the unused room beside it, the end."""
    _, gap_start, gap_end, _ = map(int, open_sealed(sealed).seal.byte_range)
    rest = [*range(0, gap_start, 499), *range(gap_end, len(sealed), 41)]
    places = [*rest, *range(gap_start, gap_end, 83), gap_end - 2]
    for place in places:
        damaged = bytearray(sealed)
        inside = gap_start < place < gap_end - 1
        damaged[place] = next_digit(damaged[place]) if inside else damaged[place] ^ 1
        assert reasons_against(bytes(damaged), service_key), f"byte {place} of {len(sealed)}"


def test_bytes_that_the_signature_library_skips_are_found(sealed: bytes, service_key: SigningKey) -> None:
    """Parts of the signature's own frame that are neither signed nor needed to check it."""
    seal_found = open_sealed(sealed).seal
    content, signer = seal_found.pkcs7_content, seal_found.signer_info
    digest = content.index(signer["digest_algorithm"].dump())
    version = content.index(signer.dump()) + len(signer.dump()) - len(signer.contents)
    room = content.rindex(b"\0" * 8)
    places = {"parameters of the digest": digest + 13, "version": version + 2, "room": room}
    first = int(seal_found.byte_range[1]) + 1
    for what, place in places.items():
        for change in (1, 2, 4):
            other = bytearray(content)
            other[place] ^= change
            forged = sealed[:first] + bytes(other).hex().upper().encode() + sealed[first + 2 * len(content) :]
            assert reasons_against(forged, service_key), what


def test_digits_written_in_another_way_are_found(sealed: bytes, service_key: SigningKey) -> None:
    first = int(open_sealed(sealed).seal.byte_range[1])
    middle = sealed[first : first + 40]
    assert middle.lower() != middle
    forged = sealed[:first] + middle.lower() + sealed[first + 40 :]
    status = inspected(forged, service_key)
    assert status.seal.problems == ("the place that holds the signature was changed",)


def test_a_swapped_attachment_is_a_change(sealed: bytes, service_key: SigningKey) -> None:
    swapped = with_swapped_attachment(sealed, "plan.toml", b'name = "another"\n')
    status = inspected(swapped, service_key)
    assert status.seal.intact
    assert status.changed_after_seal
    assert not status.holds
    assert status.problems == ("the report was changed after it was sealed, by more than signatures",)
    assert sealed_revision(swapped) == sealed


@pytest.mark.parametrize("tail", [b"x", b"%%EOF", b"\nstartxref\n17\n%%EOF\n", b"\n" * 2000 + b"1 0 obj"])
def test_bytes_after_the_end_are_a_change(sealed: bytes, service_key: SigningKey, tail: bytes) -> None:
    assert reasons_against(sealed + tail, service_key)


def test_a_line_end_added_in_transit_does_no_harm(sealed: bytes, service_key: SigningKey) -> None:
    assert inspected(sealed + b"\r\n", service_key).holds


def test_changed_pages_and_moved_fields_are_changes(sealed: bytes, service_key: SigningKey) -> None:
    for changed in (with_changed_page(sealed), with_moved_field(sealed, "Reviewed")):
        status = inspected(changed, service_key)
        assert status.changed_after_seal
        assert not status.holds


def test_a_change_hidden_under_a_later_signature_is_found(
    sealed: bytes, service_key: SigningKey, person_key: SigningKey
) -> None:
    hidden = countersigned(with_changed_page(sealed), person_key, "Reviewed")
    status = inspected(hidden, service_key, person_key)
    assert status.signatures[0].holds
    assert status.changed_after_seal
    assert not status.holds


def test_a_signature_taken_out_again_is_found(
    sealed: bytes, service_key: SigningKey, person_key: SigningKey
) -> None:
    emptied = without_signature(countersigned(sealed, person_key, "Reviewed"), "Reviewed")
    status = inspected(emptied, service_key, person_key)
    assert status.signatures == ()
    assert status.changed_after_seal
    assert status.problems == ("the signature in the field Reviewed was taken out or replaced",)


def test_a_damaged_countersignature_spoils_the_report(
    sealed: bytes, service_key: SigningKey, person_key: SigningKey
) -> None:
    pdf = countersigned(sealed, person_key, "Reviewed")
    place = int(open_sealed(pdf).signatures[1].byte_range[1]) + 1800
    assert place < int(open_sealed(pdf).signatures[1].byte_range[2])
    status = inspected(
        pdf[:place] + bytes([next_digit(pdf[place])]) + pdf[place + 1 :], service_key, person_key
    )
    assert status.seal.holds
    assert not status.signatures[0].holds
    assert status.problems == ("the signature in the field Reviewed does not hold",)


def test_cut_back_to_the_seal_it_looks_untouched(
    sealed: bytes, service_key: SigningKey, person_key: SigningKey
) -> None:
    """The loss of a countersignature shows only in the ledger."""
    cut = countersigned(sealed, person_key, "Reviewed")[: len(sealed)]
    status = inspected(cut, service_key)
    assert status.holds
    assert status.signatures == ()


def test_a_seal_set_after_something_else_is_not_ours(
    rendered: bytes, service_key: SigningKey, person_key: SigningKey
) -> None:
    late = countersigned(countersigned(rendered, person_key, "Reviewed"), service_key, "Seal")
    status = inspected(late, service_key, person_key)
    assert not status.holds
    assert "the seal is not the first thing that was added to the rendered report" in status.problems
    assert "the seal does not forbid later changes as ours does" in status.problems


def test_an_unsealed_report_is_none(rendered: bytes) -> None:
    with pytest.raises(NotOurReportError, match="no seal"):
        inspect_pdf(rendered, roots=None, at=LATER)


def test_an_encrypted_pdf_is_refused(sealed: bytes) -> None:
    out = BytesIO()
    with pikepdf.open(BytesIO(sealed)) as document:
        document.save(out, encryption=pikepdf.Encryption(owner="owner", user=""))
    with pytest.raises(NotOurReportError, match="encrypted"):
        inspect_pdf(out.getvalue(), roots=None, at=LATER)


def test_more_signatures_or_bytes_than_any_report_has_are_refused(
    sealed: bytes, monkeypatch: pytest.MonkeyPatch
) -> None:
    with monkeypatch.context() as patched:
        patched.setattr(reading, "MOST_SIGNATURES", 0)
        with pytest.raises(NotOurReportError, match="carries 1 signatures"):
            inspect_pdf(sealed, roots=None, at=LATER)
    monkeypatch.setattr(reading, "LARGEST_PDF", len(sealed) - 1)
    with pytest.raises(NotOurReportError, match="larger than"):
        inspect_pdf(sealed, roots=None, at=LATER)


@pytest.mark.parametrize("numbers", ["[1 %d %d %d]", "[0 %d 9%d %d]", "[0 %d %d]"])
def test_a_seal_that_covers_another_stretch_is_refused(sealed: bytes, numbers: str) -> None:
    _, *stated = map(int, open_sealed(sealed).seal.byte_range)
    place = sealed.rindex(b"/ByteRange")
    end = sealed.index(b"]", place) + 1
    written = (numbers % tuple(stated[: numbers.count("%d")])).encode()
    start = sealed.index(b"[", place)
    assert len(written) <= end - start + 1
    forged = sealed[:start] + written.ljust(end - start) + sealed[start + max(len(written), end - start) :]
    with pytest.raises(NotOurReportError, match="cannot be read"):
        inspect_pdf(forged, roots=None, at=LATER)


@pytest.mark.parametrize("share", [0.05, 0.3, 0.6, 0.9, 0.999])
def test_a_file_cut_off_is_refused_in_one_sentence(sealed: bytes, share: float) -> None:
    with pytest.raises(NotOurReportError, match=r"^This PDF .*\.$"):
        inspect_pdf(sealed[: int(len(sealed) * share)], roots=None, at=LATER)


@pytest.mark.parametrize("data", [b"", b"\0" * 100, b"<html>", b"PK\x03\x04"])
def test_what_is_no_pdf_is_said_to_be_none(data: bytes) -> None:
    with pytest.raises(NotOurReportError, match="not a PDF"):
        inspect_pdf(data, roots=None, at=LATER)


@pytest.mark.parametrize(
    "body",
    [
        b"%PDF-1.7\n" + b"[" * 100_000,
        b"%PDF-1.7\ntrailer <</Root 1 0 R>>\nstartxref\n9\n%%EOF\n",
        b"%PDF-1.7\n1 0 obj <</Root 1 0 R /Prev 9>> endobj\nstartxref\n-5\n%%EOF\n",
        b"%PDF-1.7\nxref\n0 99999999999\ntrailer <</Size 1/Root 1 0 R>>\nstartxref\n9\n%%EOF\n",
        b"%PDF-9.9\n" + bytes(range(256)) * 10 + b"\nstartxref\n1\n%%EOF",
    ],
)
def test_hostile_bytes_end_in_one_sentence(body: bytes) -> None:
    with pytest.raises(NotOurReportError, match=r"^This PDF .*\.$"):
        inspect_pdf(body, roots=None, at=LATER)
