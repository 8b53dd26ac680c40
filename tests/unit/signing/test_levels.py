"""Time stamps and archived proofs: which PAdES level is claimed, and only when it is there."""

from __future__ import annotations

import asyncio
import datetime as dt
from io import BytesIO

import pytest
from cryptography import x509
from cryptography.hazmat.primitives import hashes
from cryptography.hazmat.primitives.asymmetric import rsa
from cryptography.hazmat.primitives.serialization import Encoding
from cryptography.x509.oid import ExtendedKeyUsageOID, NameOID
from pyhanko.keys.internal import translate_pyca_cryptography_key_to_asn1
from pyhanko.pdf_utils import generic
from pyhanko.pdf_utils.writer import BasePdfFileWriter
from pyhanko.sign.fields import MDPPerm, SigSeedSubFilter
from pyhanko.sign.signers import PdfSignatureMetadata, PdfTimeStamper
from pyhanko.sign.timestamps import DummyTimeStamper
from pyhanko_certvalidator import ValidationContext

from qcreport.signing.inspect import inspect_pdf
from qcreport.signing.keys import SigningKey
from qcreport.signing.repack import repack
from qcreport.signing.stamping import HeldKeySigner, QuietWriter, TimedSigner, to_asn1
from qcreport.signing.status import PdfStatus, SignatureKind

from .conftest import LATER
from .keys_fixture import NOW

STAMPED = NOW + dt.timedelta(seconds=3)


@pytest.fixture(scope="module")
def authority() -> tuple[DummyTimeStamper, x509.Certificate]:
    """Return a time stamp authority of this session, and its certificate."""
    key = rsa.generate_private_key(65537, 2048)  # the authority made for tests signs with RSA only
    name = x509.Name([x509.NameAttribute(NameOID.COMMON_NAME, "Time authority")])
    certificate = (
        x509.CertificateBuilder()
        .subject_name(name)
        .issuer_name(name)
        .public_key(key.public_key())
        .serial_number(x509.random_serial_number())
        .not_valid_before(NOW.replace(year=2026))
        .not_valid_after(NOW.replace(year=2036))
        .add_extension(x509.ExtendedKeyUsage([ExtendedKeyUsageOID.TIME_STAMPING]), critical=True)
        .sign(key, hashes.SHA256())
    )
    stamper = DummyTimeStamper(
        to_asn1(certificate), translate_pyca_cryptography_key_to_asn1(key), fixed_dt=STAMPED
    )
    return stamper, certificate


@pytest.fixture(scope="module")
def stamped(
    rendered: bytes, service_key: SigningKey, authority: tuple[DummyTimeStamper, x509.Certificate]
) -> bytes:
    """Return a report whose seal carries a time stamp."""
    metadata = PdfSignatureMetadata(
        field_name="Seal",
        md_algorithm="sha256",
        certify=True,
        docmdp_permissions=MDPPerm.FILL_FORMS,
        subfilter=SigSeedSubFilter.PADES,
    )
    signer = TimedSigner(metadata, HeldKeySigner(service_key), NOW, authority[0])
    out = BytesIO()
    writer = QuietWriter(BytesIO(repack(rendered)))
    asyncio.run(signer.async_sign_pdf(writer, existing_fields_only=True, output=out, bytes_reserved=16384))
    return out.getvalue()


def with_proofs(pdf: bytes, proof: x509.Certificate) -> bytes:
    """Return the report with a store of validation data appended."""
    writer = QuietWriter(BytesIO(pdf))
    _add_store(writer, proof.public_bytes(Encoding.DER))
    out = BytesIO()
    writer.write(out)
    return out.getvalue()


def _add_store(writer: BasePdfFileWriter, data: bytes) -> None:
    proof = writer.add_object(generic.StreamObject(stream_data=data))
    store = generic.DictionaryObject({generic.pdf_name("/Certs"): generic.ArrayObject([proof])})
    writer.root["/DSS"] = writer.add_object(store)
    writer.update_root()


def time_stamped(pdf: bytes, stamper: DummyTimeStamper, field: str | None = None) -> bytes:
    """Return the report with a document time stamp appended."""
    out = BytesIO()
    asyncio.run(
        PdfTimeStamper(stamper, field_name=field).async_timestamp_pdf(
            QuietWriter(BytesIO(pdf)),
            "sha256",
            ValidationContext(trust_roots=[stamper.tsa_cert], allow_fetching=False, moment=NOW),
            output=out,
        )
    )
    return out.getvalue()


def inspected(pdf: bytes, *roots: x509.Certificate) -> PdfStatus:
    return inspect_pdf(pdf, roots=roots, at=LATER)


def test_a_stamped_seal_is_b_t(
    stamped: bytes, service_key: SigningKey, authority: tuple[DummyTimeStamper, x509.Certificate]
) -> None:
    status = inspected(stamped, service_key.certificate, authority[1])
    assert status.holds
    assert status.seal.ok
    assert status.seal.time_stamped
    assert status.seal.notes == ()
    assert status.seal.signed_at == STAMPED
    unknown = inspected(stamped, service_key.certificate).seal
    assert unknown.notes == ("the authority of its time stamp does not lead to a given root",)
    assert status.pades_level == "B-T"


def test_proofs_alone_do_not_raise_an_unstamped_seal(sealed: bytes, service_key: SigningKey) -> None:
    status = inspected(with_proofs(sealed, service_key.certificate), service_key.certificate)
    assert status.holds
    assert not status.changed_after_seal
    assert status.pades_level == "B-B"


def test_proofs_and_a_document_stamp_raise_a_stamped_seal(
    stamped: bytes, service_key: SigningKey, authority: tuple[DummyTimeStamper, x509.Certificate]
) -> None:
    proven = with_proofs(stamped, authority[1])
    assert inspected(proven, service_key.certificate).pades_level == "B-LT"
    status = inspected(time_stamped(proven, authority[0]), service_key.certificate, authority[1])
    assert status.pades_level == "B-LTA"
    assert status.holds
    assert status.signatures == ()
    (stamp,) = status.others
    assert (stamp.kind, stamp.signer, stamp.signed_at) == (
        SignatureKind.TIME_STAMP,
        "Time authority",
        STAMPED,
    )
    assert stamp.ok


def test_a_damaged_document_stamp_is_found(
    stamped: bytes, service_key: SigningKey, authority: tuple[DummyTimeStamper, x509.Certificate]
) -> None:
    proven = with_proofs(stamped, authority[1])
    pdf = time_stamped(proven, authority[0])
    damaged = bytearray(pdf)
    place = pdf.index(authority[1].public_bytes(Encoding.DER), len(stamped)) + 100
    assert place < len(proven)
    damaged[place] ^= 1
    status = inspected(bytes(damaged), service_key.certificate)
    assert status.seal.holds
    assert not status.others[0].holds
    assert status.others[0].problems == ("bytes that it covers were changed after signing",)
    assert status.pades_level == "B-LT"


def test_a_time_stamp_in_the_place_of_the_seal_is_no_seal(
    rendered: bytes, authority: tuple[DummyTimeStamper, x509.Certificate]
) -> None:
    status = inspected(time_stamped(repack(rendered), authority[0], "Seal"), authority[1])
    assert not status.holds
    assert "the field of the seal holds a time stamp" in status.problems
