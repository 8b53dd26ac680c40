"""Attachments are taken from the sealed revision, by fixed names, within bounds."""

from __future__ import annotations

import zlib
from collections.abc import Callable
from io import BytesIO

import pikepdf
import pytest
from pikepdf import Array, Dictionary, Name, String

from qcreport.errors import NotOurReportError
from qcreport.signing import attachments
from qcreport.signing.attachments import attachments_of, is_fixed_name
from qcreport.signing.reading import sealed_revision

from .appending import with_swapped_attachment
from .conftest import ATTACHED


def carrying(change: Callable[[pikepdf.Pdf, pikepdf.Object], None]) -> bytes:
    """Return a bare PDF whose tree of attachments was made by `change`."""
    with pikepdf.new() as document:
        document.add_blank_page()
        tree = Dictionary(Names=Array())
        document.Root.Names = Dictionary(EmbeddedFiles=tree)
        change(document, document.Root.Names.EmbeddedFiles)
        out = BytesIO()
        document.save(out, compress_streams=False, stream_decode_level=pikepdf.StreamDecodeLevel.none)
    return out.getvalue()


def entry(document: pikepdf.Pdf, name: str, data: bytes, **more: object) -> list[object]:
    stream = document.make_stream(data, **more)
    return [String(name), Dictionary(Type=Name.Filespec, UF=String(name), EF=Dictionary(F=stream))]


def holding(*items: tuple[str, bytes], **more: object) -> bytes:
    def add(document: pikepdf.Pdf, tree: pikepdf.Object) -> None:
        for name, data in items:
            tree.Names.extend(entry(document, name, data, **more))

    return carrying(add)


def test_all_attachments_come_back_by_name(sealed: bytes) -> None:
    assert attachments_of(sealed_revision(sealed)) == ATTACHED


def test_a_swap_does_not_reach_the_sealed_revision(sealed: bytes) -> None:
    swapped = with_swapped_attachment(sealed, "plan.toml", b"swapped")
    assert attachments_of(swapped)["plan.toml"] == b"swapped"
    assert attachments_of(sealed_revision(swapped)) == ATTACHED


@pytest.mark.parametrize(
    "name",
    [
        "../plan.toml",
        "/etc/passwd",
        "export.XLSX",
        "export.",
        "export.xlsx/..",
        "plan.toml\n",
        "Plan.toml",
        "",
    ],
)
def test_other_names_are_left_out(name: str) -> None:
    assert not is_fixed_name(name)
    assert attachments_of(holding((name, b"x"), ("plan.toml", b"y"))) == {"plan.toml": b"y"}


def test_a_name_twice_is_refused() -> None:
    with pytest.raises(NotOurReportError, match=r"plan\.toml twice"):
        attachments_of(holding(("plan.toml", b"x"), ("plan.toml", b"y")))


def test_two_exports_are_refused() -> None:
    with pytest.raises(NotOurReportError, match="two exports"):
        attachments_of(holding(("export.xlsx", b"x"), ("export.csv", b"y")))


def test_nothing_attached_is_an_empty_answer() -> None:
    with pikepdf.new() as document:
        document.add_blank_page()
        out = BytesIO()
        document.save(out)
    assert attachments_of(out.getvalue()) == {}


def test_unpacking_stops_at_the_largest_size(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(attachments, "LARGEST_OTHER", 1000)
    fits, bomb = zlib.compress(b"\0" * 1000), zlib.compress(b"\0" * 5_000_000)
    assert attachments_of(holding(("plan.toml", fits), Filter=Name.FlateDecode)) == {
        "plan.toml": b"\0" * 1000
    }
    for data, more in ((bomb, {"Filter": Name.FlateDecode}), (b"\0" * 1001, {})):
        with pytest.raises(NotOurReportError, match="larger than"):
            attachments_of(holding(("plan.toml", data), **more))


def test_a_packed_attachment_cut_off_is_refused() -> None:
    with pytest.raises(NotOurReportError, match="cut off"):
        attachments_of(holding(("plan.toml", zlib.compress(b"abc" * 99)[:-6]), Filter=Name.FlateDecode))


@pytest.mark.parametrize(
    "filters", [Name.LZWDecode, Array([Name.FlateDecode, Name.FlateDecode]), Name.ASCIIHexDecode]
)
def test_other_packings_are_refused(filters: object) -> None:
    with pytest.raises(NotOurReportError, match="packed in a way"):
        attachments_of(holding(("plan.toml", b"00>"), Filter=filters))


def test_a_tree_that_leads_back_to_itself_ends() -> None:
    def loop(document: pikepdf.Pdf, tree: pikepdf.Object) -> None:
        node = document.make_indirect(Dictionary(Kids=Array()))
        node.Kids.append(node)
        tree.Kids = Array([node])

    with pytest.raises(NotOurReportError, match="nested too deep"):
        attachments_of(carrying(loop))


def test_a_flood_of_attachments_is_refused() -> None:
    with pytest.raises(NotOurReportError, match="more than 64"):
        attachments_of(holding(*((f"n{i}", b"") for i in range(70))))


def test_a_broken_specification_is_a_sentence() -> None:
    def broken(document: pikepdf.Pdf, tree: pikepdf.Object) -> None:
        tree.Names.extend([String("plan.toml"), Dictionary(UF=String("plan.toml"), EF=4)])

    with pytest.raises(NotOurReportError, match="damaged"):
        attachments_of(carrying(broken))
