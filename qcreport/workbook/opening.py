"""Finding out what a dropped file is, and opening it with the reader of its format."""

from __future__ import annotations

import posixpath

from qcreport.errors import ExportRefusedError
from qcreport.workbook.archive import Archive, encrypted
from qcreport.workbook.cells import Book
from qcreport.workbook.layout_model import TextForm
from qcreport.workbook.limits import Limits, megabytes
from qcreport.workbook.ooxml import open_ooxml
from qcreport.workbook.package import read_content_types, read_relations
from qcreport.workbook.refusals import damaged, quoted, refused

_ZIP = b"PK\x03\x04"
_EMPTY_ZIP = b"PK\x05\x06"
_OLE = bytes.fromhex("d0cf11e0a1b11ae1")
_OLD_BIFF = (b"\x09\x00\x04\x00", b"\x09\x02\x06\x00", b"\x09\x04\x06\x00")
_ODS_TYPE = b"application/vnd.oasis.opendocument.spreadsheet"
_ENDINGS = {
    "xlsx": (".xlsx", ".xltx"),
    "xlsm": (".xlsm", ".xltm"),
    "xlsb": (".xlsb",),
    "xls": (".xls", ".xlt"),
    "ods": (".ods",),
}
_TEXT_ENDINGS = (".csv", ".txt", ".tsv", ".tab", ".asc", ".dat", ".prn", "")


def open_export(data: bytes, *, name: str, text: TextForm | None, limits: Limits) -> Book:
    """Return the opened export; refuse what is no workbook (or, with `text`, no text export).

    Parameters
    ----------
    data : bytes
        The file as dropped.
    name : str
        Its name; only the ending counts.
    text : TextForm or None
        How a text export is written, where the layout is for one.
    limits : Limits
        Bounds of the reading.
    """
    _check_size(data, limits)
    ending = posixpath.splitext(name)[1].lower()
    if data.startswith(_EMPTY_ZIP):
        raise _not_a_workbook("The content is an empty archive.")
    if not data.startswith((_ZIP, _OLE)):
        return _open_text(data, ending, text, limits)
    if text is not None and ending in _TEXT_ENDINGS:
        raise _wrong_extension(ending, "a workbook")
    if text is not None:
        raise _is_workbook_for_text_layout()
    if data.startswith(_OLE):
        return _open_ole(data, ending, limits)
    return _open_zip(data, ending, limits)


def _check_size(data: bytes, limits: Limits) -> None:
    if not data or (len(data) < 65_536 and not data.strip()):
        raise refused(
            "empty_file",
            where="the file",
            found=f"The file is empty ({len(data)} bytes).",
            expected="An export with a table of measurements.",
            next_step="Export it again and look whether the instrument's disk or the share is full.",
        )
    if len(data) > limits.max_file_bytes:
        raise refused(
            "too_large",
            where="the file",
            found=f"The file has {megabytes(len(data))}. It was not opened.",
            expected=f"The limit is {megabytes(limits.max_file_bytes)}.",
            next_step="Export fewer rows at a time, or ask IT to raise the limit in site.toml.",
        )


def _open_text(data: bytes, ending: str, text: TextForm | None, limits: Limits) -> Book:
    if not any(data):
        raise damaged("The file holds only zeros: it was allocated and never filled.")
    is_workbook_name = any(ending in endings for endings in _ENDINGS.values())
    if text is not None and not is_workbook_name:
        from qcreport.workbook.text_export import open_text

        return open_text(data, text, limits)
    if data.startswith(_OLD_BIFF):
        raise _unsupported("a workbook from before 1995")
    raise _not_a_workbook(_content_in_words(data, ending))


def _content_in_words(data: bytes, ending: str) -> str:
    start = data[:4096].lstrip(b"\xef\xbb\xbf \t\r\n").lower()
    if start.startswith((b"<!doctype html", b"<html", b"<table", b"<head", b"<meta")):
        what = "a web page (HTML)"
    elif start.startswith(b"<?xml"):
        what = "an XML file"
    elif start.startswith(b"%pdf"):
        what = "a PDF"
    elif b"\x00" in data[:4096] and not data.startswith((b"\xff\xfe", b"\xfe\xff")):
        what = "neither a workbook nor text"
    else:
        what = "plain text"
    return f"The name ends in {ending or 'nothing'} but the content is {what}."


