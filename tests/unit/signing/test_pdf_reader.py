"""Object streams are read once, and just as strictly as by the stock reader."""

from __future__ import annotations

from io import BytesIO

import pytest
from pyhanko.pdf_utils import generic
from pyhanko.pdf_utils.misc import PdfStrictReadError
from pyhanko.pdf_utils.reader import PdfFileReader

from qcreport.signing.pdf_reader import IndexedReader, _Unpacked


def test_every_object_is_the_one_that_the_stock_reader_gives(sealed: bytes) -> None:
    ours, stock = IndexedReader(sealed), PdfFileReader(BytesIO(sealed), strict=True)
    references = list(stock.xrefs.explicit_refs_in_revision(0))
    assert len(references) > 20
    for reference in references:
        here = ours.get_object(generic.Reference(reference.idnum, reference.generation, ours))
        assert here == stock.get_object(reference)
    assert ours._unpacked


@pytest.mark.parametrize(
    ("data", "words"),
    [
        (_Unpacked(b"<<>>", ()), "not at its place"),
        (_Unpacked(b"<<>>", ((7, 0),)), "not at its place"),
        (_Unpacked(b"3 0 R ", ((9, 0),)), "no object stream may hold"),
    ],
)
def test_an_object_out_of_place_is_refused(sealed: bytes, data: _Unpacked, words: str) -> None:
    reader = IndexedReader(sealed)
    reader._unpacked[1] = data
    with pytest.raises(PdfStrictReadError, match=words):
        reader._get_object_from_stream(9, 1, 0)


@pytest.mark.parametrize(
    ("index", "count", "first", "words"),
    [
        (b"5 0 <<>>", 2, 4, "broken index"),
        (b"5 -1 <<>>", 1, 5, "broken index"),
        (b"5 0 <<>>", -1, 4, "cannot be"),
        (b"5 0 <<>>", 1, 99, "cannot be"),
        (b"5 0 <<>>", 10**9, 4, "cannot be"),
    ],
)
def test_a_broken_index_is_refused(
    sealed: bytes, monkeypatch: pytest.MonkeyPatch, index: bytes, count: int, first: int, words: str
) -> None:
    stream = generic.StreamObject(stream_data=index)
    stream["/Type"] = generic.pdf_name("/ObjStm")
    stream["/N"], stream["/First"] = generic.NumberObject(count), generic.NumberObject(first)
    reader = IndexedReader(sealed)
    monkeypatch.setattr(generic.Reference, "get_object", lambda _: stream)
    with pytest.raises(PdfStrictReadError, match=words):
        reader._unpack(5)


def test_what_is_no_object_stream_is_refused(sealed: bytes) -> None:
    reader = IndexedReader(sealed)
    with pytest.raises(PdfStrictReadError, match="not an object stream"):
        reader._unpack(reader.trailer.raw_get("/Root").reference.idnum)
