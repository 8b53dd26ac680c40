"""The seal as made: what it states, what it leaves alone, and that programs not ours agree."""

from __future__ import annotations

import datetime as dt
import subprocess
from io import BytesIO
from pathlib import Path

import pikepdf
import pytest

from qcreport.errors import NotOurReportError, SigningDeniedError
from qcreport.signing.keys import SigningKey, load_signing_key
from qcreport.signing.reading import open_sealed
from qcreport.signing.repack import repack
from qcreport.signing.seal import require_sealed, seal

from .appending import countersigned, with_changed_page
from .conftest import LATER
from .keys_fixture import NOW, key_of
from .test_keys import certificate_for, pem, rsa


def again(rendered: bytes, key: SigningKey, at: dt.datetime = NOW, field: str = "Seal") -> bytes:
    return seal(
        rendered, key, at=at, field_name=field, reason="Sealed on completion", location="Test Laboratory"
    )


def signature_value(pdf: bytes) -> slice:
    start, gap_start, gap_end, _ = open_sealed(pdf).seal.byte_range
    assert start == 0
    return slice(int(gap_start), int(gap_end))


def test_the_seal_states_what_it_was_given(sealed: bytes) -> None:
    held = open_sealed(sealed).seal.sig_object
    assert held["/SubFilter"] == "/ETSI.CAdES.detached"
    assert held["/M"] == "D:20261102061200Z"
    assert (held["/Reason"], held["/Location"]) == ("Sealed on completion", "Test Laboratory")
    assert held["/Name"] == "QC reports"
    assert held["/Reference"][0]["/TransformParams"]["/P"] == 2


def test_the_same_report_gives_the_same_bytes_but_for_the_signature(
    sealed: bytes, rendered: bytes, service_key: SigningKey
) -> None:
    other = again(rendered, service_key)
    place = signature_value(sealed)
    assert signature_value(other) == place
    assert sealed[: place.start] == other[: place.start]
    assert sealed[place.stop :] == other[place.stop :]
    assert sealed[place] != other[place]


def test_repacking_repeats_and_leaves_the_metadata_readable(rendered: bytes) -> None:
    once = repack(rendered)
    assert once == repack(rendered)
    assert b"<x:xmpmeta" in once
    assert repack(once) == once


def test_the_metadata_is_not_rewritten(rendered: bytes, sealed: bytes) -> None:
    held = []
    for pdf in (rendered, sealed):
        with pikepdf.open(BytesIO(pdf)) as document:
            held.append(document.Root.Metadata.read_bytes())
    assert held[0] == held[1]


def test_the_look_of_the_field_is_kept(sealed: bytes) -> None:
    with pikepdf.open(BytesIO(sealed)) as document:
        field = document.Root.AcroForm.Fields[0]
        assert field.T == "Seal"
        assert field.AP.N.read_bytes() == b"0.5 w 0 0 200 30 re S"


@pytest.mark.parametrize("count", [0, 1, 2])
def test_pdfsig_finds_every_signature_valid(
    sealed: bytes, person_key: SigningKey, tmp_path: Path, count: int
) -> None:
    pdf = sealed
    for field in ("Reviewed", "Authorised")[:count]:
        pdf = countersigned(pdf, person_key, field)
    path = tmp_path / "report.pdf"
    path.write_bytes(pdf)
    found = subprocess.run(["pdfsig", path], capture_output=True, text=True, check=True, timeout=60).stdout
    assert found.count("Signature is Valid") == 1 + count
    assert found.count("The signature form field is not signed") == 2 - count
    assert found.count("Total document signed") == 1


def openssl_agrees(pdf: bytes, key: SigningKey, folder: Path) -> bool:
    opened = open_sealed(pdf)
    place = signature_value(pdf)
    (folder / "content").write_bytes(pdf[: place.start] + pdf[place.stop : opened.sealed_length])
    content = opened.seal.pkcs7_content
    (folder / "signature").write_bytes(content)
    (folder / "root.pem").write_bytes(key.certificate_pem())
    command = "openssl cms -verify -binary -inform DER -in signature -content content -CAfile root.pem"
    moment = str(int(NOW.timestamp()) + 60)
    done = subprocess.run(
        [*command.split(), "-purpose", "any", "-attime", moment, "-out", "verified"],
        cwd=folder,
        capture_output=True,
        text=True,
        check=False,
        timeout=60,
    )
    return done.returncode == 0


def test_openssl_agrees_with_the_certificate_as_root(
    sealed: bytes, service_key: SigningKey, person_key: SigningKey, tmp_path: Path
) -> None:
    assert openssl_agrees(sealed, service_key, tmp_path)
    assert not openssl_agrees(sealed, person_key, tmp_path)
    flipped = bytearray(sealed)
    flipped[2000] ^= 1
    assert not openssl_agrees(bytes(flipped), service_key, tmp_path)


def test_an_rsa_key_seals_too(rendered: bytes, tmp_path: Path) -> None:
    private = rsa.generate_private_key(65537, 2048)
    key = load_signing_key(pem(private, certificate_for(private)), passphrase=None, now=NOW)
    pdf = again(rendered, key)
    require_sealed(pdf, certificate=key.certificate_pem(), at=NOW)
    assert openssl_agrees(pdf, key, tmp_path)


@pytest.mark.parametrize("days", [-1, 366])
def test_a_certificate_out_of_its_time_seals_nothing(
    rendered: bytes, service_key: SigningKey, days: int
) -> None:
    with pytest.raises(SigningDeniedError, match="certificate"):
        again(rendered, service_key, at=NOW + dt.timedelta(days=days))


def test_a_field_that_is_absent_or_taken_is_refused(
    rendered: bytes, sealed: bytes, service_key: SigningKey
) -> None:
    with pytest.raises(SigningDeniedError, match="Approved"):
        again(rendered, service_key, field="Approved")
    with pytest.raises(SigningDeniedError, match="Seal"):
        again(sealed, service_key)


@pytest.mark.parametrize("data", [b"", b"no pdf", b"%PDF-1.7\nnothing"])
def test_what_is_no_pdf_is_not_sealed(data: bytes, service_key: SigningKey) -> None:
    with pytest.raises(NotOurReportError, match="PDF"):
        again(data, service_key)


def test_a_seal_that_holds_passes_its_check(sealed: bytes, service_key: SigningKey) -> None:
    require_sealed(sealed, certificate=service_key.certificate, at=LATER)


def test_a_seal_that_does_not_hold_is_refused(
    rendered: bytes, sealed: bytes, service_key: SigningKey
) -> None:
    with pytest.raises(SigningDeniedError, match="another key"):
        require_sealed(again(rendered, key_of("Stranger")), certificate=service_key.certificate, at=LATER)
    with pytest.raises(SigningDeniedError, match="changed"):
        require_sealed(with_changed_page(sealed), certificate=service_key.certificate, at=LATER)
