"""Reading the parts of a layout file that are not tables: sheet, numbers, rows left out, marks, anchors."""

from __future__ import annotations

import codecs
from typing import Any

from qcreport.toml_source import TableReader
from qcreport.workbook.layout_model import Anchor, LeaveOut, Marks, MarkUse, NumberForms, TextForm
from qcreport.workbook.places import parse_cell

_KEPT = ("keep", "include", "read")
_THOUSANDS = (",", ".", " ", "'", "’", "\u00a0", "\u202f")


def parse_sheet(reader: TableReader) -> tuple[str | None, str | None, TextForm | None]:
    """Return (name, pattern, text form) of `[sheet]`; at most one of them is set."""
    name = reader.text("name", None)
    each = reader.text("each", None)
    text = _text_form(reader.table("text")) if "text" in reader else None
    if sum(choice is not None for choice in (name, each, text)) > 1:
        reader.fault(None, 'only one of "name", "each" and "text" can be meant')
    return name, each, text


def _text_form(reader: TableReader) -> TextForm:
    delimiter = reader.text("delimiter", ",", blank=True)
    delimiter = {"tab": "\t", "\\t": "\t"}.get(delimiter, delimiter)
    if len(delimiter) != 1 or delimiter in '"\r\n':
        reader.fault("delimiter", f'must be one character, or "tab", found {delimiter!r}')
        delimiter = ","
    encoding = reader.text("encoding", "utf-8")
    try:
        codecs.lookup(encoding)
        "a".encode(encoding)
    except (LookupError, ValueError, TypeError):
        reader.fault("encoding", f"no such text encoding: {encoding!r}")
        encoding = "utf-8"
    return TextForm(delimiter=delimiter, encoding=encoding)


def parse_numbers(reader: TableReader) -> NumberForms:
    """Return `[numbers]`."""
    decimal = reader.text("decimal", None, choices=(".", ","))
    thousands = reader.text("thousands", None, choices=_THOUSANDS, blank=True)
    if decimal is not None and decimal == thousands:
        reader.fault("thousands", "must differ from the decimal mark")
    censored = reader.table("censored")
    errors, only = _errors(reader)
    return NumberForms(
        decimal=decimal,
        thousands=thousands,
        missing=tuple(text.strip() for text in reader.texts("missing", ())),
        not_detected=tuple(text.strip() for text in reader.texts("not_detected", ())),
        below=censored.text("below", None),
        above=censored.text("above", None),
        errors_missing=errors,
        missing_errors=only,
    )


def _errors(reader: TableReader) -> tuple[bool, tuple[str, ...]]:
    """Return (all errors count as missing, the errors that count as missing)."""
    raw: Any = reader.raw("errors", "refuse")
    if isinstance(raw, list):
        return False, tuple(str(text).strip().upper() for text in reader.texts("errors"))
    word = reader.text("errors", "refuse", choices=("refuse", "missing"))
    return word == "missing", ()


def parse_leave_out(reader: TableReader) -> LeaveOut:
    """Return `[leave_out_rows]`."""
    return LeaveOut(
        blank=bool(reader.flag("blank", False)),
        group_matches=tuple(reader.texts("group_matches", ())),
        sample_matches=tuple(reader.texts("sample_matches", ())),
    )


def parse_marks(reader: TableReader) -> Marks:
    """Return `[marks]`."""

    def use(key: str) -> MarkUse:
        word = reader.text(key, "keep", choices=(*_KEPT, "exclude"))
        return MarkUse.EXCLUDE if word == "exclude" else MarkUse.KEEP

    return Marks(struck=use("struck"), comments=use("comments"), hidden=use("hidden"))


def parse_anchors(reader: TableReader) -> tuple[Anchor, ...]:
    """Return `[match]`: `cells = { B1 = "Shear rig*" }`."""
    cells = reader.table("cells")
    anchors = []
    for name in cells.names():
        text = cells.text(name)
        place = parse_cell(name)
        if place is None:
            cells.fault(name, "must be named by a cell such as B1")
        elif isinstance(text, str):
            anchors.append(Anchor(row=place[0], column=place[1], text=text))
    return tuple(anchors)
