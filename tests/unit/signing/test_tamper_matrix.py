"""Every way to tamper with a signed report, each found; common tools agree where they can see."""

from __future__ import annotations

import datetime as dt
import random
import re
import subprocess
from collections.abc import Callable
from io import BytesIO
from pathlib import Path

import pikepdf
import pytest
from pyhanko.pdf_utils import generic

from qcreport.errors import NotOurReportError
from qcreport.signing.countersign import countersign
from qcreport.signing.inspect import inspect_pdf
from qcreport.signing.keys import SigningKey
from qcreport.signing.reading import sealed_revision
from qcreport.signing.seal import seal
from qcreport.signing.stamping import QuietWriter
from qcreport.signing.status import PdfStatus

from .appending import (
    countersigned,
    with_changed_page,
    with_moved_field,
    with_swapped_attachment,
    without_signature,
    written,
)
from .conftest import ATTACHED, LATER
from .keys_fixture import NOW, key_of
from .report_fixture import rendered_report

FLIPS = 200
Tamper = Callable[[bytes], bytes]


@pytest.fixture(scope="module")
def other_key() -> SigningKey:
    return key_of("B. Authoriser", purpose="person")


@pytest.fixture(scope="module")
def complete(sealed: bytes, person_key: SigningKey, other_key: SigningKey) -> bytes:
    """Return the report with both signatures."""
    first = countersign(sealed, person_key, role="reviewed", name="A. Reviewer", at=NOW)
    return countersign(first, other_key, role="authorised", name="B. Authoriser", at=NOW)


@pytest.fixture(scope="module")
def judged(
    service_key: SigningKey, person_key: SigningKey, other_key: SigningKey
) -> Callable[[bytes], PdfStatus]:
    roots = tuple(k.certificate for k in (service_key, person_key, other_key))
    return lambda pdf: inspect_pdf(pdf, roots=roots, at=LATER)


def believed(pdf: bytes, judged: Callable[[bytes], PdfStatus]) -> bool:
    try:
        status = judged(pdf)
    except NotOurReportError:
        return False
    return status.holds and status.trusted is True


def pdfsig(path: Path, pdf: bytes) -> str:
    path.write_bytes(pdf)
    return subprocess.run(["pdfsig", path], capture_output=True, text=True, check=False).stdout


def test_the_untouched_report_passes(
    complete: bytes, judged: Callable[[bytes], PdfStatus], tmp_path: Path
) -> None:
    status = judged(complete)
    assert (status.holds, status.trusted, status.changed_after_seal) == (True, True, False)
    assert [s.meaning for s in status.signatures] == ["reviewed", "authorised"]
    assert pdfsig(tmp_path / "report.pdf", complete).count("Signature is Valid") == 3


def test_two_hundred_flipped_positions(complete: bytes, judged: Callable[[bytes], PdfStatus]) -> None:
    """Anywhere in the file, and many in the places that a signature does not cover."""
    chance = random.Random(20261102)  # noqa: S311  a repeatable choice, no secret
    holes = [m.span(1) for m in re.finditer(rb"/Contents ?<([0-9a-fA-F]{200,})>", complete)]
    assert len(holes) == 3
    places = {chance.randrange(len(complete)) for _ in range(FLIPS - 3 * 20)}
    for start, end in holes:
        places |= {chance.randrange(start, end) for _ in range(20)}
    while len(places) < FLIPS:
        places.add(chance.randrange(len(complete)))
    missed = []
    for place in sorted(places):
        changed = bytearray(complete)
        changed[place] ^= 1 << chance.randrange(7)
        if believed(bytes(changed), judged):
            missed.append(place)
    assert missed == []


def _annotated(pdf: bytes) -> bytes:
    writer = QuietWriter(BytesIO(pdf))
    page = writer.root["/Pages"]["/Kids"][0]
    numbers = [generic.NumberObject(n) for n in (0, 0, 300, 300)]
    note = generic.DictionaryObject(
        {
            generic.pdf_name("/Type"): generic.pdf_name("/Annot"),
            generic.pdf_name("/Subtype"): generic.pdf_name("/FreeText"),
            generic.pdf_name("/Contents"): generic.pdf_string("within the margin"),
            generic.pdf_name("/Rect"): generic.ArrayObject(numbers),
        }
    )
    page["/Annots"] = generic.ArrayObject([*page["/Annots"], writer.add_object(note)])
    writer.update_container(page)
    return written(writer)


def _with_page(pdf: bytes) -> bytes:
    writer = QuietWriter(BytesIO(pdf))
    pages = writer.root["/Pages"]
    first = pages["/Kids"][0].get_object()
    extra = generic.DictionaryObject({k: first[k] for k in ("/Type", "/MediaBox") if k in first})
    extra["/Parent"] = writer.root.raw_get("/Pages")
    extra["/Contents"] = writer.add_object(generic.StreamObject(stream_data=b"0 0 100 100 re f"))
    pages["/Kids"].append(writer.add_object(extra))
    pages["/Count"] = generic.NumberObject(int(pages["/Count"]) + 1)
    writer.update_root()
    writer.update_container(pages)
    return written(writer)


def _resaved(pdf: bytes) -> bytes:
    out = BytesIO()
    with pikepdf.open(BytesIO(pdf)) as document:
        document.save(out)
    return out.getvalue()