def _open_ole(data: bytes, ending: str, limits: Limits) -> Book:
    if "EncryptedPackage".encode("utf-16-le") in data or "EncryptionInfo".encode("utf-16-le") in data:
        raise encrypted()
    if not any(stream.encode("utf-16-le") + b"\x00\x00" in data for stream in ("Workbook", "Book")):
        raise _not_a_workbook("The content is an old office document without a workbook in it.")
    _check_ending(ending, "xls")
    return _open_other(data, limits)


def _open_zip(data: bytes, ending: str, limits: Limits) -> Book:
    archive = Archive(data, limits)
    if "mimetype" in archive and archive.read("mimetype").strip().startswith(_ODS_TYPE):
        _check_ending(ending, "ods")
        return _open_checked_other(archive, data, limits)
    if "[Content_Types].xml" not in archive:
        raise _not_a_workbook("The content is an archive without a workbook in it.")
    types = read_content_types(archive)
    part = next((r.target for r in read_relations(archive, "").values() if r.kind == "officeDocument"), None)
    content_type = types.get((part or "").lower(), "").lower()
    if part is None or part not in archive:
        raise damaged("The workbook part is missing.")
    if "sheet.binary" in content_type or part.lower().endswith(".bin"):
        _check_ending(ending, "xlsb")
        return _open_checked_other(archive, data, limits)
    if "spreadsheetml" not in content_type and "ms-excel" not in content_type:
        raise _not_a_workbook(f"The content is an office document of another kind ({quoted(content_type)}).")
    if "macroenabled" in content_type:
        _check_ending(ending, "xlsm")
    else:
        _check_ending(ending, "xlsx", "xlsm")
    return open_ooxml(archive, part, limits)


def _open_checked_other(archive: Archive, data: bytes, limits: Limits) -> Book:
    """Check the whole archive first: the library that reads these formats does not bound it."""
    from qcreport.workbook.xml_stream import refuse_doctype

    if "META-INF/manifest.xml" in archive and b"encryption-data" in archive.read("META-INF/manifest.xml"):
        raise encrypted()
    for name in archive.unread():
        refuse_doctype(archive.chunks(name), part=name)
    return _open_other(data, limits)


def _open_other(data: bytes, limits: Limits) -> Book:
    from qcreport.workbook.other_formats import open_other

    return open_other(data, limits)


def _check_ending(ending: str, *kinds: str) -> None:
    if not any(ending in _ENDINGS[kind] for kind in kinds):
        raise _wrong_extension(ending, f"a workbook of the kind .{kinds[0]}")


def _wrong_extension(ending: str, what: str) -> ExportRefusedError:
    return refused(
        "wrong_extension",
        where="the file name",
        found=f"The name ends in {ending or 'nothing'} but the content is {what}.",
        expected="A name that ends as the content is.",
        next_step="Save it again under the right ending in the spreadsheet program and drop that.",
    )


def _is_workbook_for_text_layout() -> ExportRefusedError:
    return refused(
        "layout_mismatch",
        where="the file",
        found="The file is a workbook.",
        expected="The layout is for text exports ([sheet] text).",
        next_step="Use a layout for workbooks, or export as text.",
    )


def _not_a_workbook(found: str) -> ExportRefusedError:
    return refused(
        "not_a_workbook",
        where="the file",
        found=found,
        expected="A workbook (.xlsx, .xlsm, .xls, .xlsb, .ods).",
        next_step="Export it as a workbook, or name it .csv if text import is set up for this folder.",
    )


def _unsupported(what: str) -> ExportRefusedError:
    return refused(
        "unsupported_format",
        where="the file",
        found=f"The content is {what}.",
        expected="A workbook (.xlsx, .xlsm, .xls, .xlsb, .ods).",
        next_step="Open it in the spreadsheet program, save it as .xlsx and drop that.",
    )