@pytest.mark.parametrize(
    ("tamper", "named"),
    [
        (lambda pdf: with_swapped_attachment(pdf, "result.json", b"{}"), "changed after it was sealed"),
        (_with_page, "changed after it was sealed"),
        (with_changed_page, "changed after it was sealed"),
        (_annotated, "changed after it was sealed"),
        (lambda pdf: with_moved_field(pdf, "Authorised"), "changed after it was sealed"),
        (lambda pdf: without_signature(pdf, "Reviewed"), "the field Reviewed was taken out or replaced"),
    ],
    ids=["attachment", "page added", "page text", "annotation", "field moved", "signature out"],
)
def test_what_is_appended_is_found_and_named(
    tamper: Tamper, named: str, complete: bytes, judged: Callable[[bytes], PdfStatus], tmp_path: Path
) -> None:
    changed = tamper(complete)
    status = judged(changed)
    assert not status.holds
    assert status.changed_after_seal
    assert any(named in problem for problem in status.problems), status.problems
    told = pdfsig(tmp_path / "report.pdf", changed)
    assert "Digest Mismatch" not in told, "a change that is appended shows in our own check alone"


@pytest.mark.parametrize("tamper", [_resaved, lambda pdf: pdf + b"\nmore\n%%EOF\n", lambda pdf: pdf[:-2000]])
def test_written_anew_lengthened_or_cut(
    tamper: Tamper, complete: bytes, judged: Callable[[bytes], PdfStatus]
) -> None:
    assert not believed(tamper(complete), judged)


def test_cut_to_the_seal_looks_untouched_in_itself(
    complete: bytes, sealed: bytes, judged: Callable[[bytes], PdfStatus]
) -> None:
    """Only the ledger shows the loss; see the tests of `verify --site`."""
    assert sealed_revision(complete) == sealed
    status = judged(sealed_revision(complete))
    assert (status.holds, status.signatures) == (True, ())


def test_a_signature_replaced_on_the_way(
    sealed: bytes, person_key: SigningKey, judged: Callable[[bytes], PdfStatus]
) -> None:
    """Cut off and signed anew by a stranger of the same name: its certificate is not trusted."""
    stranger = key_of("A. Reviewer", purpose="person")
    replaced = countersign(sealed, stranger, role="reviewed", name="A. Reviewer", at=NOW)
    status = judged(replaced)
    assert (status.holds, status.trusted) == (True, False)
    assert status.signatures[0].fingerprint_sha256 != person_key.fingerprint_sha256


def test_an_expired_certificate(sealed: bytes, service_key: SigningKey) -> None:
    """Signed on its last day it is trusted still; by its own statement later it is not."""
    short = key_of("A. Reviewer", purpose="person", start=NOW - dt.timedelta(days=9), days=5)
    roots = (service_key.certificate, short.certificate)
    status = inspect_pdf(countersigned(sealed, short, "Reviewed"), roots=roots, at=LATER)
    assert (status.signatures[0].trusted, status.trusted) == (False, False)
    assert "the certificate was not valid at the stated time" in status.signatures[0].notes


def test_a_forged_report_with_a_root_of_its_own(
    rendered: bytes, service_key: SigningKey, judged: Callable[[bytes], PdfStatus], tmp_path: Path
) -> None:
    forger = key_of("QC reports")
    forged = seal(rendered, forger, at=NOW, reason="Sealed", location="Test Laboratory")
    status = judged(forged)
    assert (status.seal.signer, status.holds, status.trusted) == ("QC reports", True, False)
    assert openssl(forged, service_key, tmp_path) != 0
    assert openssl(forged, forger, tmp_path) == 0


def openssl(pdf: bytes, root: SigningKey, folder: Path) -> int:
    """Let openssl check the first signature of a file against one root."""
    found = re.search(rb"/ByteRange \[0 (\d+) (\d+) (\d+)\s*\]", pdf)
    assert found is not None
    first, second, rest = (int(n) for n in found.groups())
    (folder / "content").write_bytes(pdf[:first] + pdf[second : second + rest])
    held = bytes.fromhex(pdf[first + 1 : second - 1].decode("ascii"))
    length = 2 + (held[1] & 0x7F) + int.from_bytes(held[2 : 2 + (held[1] & 0x7F)], "big")
    (folder / "signature").write_bytes(held[:length])
    (folder / "root.pem").write_bytes(root.certificate_pem())
    command = ["openssl", "cms", "-verify", "-binary", "-inform", "DER", "-purpose", "any"]
    files = ["-in", folder / "signature", "-content", folder / "content", "-CAfile", folder / "root.pem"]
    at = ["-attime", str(int(NOW.timestamp()) + 60), "-out", "/dev/null"]
    return subprocess.run([*command, *files, *at], capture_output=True, check=False).returncode


def test_openssl_and_pdfsig_agree_where_they_can_see(
    complete: bytes, service_key: SigningKey, tmp_path: Path
) -> None:
    assert openssl(complete, service_key, tmp_path) == 0
    changed = bytearray(complete)
    changed[len(sealed_revision(complete)) // 3] ^= 1
    assert openssl(bytes(changed), service_key, tmp_path) != 0
    assert "Digest Mismatch" in pdfsig(tmp_path / "report.pdf", bytes(changed))


def test_context_or_result_altered_and_sealed_by_another_key(
    judged: Callable[[bytes], PdfStatus],
) -> None:
    altered = rendered_report({**ATTACHED, "result.json": b'{"answer": "equivalent"}'})
    resealed = seal(altered, key_of("QC reports"), at=NOW, reason="Sealed", location="Test Laboratory")
    assert judged(resealed).trusted is False
